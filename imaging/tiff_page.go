package imaging

import (
	"fmt"
	"math"
)

// Tags of TIFF 6.0 (Adobe, 1992) that the reader and the writer use.
const (
	tagNewSubfileType  = 254
	tagSubfileType     = 255
	tagImageWidth      = 256
	tagImageLength     = 257
	tagBitsPerSample   = 258
	tagCompression     = 259
	tagPhotometric     = 262
	tagFillOrder       = 266
	tagDescription     = 270
	tagStripOffsets    = 273
	tagSamplesPerPixel = 277
	tagRowsPerStrip    = 278
	tagStripByteCounts = 279
	tagXResolution     = 282
	tagYResolution     = 283
	tagPlanarConfig    = 284
	tagResolutionUnit  = 296
	tagSoftware        = 305
	tagPredictor       = 317
	tagTileWidth       = 322
	tagTileLength      = 323
	tagTileOffsets     = 324
	tagTileByteCounts  = 325
	tagSampleFormat    = 339
)

const (
	maxEntries     = 4096      // of a directory
	maxTagBytes    = 64 << 20  // of one tag's values
	maxPages       = 4_000_000 // of a file
	defaultMaxPage = 1 << 30   // bytes of pixels of one page
)

// typeBytes is the size of the values of each field type; 0 is no type.
var typeBytes = [19]int{1: 1, 2: 1, 3: 2, 4: 4, 5: 8, 6: 1, 7: 1, 8: 2, 9: 4, 10: 8, 11: 4, 12: 8, 13: 4, 16: 8, 17: 8, 18: 8}

// entry is one field of a directory: count values of a type at offset at in the file.
type entry struct {
	tag, typ uint16
	count    int64
	at       int64
}

// page is one image directory. It is filled anew from the file for every decode, so that the
// tables of strips are never held for more than one page at a time.
type page struct {
	next          int64
	reduced       bool // a thumbnail or a mask, not a plane
	width, height int
	bits          int
	sampleFormat  int
	samples       int
	compression   int
	photometric   int
	fillOrder     int
	predictor     int
	planar        int
	tiled         bool
	chunkW        int // strip or tile
	chunkH        int
	across, down  int
	offsets       []int64
	counts        []int64
	description   entry
	xres, yres    float64 // pixels per unit, NaN where the tag is missing
	resUnit       int
}

// pageReader reads directories one after the other into the same memory.
type pageReader struct {
	window
	maxPageBytes int64
	entries      []byte
	page         page
}

// read parses the directory at off into r.page and checks all of it against the file's size.
func (r *pageReader) read(off int64) error {
	s := r.src
	countBytes, entryBytes, nextBytes := int64(2), int64(12), int64(4)
	if s.bigTIFF {
		countBytes, entryBytes, nextBytes = 8, 20, 8
	}
	if off < 0 || off > s.size-countBytes {
		return damaged("its directory is at byte %d, the file ends at byte %d", off, s.size)
	}
	b, err := r.bytes(off, int(countBytes))
	if err != nil {
		return err
	}
	n := uint64(s.u16(b))
	if s.bigTIFF {
		n = s.u64(b)
	}
	if n == 0 || n > maxEntries {
		return damaged("its directory at byte %d has %d entries, want 1 to %d", off, n, maxEntries)
	}
	body := off + countBytes
	need := int64(n)*entryBytes + nextBytes
	if need > s.size-body {
		return damaged("its directory needs bytes %d to %d, the file ends at byte %d", off, body+need, s.size)
	}
	if b, err = r.bytes(body, int(need)); err != nil {
		return err
	}
	r.entries = append(r.entries[:0], b...)

	p := &r.page
	*p = page{
		offsets: p.offsets[:0], counts: p.counts[:0],
		bits: 1, sampleFormat: 1, samples: 1, compression: 1, photometric: -1, fillOrder: 1,
		predictor: 1, planar: 1, resUnit: 2, xres: math.NaN(), yres: math.NaN(),
	}
	tail := r.entries[int64(n)*entryBytes:]
	if s.bigTIFF {
		p.next = clampOffset(s.u64(tail))
	} else {
		p.next = int64(s.u32(tail))
	}
	var l chunkTags
	for i := range int64(n) {
		e := s.entry(r.entries[i*entryBytes:], body+i*entryBytes)
		if err := r.field(e, &l); err != nil {
			return err
		}
	}
	if p.reduced {
		return nil
	}
	if err := p.supported(); err != nil {
		return err
	}
	return r.chunks(&l)
}

