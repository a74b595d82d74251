package imaging

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"testing"

	"github.com/klauspost/compress/zlib"
	"golang.org/x/image/tiff/lzw"
	"pgregory.net/rapid"
)

// compressLZW writes a TIFF LZW stream the plain way, a code table of strings with nothing in
// common with the decoder.
func compressLZW(data []byte) []byte {
	var out []byte
	var acc uint32
	var n uint
	width := uint(9)
	emit := func(code int) {
		acc = acc<<width | uint32(code)
		for n += width; n >= 8; n -= 8 {
			out = append(out, byte(acc>>(n-8)))
		}
	}
	table := map[string]int{}
	next := 258
	code := func(s string) int {
		if len(s) == 1 {
			return int(s[0])
		}
		return table[s]
	}
	emit(256)
	run := ""
	for _, c := range data {
		longer := run + string([]byte{c})
		if _, ok := table[longer]; ok || run == "" {
			run = longer
			continue
		}
		emit(code(run))
		table[longer] = next
		next++
		switch next {
		case 512, 1024, 2048:
			width++
		case 4094:
			emit(256)
			table, next, width = map[string]int{}, 258, 9
		}
		run = string([]byte{c})
	}
	if run != "" {
		emit(code(run))
		if next++; next == 512 || next == 1024 || next == 2048 {
			width++
		}
	}
	emit(257)
	if n > 0 {
		out = append(out, byte(acc<<(8-n)))
	}
	return out
}

// patchy draws bytes with runs and repeats, as images have.
func patchy(t *rapid.T) []byte {
	var b []byte
	for range rapid.IntRange(0, 30).Draw(t, "pieces") {
		switch rapid.IntRange(0, 2).Draw(t, "piece") {
		case 0:
			b = append(b, rapid.SliceOfN(rapid.Byte(), 1, 300).Draw(t, "fresh")...)
		case 1:
			b = append(b, bytes.Repeat([]byte{rapid.Byte().Draw(t, "byte")}, rapid.IntRange(1, 3000).Draw(t, "run"))...)
		default:
			if len(b) > 0 {
				b = append(b, b[rapid.IntRange(0, len(b)-1).Draw(t, "from"):]...)
			}
		}
		if len(b) > 30000 {
			break
		}
	}
	return b
}

func TestLZWRoundTripAndAgreesWithXImage(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		want := patchy(t)
		packed := compressLZW(want)
		got := make([]byte, len(want))
		n, err := new(lzwTable).decode(got, packed)
		if err != nil || n != len(want) || !bytes.Equal(got, want) {
			t.Fatalf("%d of %d bytes, error %v, equal %v", n, len(want), err, bytes.Equal(got, want))
		}
		r := lzw.NewReader(bytes.NewReader(packed), lzw.MSB, 8)
		other, err := io.ReadAll(r)
		if err != nil || !bytes.Equal(other, want) {
			t.Fatalf("golang.org/x/image/tiff/lzw: error %v, equal %v", err, bytes.Equal(other, want))
		}
	})
}

// On any bytes at all the decoder must agree with x/image's as far as that one goes.
func TestLZWOnAnyBytes(t *testing.T) {
	table := new(lzwTable)
	rapid.Check(t, func(t *rapid.T) {
		src := rapid.SliceOfN(rapid.Byte(), 0, 200).Draw(t, "src")
		got := make([]byte, 5000)
		n, err := table.decode(got, src)
		if errors.Is(err, errLZWOld) {
			return
		}
		want, _ := io.ReadAll(io.LimitReader(lzw.NewReader(bytes.NewReader(src), lzw.MSB, 8), 5000))
		if n < len(want) || !bytes.Equal(got[:len(want)], want) {
			t.Fatalf("decoded % x, x/image % x", got[:n], want)
		}
	})
}

