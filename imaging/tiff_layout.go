package imaging

import "math"

// A chunk is a strip or a tile: the piece of a page that is compressed on its own.

func (p *page) chunkName() string {
	if p.tiled {
		return "tile"
	}
	return "strip"
}

// chunkRows is the number of rows stored in chunk i; the last strip may be short, tiles never.
func (p *page) chunkRows(i int) int {
	if !p.tiled {
		return min(p.chunkH, p.height-i*p.chunkH)
	}
	return p.chunkH
}

// chunkBytes is the size of chunk i without compression.
func (p *page) chunkBytes(i int) int {
	return p.chunkRows(i) * p.chunkW * p.pixelBytes()
}

// chunks works out how the page is cut up and reads the tables of offsets and sizes. After
// it, every chunk lies within the file and can hold the pixels that it should.
func (r *pageReader) chunks(l *chunkTags) error {
	p := &r.page
	px := int64(p.pixelBytes())
	w, h := int64(p.width), int64(p.height)
	if w > r.maxPageBytes/px/h {
		return unsupported("%d x %d pixels of %d bits, want at most %d bytes for a page", p.width, p.height, p.bits, r.maxPageBytes)
	}
	offsets, sizes := l.stripOffsets, l.stripLen
	p.tiled = l.tileOffsets.tag != 0
	if p.tiled {
		offsets, sizes = l.tileOffsets, l.tileLen
		tw, th := l.tileWidth, l.tileLength
		if tw < 1 || th < 1 || tw > r.maxPageBytes/px || th > r.maxPageBytes/px/tw {
			return damaged("tiles of %d x %d pixels, want at least 1 x 1 and at most %d bytes", tw, th, r.maxPageBytes)
		}
		p.chunkW, p.chunkH = int(tw), int(th)
	} else {
		rows := l.rowsPerStrip
		if rows <= 0 || rows > h {
			rows = h // 0 and 2³²−1 both mean the whole page
		}
		p.chunkW, p.chunkH = p.width, int(rows)
	}
	p.across = (p.width + p.chunkW - 1) / p.chunkW
	p.down = (p.height + p.chunkH - 1) / p.chunkH
	n := int64(p.across) * int64(p.down)

	if offsets.tag == 0 {
		return damaged("no strip or tile offsets: the directory does not say where the pixels are")
	}
	if offsets.count < n {
		return damaged("%d %s offsets, want %d", offsets.count, p.chunkName(), n)
	}
	var err error
	if p.offsets, err = r.integers(p.offsets, offsets); err != nil {
		return err
	}
	p.offsets = p.offsets[:n]
	switch {
	case sizes.tag != 0:
		if sizes.count < n {
			return damaged("%d %s byte counts, want %d", sizes.count, p.chunkName(), n)
		}
		if p.counts, err = r.integers(p.counts, sizes); err != nil {
			return err
		}
		p.counts = p.counts[:n]
	case p.compression == compressionNone: // some old writers leave the counts out
		for i := range int(n) {
			p.counts = append(p.counts, int64(p.chunkBytes(i)))
		}
	default:
		return damaged("no %s byte counts", p.chunkName())
	}
	for i := range int(n) {
		if err := r.checkChunk(i); err != nil {
			return err
		}
	}
	return nil
}

// mostFrom bounds the bytes that size compressed bytes can expand to. Deflate reaches 1032
// (RFC 1951: a 258-byte match in two bits), an LZW code stands for fewer than 4096 bytes and
// takes at least 9 bits, PackBits makes 128 bytes of two. Zstandard has no useful bound.
func mostFrom(compression int, size int64) int64 {
	switch compression {
	case compressionNone:
		return size
	case compressionLZW:
		return size * 4096
	case compressionDeflate, compressionDeflateOld:
		return size * 1040
	case compressionPackBits:
		return size * 64
	}
	return math.MaxInt64
}

// checkChunk holds chunk i against the file and limits its size to what can be of use.
func (r *pageReader) checkChunk(i int) error {
	p := &r.page
	want := int64(p.chunkBytes(i))
	off, size := p.offsets[i], p.counts[i]
	if off > r.src.size || size > r.src.size-off {
		if size > math.MaxInt64-off {
			size = math.MaxInt64 - off
		}
		return damaged("%s %d of %d needs bytes %d to %d, the file ends at byte %d",
			p.chunkName(), i+1, len(p.offsets), off, off+size, r.src.size)
	}
	if p.compression == compressionNone {
		if size < want {
			return damaged("%s %d of %d has %d bytes, want %d", p.chunkName(), i+1, len(p.offsets), size, want)
		}
		p.counts[i] = want
		return nil
	}
	if most := 2*want + 1024; size > most {
		size = most
		p.counts[i] = most
	}
	if most := mostFrom(p.compression, size); size == 0 || most < want {
		words, _ := compressionWords(p.compression)
		return damaged("%s %d of %d has %d bytes of %s data, too few for %d bytes of pixels",
			p.chunkName(), i+1, len(p.offsets), size, words, want)
	}
	return nil
}