// clampOffset keeps an offset that no file can have from becoming negative.
func clampOffset(v uint64) int64 {
	if v > math.MaxInt64 {
		return math.MaxInt64
	}
	return int64(v)
}

// entry decodes the field whose bytes b stand at offset at.
func (s *source) entry(b []byte, at int64) entry {
	e := entry{tag: s.u16(b), typ: s.u16(b[2:])}
	size := int64(0)
	if int(e.typ) < len(typeBytes) {
		size = int64(typeBytes[e.typ])
	}
	if s.bigTIFF {
		e.count = clampOffset(s.u64(b[4:]))
		e.at = at + 12
		if size > 0 && e.count > 8/size {
			e.at = clampOffset(s.u64(b[12:]))
		}
		return e
	}
	e.count = int64(s.u32(b[4:]))
	e.at = at + 8
	if size > 0 && e.count > 4/size {
		e.at = int64(s.u32(b[8:]))
	}
	return e
}

// chunkTags are the fields that say where the pixels are, kept until all of a directory is read.
type chunkTags struct {
	rowsPerStrip           int64
	tileWidth, tileLength  int64
	stripOffsets, stripLen entry
	tileOffsets, tileLen   entry
}

// field takes one entry into the page. Tags without a use here are passed over unread.
func (r *pageReader) field(e entry, l *chunkTags) (err error) {
	p := &r.page
	small := func(dst *int) {
		var v int64
		if v, err = r.integer(e); err == nil {
			*dst = int(min(v, math.MaxInt32))
		}
	}
	switch e.tag {
	case tagNewSubfileType:
		var v int
		small(&v)
		p.reduced = p.reduced || v&(1|4) != 0
	case tagSubfileType:
		var v int
		small(&v)
		p.reduced = p.reduced || v == 2
	case tagImageWidth:
		small(&p.width)
	case tagImageLength:
		small(&p.height)
	case tagBitsPerSample:
		p.bits, err = r.same(e)
	case tagSampleFormat:
		p.sampleFormat, err = r.same(e)
	case tagCompression:
		small(&p.compression)
	case tagPhotometric:
		small(&p.photometric)
	case tagFillOrder:
		small(&p.fillOrder)
	case tagSamplesPerPixel:
		small(&p.samples)
	case tagPlanarConfig:
		small(&p.planar)
	case tagPredictor:
		small(&p.predictor)
	case tagResolutionUnit:
		small(&p.resUnit)
	case tagXResolution:
		p.xres, err = r.rational(e)
	case tagYResolution:
		p.yres, err = r.rational(e)
	case tagDescription:
		p.description = e
	case tagRowsPerStrip:
		l.rowsPerStrip, err = r.integer(e)
	case tagTileWidth:
		l.tileWidth, err = r.integer(e)
	case tagTileLength:
		l.tileLength, err = r.integer(e)
	case tagStripOffsets:
		l.stripOffsets = e
	case tagStripByteCounts:
		l.stripLen = e
	case tagTileOffsets:
		l.tileOffsets = e
	case tagTileByteCounts:
		l.tileLen = e
	}
	return err
}

