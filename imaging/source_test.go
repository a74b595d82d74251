package imaging

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"strings"
	"testing"
)

// countingReader counts the reads of a file.
type countingReader struct {
	io.ReaderAt
	reads int
}

func (c *countingReader) ReadAt(p []byte, off int64) (int, error) {
	c.reads++
	return c.ReaderAt.ReadAt(p, off)
}

// rowStrips is a page in strips of one row, with gap bytes between them.
func rowStrips(w, h, gap int) []byte {
	f := testFile{pages: []testPage{{tags: greyTags(w, h, 16, long(278, 1))}}}
	data := ramp(w, h, 0, binary.LittleEndian)
	var offsets, counts []uint64
	at := 8
	for range h {
		offsets, counts = append(offsets, uint64(at)), append(counts, uint64(2*w))
		at += 2*w + gap
	}
	f.pages[0].tags = append(f.pages[0].tags, long(273, offsets...), long(279, counts...))
	b := f.bytes() // without pixels: the header, and the directory at byte 8
	// The pixels go between the header and the directory, whose long values move along.
	body := make([]byte, at-8)
	for y := range h {
		copy(body[y*(2*w+gap):], data[2*w*y:2*w*(y+1)])
	}
	shift := uint32(len(body))
	out := append(append([]byte("II\x2a\x00"), binary.LittleEndian.AppendUint32(nil, 8+shift)...), body...)
	dir := bytes.Clone(b[8:])
	for i := range int(binary.LittleEndian.Uint16(dir)) {
		e := dir[2+12*i:]
		if n := binary.LittleEndian.Uint32(e[4:]); n > 1 {
			binary.LittleEndian.PutUint32(e[8:], binary.LittleEndian.Uint32(e[8:])+shift)
		}
	}
	return append(out, dir...)
}

// Strips that stand together are fetched at once, scattered ones alone, and without memory for
// what lies between them.
func TestFineStrips(t *testing.T) {
	const w, h = 20, 60
	for _, tc := range []struct {
		gap           int
		atMost, least int
	}{{0, 4, 1}, {5000, h + 4, h}} {
		b := rowStrips(w, h, tc.gap)
		r := &countingReader{ReaderAt: bytes.NewReader(b)}
		s, err := openReader(r, int64(len(b)), "stack.tif", OpenOptions{})
		if err != nil {
			t.Fatal(err)
		}
		var f Frame
		r.reads = 0
		if err := s.ReadFrame(0, 0, &f); err != nil {
			t.Fatal(err)
		}
		samePixels(t, f, w, h, func(x, y int) float32 { return float32(100*y + x) })
		if r.reads < tc.least || r.reads > tc.atMost {
			t.Errorf("gap %d: %d reads, want %d to %d", tc.gap, r.reads, tc.least, tc.atMost)
		}
	}
}

// hollowFile has a head and then zeros, however large it claims to be.
type hollowFile struct{ head []byte }

func (h hollowFile) ReadAt(p []byte, off int64) (int, error) {
	clear(p)
	if off < int64(len(h.head)) {
		copy(p, h.head[off:])
	}
	return len(p), nil
}

// A tag may be as large as a huge file allows, but not be read.
func TestHugeTag(t *testing.T) {
	b := onePage(4, 3, 16, make([]byte, 24), ascii(270, strings.Repeat("x", 10)))
	dir := b[8+24:]
	for i := range int(binary.LittleEndian.Uint16(dir)) {
		if e := dir[2+12*i:]; binary.LittleEndian.Uint16(e) == 270 {
			binary.LittleEndian.PutUint32(e[4:], 1<<31)
		}
	}
	_, err := openReader(hollowFile{b}, 1<<40, "stack.tif", OpenOptions{})
	want := "imaging: stack.tif page 1: tag 270 (ImageDescription) has 2147483648 values of 1 bytes, want at most 67108864 bytes"
	if err == nil || err.Error() != want {
		t.Errorf("error %v, want %s", err, want)
	}
}

// A file that is written to while it is open is found out.
func TestFileChangesWhileOpen(t *testing.T) {
	b := rampStack(4, 3, 2).bytes()
	s := mustOpen(t, b)
	second := 8 + 138 + 24
	if got := binary.LittleEndian.Uint16(b[second+2:]); got != tagImageWidth {
		t.Fatalf("tag %d where ImageWidth was expected", got)
	}
	b[second+2+8] = 2
	var f Frame
	err := s.ReadFrame(0, 1, &f)
	want := "imaging: stack.tif page 2: 16-bit unsigned grey of 2 x 3 pixels, which it was not when the stack was opened"
	if !errors.Is(err, ErrDamaged) || err.Error() != want {
		t.Errorf("error %v, want %s", err, want)
	}
	if err := s.ReadFrame(0, 0, &f); err != nil {
		t.Error(err)
	}
}