func TestPackBitsExample(t *testing.T) {
	// Packed and unpacked bytes of the example in Apple Technical Note TN1023, from memory.
	packed := []byte{0xFE, 0xAA, 0x02, 0x80, 0x00, 0x2A, 0xFD, 0xAA, 0x03, 0x80, 0x00, 0x2A, 0x22, 0xF7, 0xAA}
	want := []byte{
		0xAA, 0xAA, 0xAA, 0x80, 0x00, 0x2A, 0xAA, 0xAA, 0xAA, 0xAA, 0x80, 0x00, 0x2A, 0x22, 0xAA, 0xAA, 0xAA, 0xAA, 0xAA, 0xAA,
		0xAA, 0xAA, 0xAA, 0xAA,
	}
	for _, cut := range []int{0, 1, 5} {
		got := make([]byte, len(want)-cut)
		if n := unpackBits(got, packed); n != len(got) || !bytes.Equal(got, want[:len(got)]) {
			t.Errorf("%d bytes % X, want % X", n, got, want[:len(got)])
		}
	}
	got := make([]byte, len(want)+3)
	if n := unpackBits(got, packed); n != len(want) {
		t.Errorf("%d bytes, want %d: there are no more", n, len(want))
	}
	if n := unpackBits(got, []byte{0x80, 0x00, 0x07}); n != 1 || got[0] != 7 {
		t.Errorf("%d bytes, first %d, want the byte 7 behind a no-operation", n, got[0])
	}
}

func deflate(b []byte) []byte {
	var out bytes.Buffer
	z := zlib.NewWriter(&out)
	z.Write(b)
	z.Close()
	return out.Bytes()
}

// Predictor 3 stores the most significant bytes first in either byte order (Adobe Photoshop
// TIFF Technical Note 3, 2005): the two files differ in their tags only.
func TestFloatPredictorInBothByteOrders(t *testing.T) {
	const w, h = 7, 3
	value := func(x, y int) float32 { return float32(math.Sqrt(float64(x*x+31*y))) - 2.5 }
	var data []byte
	for y := range h {
		row := make([]byte, 4*w)
		for x := range w {
			for i, b := range binary.BigEndian.AppendUint32(nil, math.Float32bits(value(x, y))) {
				row[i*w+x] = b
			}
		}
		for i := len(row) - 1; i > 0; i-- {
			row[i] -= row[i-1]
		}
		data = append(data, row...)
	}
	for _, big := range []bool{false, true} {
		file := testFile{bigEndian: big, pages: []testPage{{
			tags:   greyTags(w, h, 32, short(339, 3), short(259, 8), short(317, 3)),
			chunks: [][]byte{deflate(data)},
		}}}
		s := mustOpen(t, file.bytes())
		var f Frame
		if err := s.ReadFrame(0, 0, &f); err != nil {
			t.Fatal(err)
		}
		samePixels(t, f, w, h, value)
	}
}

// Integer predictor of floats, and 16 bits big endian, against differences taken here.
func TestDifferencesBigEndian(t *testing.T) {
	const w, h = 9, 4
	v16 := func(x, y int) uint16 { return uint16(x*x*7919 + y*104) }
	v32 := func(x, y int) float32 { return float32(x) - 1.25*float32(y) }
	var d16, d32 []byte
	for y := range h {
		var p16 uint16
		var p32 uint32
		for x := range w {
			d16 = binary.BigEndian.AppendUint16(d16, v16(x, y)-p16)
			p16 = v16(x, y)
			bits := math.Float32bits(v32(x, y))
			d32 = binary.BigEndian.AppendUint32(d32, bits-p32)
			p32 = bits
		}
	}
	var f Frame
	s := mustOpen(t, testFile{bigEndian: true, pages: []testPage{{
		tags: greyTags(w, h, 16, short(259, 32946), short(317, 2)), chunks: [][]byte{deflate(d16)}}}}.bytes())
	if err := s.ReadFrame(0, 0, &f); err != nil {
		t.Fatal(err)
	}
	samePixels(t, f, w, h, func(x, y int) float32 { return float32(v16(x, y)) })
	s = mustOpen(t, testFile{bigEndian: true, pages: []testPage{{
		tags: greyTags(w, h, 32, short(339, 3), short(259, 8), short(317, 2)), chunks: [][]byte{deflate(d32)}}}}.bytes())
	if err := s.ReadFrame(0, 0, &f); err != nil {
		t.Fatal(err)
	}
	samePixels(t, f, w, h, v32)
}

func TestWhiteIsZeroIsInverted(t *testing.T) {
	s := mustOpen(t, testFile{pages: []testPage{{tags: greyTags(3, 1, 8, short(262, 0)), chunks: [][]byte{{0, 200, 255}}}}}.bytes())
	var f Frame
	if err := s.ReadFrame(0, 0, &f); err != nil {
		t.Fatal(err)
	}
	samePixels(t, f, 3, 1, func(x, _ int) float32 { return []float32{255, 55, 0}[x] })
	if w := s.Info().Warnings; len(w) != 1 || w[0] != "the file stores zero as white: pixels were inverted, 255 minus the stored value" {
		t.Errorf("warnings %q", w)
	}
}
