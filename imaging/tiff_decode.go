package imaging

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math"

	"github.com/klauspost/compress/zlib"
	"github.com/klauspost/compress/zstd"
)

// decoder turns pages into frames. It belongs to one goroutine at a time and keeps its
// buffers from page to page.
type decoder struct {
	pageReader
	raw    []byte // compressed bytes
	plain  []byte // one chunk without compression
	lzw    *lzwTable
	bytes  bytes.Reader
	zlib   io.ReadCloser
	zstd   *zstd.Decoder
	extra  [1]byte
	spanAt int64 // of raw, where it holds all chunks of the page
}

// grow gives a buffer of n bytes, the old one where it suffices.
func grow(b []byte, n int) []byte {
	if cap(b) < n {
		return make([]byte, n)
	}
	return b[:n]
}

// decode fills dst with the page that r.read parsed last.
func (d *decoder) decode(dst *Frame) error {
	p := &d.page
	toRow := p.rowDecoder(d.src.bigEndian)
	d.fetchSpan()
	dst.Resize(p.width, p.height)
	rowBytes := p.chunkW * p.pixelBytes()
	for i := range p.offsets {
		plain, err := d.chunk(i)
		if err != nil {
			return err
		}
		x0, y0 := i%p.across*p.chunkW, i/p.across*p.chunkH
		x1, rows := min(x0+p.chunkW, p.width), min(p.chunkRows(i), p.height-y0)
		for y := range rows {
			line := dst.Pix[(y0+y)*p.width : (y0+y+1)*p.width]
			toRow(line[x0:x1], plain[y*rowBytes:(y+1)*rowBytes])
		}
	}
	if p.photometric == photometricMinIsWhite {
		white := float32(p.maxCount())
		for i, v := range dst.Pix {
			dst.Pix[i] = white - v
		}
	}
	if p.sampleFormat == formatFloat {
		return checkFinite(dst)
	}
	return nil
}

// maxCount is the largest value of an integer pixel; NaN for float.
func (p *page) maxCount() float64 {
	if p.sampleFormat == formatFloat {
		return math.NaN()
	}
	return float64(uint64(1)<<p.bits - 1)
}

// checkFinite refuses pixels that no later sum would survive.
func checkFinite(f *Frame) error {
	for i, v := range f.Pix {
		if v-v != 0 { // NaN and the infinities
			return unsupported("pixel (%d, %d) is %v, want a finite number", i%f.Width, i/f.Width, v)
		}
	}
	return nil
}

// fetchSpan reads all chunks at once where they stand close together, which most writers
// see to: one read in place of one for each row of a finely striped page.
func (d *decoder) fetchSpan() {
	p := &d.page
	d.spanAt = -1
	if len(p.offsets) < 2 {
		return
	}
	first, last, total := int64(math.MaxInt64), int64(0), int64(0)
	for i, off := range p.offsets {
		first = min(first, off)
		last = max(last, off+p.counts[i])
		total += p.counts[i]
	}
	if last-first > total+windowBytes {
		return
	}
	d.raw = grow(d.raw, int(last-first))
	if n, _ := d.src.r.ReadAt(d.raw, first); n == len(d.raw) {
		d.spanAt = first
	}
}

// chunk returns the bytes of chunk i without compression; they hold until the next call.
func (d *decoder) chunk(i int) ([]byte, error) {
	p := &d.page
	off, size := p.offsets[i], int(p.counts[i])
	var raw []byte
	if d.spanAt >= 0 {
		at := int(off - d.spanAt)
		raw = d.raw[at : at+size]
	} else {
		d.raw = grow(d.raw, size)
		raw = d.raw
		if n, err := d.src.r.ReadAt(raw, off); n < size {
			return nil, readFailed(off, size, err)
		}
	}
	if p.compression == compressionNone {
		return raw, nil
	}
	want := p.chunkBytes(i)
	d.plain = grow(d.plain, want)
	n, err := d.expand(d.plain, raw)
	words, _ := compressionWords(p.compression)
	switch {
	case errors.Is(err, errLZWOld):
		return nil, unsupported("%s %d of %d: %v", p.chunkName(), i+1, len(p.offsets), err)
	case err != nil:
		return nil, &fault{
			text: fmt.Sprintf("%s %d of %d: %s data spoilt after %d of %d bytes: %v",
				p.chunkName(), i+1, len(p.offsets), words, n, want, err),
			damaged: true, cause: err,
		}
	case n < want:
		return nil, damaged("%s %d of %d: %s data end after %d of %d bytes", p.chunkName(), i+1, len(p.offsets), words, n, want)
	}
	return d.plain, nil
}

// expand undoes the compression of the page and returns how many bytes of dst it filled.
func (d *decoder) expand(dst, src []byte) (int, error) {
	switch d.page.compression {
	case compressionLZW:
		if d.lzw == nil {
			d.lzw = new(lzwTable)
		}
		return d.lzw.decode(dst, src)
	case compressionPackBits:
		return unpackBits(dst, src), nil
	case compressionZstd:
		return d.expandZstd(dst, src)
	}
	return d.expandDeflate(dst, src)
}

func (d *decoder) expandDeflate(dst, src []byte) (int, error) {
	d.bytes.Reset(src)
	var err error
	if d.zlib == nil {
		var z io.ReadCloser
		if z, err = zlib.NewReader(&d.bytes); err == nil {
			d.zlib = z
		}
	} else {
		err = d.zlib.(zlib.Resetter).Reset(&d.bytes, nil)
	}
	if err != nil {
		return 0, err
	}
	return d.fill(dst, d.zlib, zlib.ErrChecksum)
}

func (d *decoder) expandZstd(dst, src []byte) (int, error) {
	d.bytes.Reset(src)
	if d.zstd == nil {
		z, err := zstd.NewReader(nil, zstd.WithDecoderConcurrency(1), zstd.WithDecoderLowmem(true),
			zstd.WithDecoderMaxMemory(uint64(d.maxPageBytes)), zstd.WithDecoderMaxWindow(64<<20))
		if err != nil {
			return 0, err
		}
		d.zstd = z
	}
	if err := d.zstd.Reset(&d.bytes); err != nil {
		return 0, err
	}
	return d.fill(dst, d.zstd, zstd.ErrCRCMismatch)
}

// fill reads dst full from r. Data beyond dst are let be, as some writers pad the last strip,
// but a checksum that stands right behind the pixels is held against them.
func (d *decoder) fill(dst []byte, r io.Reader, checksum error) (int, error) {
	n, err := io.ReadFull(r, dst)
	if err == io.EOF || err == io.ErrUnexpectedEOF {
		return n, nil // the caller sees that n is short
	}
	if err != nil {
		return n, err
	}
	if _, err = r.Read(d.extra[:]); errors.Is(err, checksum) {
		return n, err
	}
	return n, nil
}

// close frees what the garbage collector would not.
func (d *decoder) close() {
	if d.zstd != nil {
		d.zstd.Close()
	}
}
