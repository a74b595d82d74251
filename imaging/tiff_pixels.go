package imaging

import (
	"encoding/binary"
	"math"
)

// rowFunc turns one stored row into pixel values. dst may be shorter than the row (a tile
// that reaches over the border); src is always the whole row, and may be overwritten.
type rowFunc func(dst []float32, src []byte)

// rowDecoder picks the conversion of a page's rows, with its predictor undone on the way.
func (p *page) rowDecoder(bigEndian bool) rowFunc {
	diff := p.usesPredictor()
	switch {
	case p.sampleFormat == formatFloat && diff && p.predictor == 3:
		return rowFloatBytePlanes
	case p.sampleFormat == formatFloat && diff && bigEndian:
		return rowFloatDiffBE
	case p.sampleFormat == formatFloat && diff:
		return rowFloatDiffLE
	case p.sampleFormat == formatFloat && bigEndian:
		return rowFloatBE
	case p.sampleFormat == formatFloat:
		return rowFloatLE
	case p.bits == 8 && diff:
		return row8Diff
	case p.bits == 8:
		return row8
	case diff && bigEndian:
		return row16DiffBE
	case diff:
		return row16DiffLE
	case bigEndian:
		return row16BE
	}
	return row16LE
}

func row8(dst []float32, src []byte) {
	src = src[:len(dst)]
	for i, v := range src {
		dst[i] = float32(v)
	}
}

func row8Diff(dst []float32, src []byte) {
	src = src[:len(dst)]
	var sum uint8
	for i, v := range src {
		sum += v
		dst[i] = float32(sum)
	}
}

func row16LE(dst []float32, src []byte) {
	for len(dst) >= 4 && len(src) >= 8 {
		v := binary.LittleEndian.Uint64(src)
		dst[0] = float32(uint16(v))
		dst[1] = float32(uint16(v >> 16))
		dst[2] = float32(uint16(v >> 32))
		dst[3] = float32(uint16(v >> 48))
		dst, src = dst[4:], src[8:]
	}
	for i := range dst {
		dst[i] = float32(binary.LittleEndian.Uint16(src[2*i:]))
	}
}

func row16BE(dst []float32, src []byte) {
	for len(dst) >= 4 && len(src) >= 8 {
		v := binary.BigEndian.Uint64(src)
		dst[0] = float32(uint16(v >> 48))
		dst[1] = float32(uint16(v >> 32))
		dst[2] = float32(uint16(v >> 16))
		dst[3] = float32(uint16(v))
		dst, src = dst[4:], src[8:]
	}
	for i := range dst {
		dst[i] = float32(binary.BigEndian.Uint16(src[2*i:]))
	}
}

func row16DiffLE(dst []float32, src []byte) {
	var sum uint16
	for len(dst) >= 4 && len(src) >= 8 {
		v := binary.LittleEndian.Uint64(src)
		a := sum + uint16(v)
		b := a + uint16(v>>16)
		c := b + uint16(v>>32)
		sum = c + uint16(v>>48)
		dst[0], dst[1], dst[2], dst[3] = float32(a), float32(b), float32(c), float32(sum)
		dst, src = dst[4:], src[8:]
	}
	for i := range dst {
		sum += binary.LittleEndian.Uint16(src[2*i:])
		dst[i] = float32(sum)
	}
}

func row16DiffBE(dst []float32, src []byte) {
	var sum uint16
	for len(dst) >= 4 && len(src) >= 8 {
		v := binary.BigEndian.Uint64(src)
		a := sum + uint16(v>>48)
		b := a + uint16(v>>32)
		c := b + uint16(v>>16)
		sum = c + uint16(v)
		dst[0], dst[1], dst[2], dst[3] = float32(a), float32(b), float32(c), float32(sum)
		dst, src = dst[4:], src[8:]
	}
	for i := range dst {
		sum += binary.BigEndian.Uint16(src[2*i:])
		dst[i] = float32(sum)
	}
}

func rowFloatLE(dst []float32, src []byte) {
	for i := range dst {
		dst[i] = math.Float32frombits(binary.LittleEndian.Uint32(src[4*i:]))
	}
}

func rowFloatBE(dst []float32, src []byte) {
	for i := range dst {
		dst[i] = math.Float32frombits(binary.BigEndian.Uint32(src[4*i:]))
	}
}

// With predictor 2 floats are differenced as the 32-bit integers that share their bits.

func rowFloatDiffLE(dst []float32, src []byte) {
	var sum uint32
	for i := range dst {
		sum += binary.LittleEndian.Uint32(src[4*i:])
		dst[i] = math.Float32frombits(sum)
	}
}

func rowFloatDiffBE(dst []float32, src []byte) {
	var sum uint32
	for i := range dst {
		sum += binary.BigEndian.Uint32(src[4*i:])
		dst[i] = math.Float32frombits(sum)
	}
}

// rowFloatBytePlanes undoes predictor 3: the row holds all first bytes, then all second ones
// and so on, the most significant first whatever the file's byte order, and then byte
// differences were taken along it. Source: Adobe Photoshop TIFF Technical Note 3 (2005).
func rowFloatBytePlanes(dst []float32, src []byte) {
	var sum uint8
	for i, v := range src {
		sum += v
		src[i] = sum
	}
	n := len(src) / 4
	a, b, c, d := src[:n], src[n:2*n], src[2*n:3*n], src[3*n:4*n]
	for i := range dst {
		dst[i] = math.Float32frombits(uint32(a[i])<<24 | uint32(b[i])<<16 | uint32(c[i])<<8 | uint32(d[i]))
	}
}
