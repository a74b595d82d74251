package imaging

import (
	"encoding/binary"
	"math/rand/v2"
	"path/filepath"
	"testing"
)

// noisyFrame has the entropy of a camera's frame: 100 counts of offset and noise of 20.
func noisyFrame(w, h int) Frame {
	rng := rand.New(rand.NewPCG(1, 2))
	f := NewFrame(w, h)
	for i := range f.Pix {
		f.Pix[i] = float32(int(100 + 20*rng.NormFloat64() + 200))
	}
	return f
}

func benchRead(b *testing.B, s *Stack) {
	b.Helper()
	in := s.Info()
	b.SetBytes(int64(in.Width * in.Height * 2))
	b.ReportAllocs()
	var f Frame
	for i := 0; b.Loop(); i++ {
		if err := s.ReadFrame(0, i%s.Frames(), &f); err != nil {
			b.Fatal(err)
		}
	}
}

func benchWritten(b *testing.B, m StackMeta) {
	b.Helper()
	m.Width, m.Height, m.Frames = 512, 512, 2
	path := filepath.Join(b.TempDir(), "a.tif")
	f := noisyFrame(512, 512)
	if err := writeStack(path, m, []Frame{f, f}); err != nil {
		b.Fatal(err)
	}
	s, err := Open(path, OpenOptions{})
	if err != nil {
		b.Fatal(err)
	}
	defer s.Close()
	benchRead(b, s)
}

func BenchmarkReadUncompressed(b *testing.B) { benchWritten(b, StackMeta{Uncompressed: true}) }

func BenchmarkReadDeflatePredictor(b *testing.B) { benchWritten(b, StackMeta{}) }

// packedStack is a stack of one page of 512 x 512 pixels in strips of 16 rows.
func packedStack(b *testing.B, compression uint64, pack func([]byte) []byte) *Stack {
	f := noisyFrame(512, 512)
	p := testPage{tags: greyTags(512, 512, 16, long(278, 16), short(259, compression))}
	for y := 0; y < 512; y += 16 {
		var raw []byte
		for _, v := range f.Pix[y*512 : (y+16)*512] {
			raw = binary.LittleEndian.AppendUint16(raw, uint16(v))
		}
		p.chunks = append(p.chunks, pack(raw))
	}
	s, err := openBytes(testFile{pages: []testPage{p}}.bytes(), OpenOptions{})
	if err != nil {
		b.Fatal(err)
	}
	return s
}

func BenchmarkReadDeflate(b *testing.B) { benchRead(b, packedStack(b, 8, deflate)) }

func BenchmarkReadLZW(b *testing.B) { benchRead(b, packedStack(b, 5, compressLZW)) }

func BenchmarkOpen2000Pages(b *testing.B) {
	file := rampStack(4, 3, 2000).bytes()
	b.ReportAllocs()
	for b.Loop() {
		if _, err := openBytes(file, OpenOptions{}); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkWriteDeflate(b *testing.B) {
	f := noisyFrame(512, 512)
	b.SetBytes(512 * 512 * 2)
	b.ReportAllocs()
	w, err := CreateStack(filepath.Join(b.TempDir(), "a.tif"), StackMeta{Width: 512, Height: 512, Frames: 100000})
	if err != nil {
		b.Fatal(err)
	}
	defer w.Close()
	for b.Loop() {
		if err := w.WriteFrame(f); err != nil {
			b.Fatal(err)
		}
	}
}