// tagName gives the tags of the error messages a name.
func tagName(tag uint16) string {
	names := map[uint16]string{
		tagImageWidth: "ImageWidth", tagImageLength: "ImageLength", tagBitsPerSample: "BitsPerSample",
		tagDescription: "ImageDescription", tagStripOffsets: "StripOffsets", tagStripByteCounts: "StripByteCounts",
		tagTileOffsets: "TileOffsets", tagTileByteCounts: "TileByteCounts", tagXResolution: "XResolution",
		tagYResolution: "YResolution", tagRowsPerStrip: "RowsPerStrip", tagSampleFormat: "SampleFormat",
	}
	if n, ok := names[tag]; ok {
		return fmt.Sprintf("tag %d (%s)", tag, n)
	}
	return fmt.Sprintf("tag %d", tag)
}

// value returns the bytes of a field, with the size of one of its values.
func (r *pageReader) value(e entry) ([]byte, int, error) {
	if int(e.typ) >= len(typeBytes) || typeBytes[e.typ] == 0 {
		return nil, 0, damaged("%s has the unknown field type %d", tagName(e.tag), e.typ)
	}
	size := int64(typeBytes[e.typ])
	if e.count > maxTagBytes/size {
		return nil, 0, damaged("%s has %d values of %d bytes, want at most %d bytes", tagName(e.tag), e.count, size, maxTagBytes)
	}
	if n := e.count * size; e.at > r.src.size-n {
		return nil, 0, damaged("%s needs bytes %d to %d, the file ends at byte %d", tagName(e.tag), e.at, e.at+n, r.src.size)
	}
	b, err := r.bytes(e.at, int(e.count*size))
	return b, int(size), err
}

// integers appends the values of an unsigned integer field to dst.
func (r *pageReader) integers(dst []int64, e entry) ([]int64, error) {
	b, size, err := r.value(e)
	if err != nil {
		return dst, err
	}
	s := r.src
	switch e.typ {
	case 1:
		for _, v := range b {
			dst = append(dst, int64(v))
		}
	case 3:
		for ; len(b) >= 2; b = b[2:] {
			dst = append(dst, int64(s.u16(b)))
		}
	case 4, 13:
		for ; len(b) >= 4; b = b[4:] {
			dst = append(dst, int64(s.u32(b)))
		}
	case 16, 18:
		for ; len(b) >= 8; b = b[8:] {
			dst = append(dst, clampOffset(s.u64(b)))
		}
	default:
		return dst, damaged("%s has field type %d (%d bytes), want an unsigned integer", tagName(e.tag), e.typ, size)
	}
	return dst, nil
}

// integer returns the one value of a field.
func (r *pageReader) integer(e entry) (int64, error) {
	if e.count != 1 {
		return 0, damaged("%s has %d values, want 1", tagName(e.tag), e.count)
	}
	var one [1]int64
	v, err := r.integers(one[:0], e)
	if err != nil {
		return 0, err
	}
	return v[0], nil
}

// same returns the value that a field gives for each sample, −1 where they differ.
func (r *pageReader) same(e entry) (int, error) {
	if e.count < 1 || e.count > 64 {
		return 0, damaged("%s has %d values, want one for each sample", tagName(e.tag), e.count)
	}
	var few [64]int64
	v, err := r.integers(few[:0], e)
	if err != nil {
		return 0, err
	}
	for _, w := range v[1:] {
		if w != v[0] {
			return -1, nil
		}
	}
	return int(min(v[0], math.MaxInt32)), nil
}

// rational returns a field of one fraction; NaN where it is not a positive number.
func (r *pageReader) rational(e entry) (float64, error) {
	if e.count != 1 || e.typ != 5 {
		return math.NaN(), nil
	}
	b, _, err := r.value(e)
	if err != nil {
		return math.NaN(), err
	}
	v := float64(r.src.u32(b)) / float64(r.src.u32(b[4:]))
	if !(v > 0) || math.IsInf(v, 0) {
		return math.NaN(), nil
	}
	return v, nil
}
