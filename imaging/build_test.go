package imaging

import (
	"bytes"
	"encoding/binary"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// A file of any kind, also a wrong one, put together by hand: independent of the writer.

type testFile struct {
	bigEndian, bigTIFF bool
	pages              []testPage
}

type testPage struct {
	tags   []testTag // 256, 257, 258, 259, 262, 277 and so on; offsets and counts are added
	chunks [][]byte
	tiled  bool
}

type testTag struct {
	tag, typ uint16
	values   []uint64
	text     string
}

func short(tag uint16, v ...uint64) testTag { return testTag{tag: tag, typ: 3, values: v} }

func long(tag uint16, v ...uint64) testTag { return testTag{tag: tag, typ: 4, values: v} }

func ratio(tag uint16, num, den uint64) testTag {
	return testTag{tag: tag, typ: 5, values: []uint64{num, den}}
}

func ascii(tag uint16, s string) testTag { return testTag{tag: tag, typ: 2, text: s + "\x00"} }

// greyTags describe an uncompressed page of one strip; with replaces or adds tags, and a tag
// of type 0 takes one away.
func greyTags(w, h, bits int, with ...testTag) []testTag {
	tags := []testTag{
		long(256, uint64(w)), long(257, uint64(h)), short(258, uint64(bits)), short(259, 1), short(262, 1),
		short(277, 1), long(278, uint64(h)),
	}
	for _, t := range with {
		kept := tags[:0]
		for _, old := range tags {
			if old.tag != t.tag {
				kept = append(kept, old)
			}
		}
		tags = kept
		if t.typ != 0 {
			tags = append(tags, t)
		}
	}
	return tags
}

func (f testFile) order() binary.AppendByteOrder {
	if f.bigEndian {
		return binary.BigEndian
	}
	return binary.LittleEndian
}

// bytes lays the file out as pixels, directory, long values, for each page.
func (f testFile) bytes() []byte {
	o := f.order()
	put := func(b []byte, size int, v uint64) []byte {
		switch size {
		case 1:
			return append(b, byte(v))
		case 2:
			return o.AppendUint16(b, uint16(v))
		case 4:
			return o.AppendUint32(b, uint32(v))
		}
		return o.AppendUint64(b, v)
	}
	head, offset, count, entry := 8, 4, 2, 12
	if f.bigTIFF {
		head, offset, count, entry = 16, 8, 8, 20
	}
	b := []byte("II")
	if f.bigEndian {
		b = []byte("MM")
	}
	if f.bigTIFF {
		b = put(put(put(b, 2, 43), 2, 8), 2, 0)
	} else {
		b = put(b, 2, 42)
	}
	link := len(b)
	b = append(b, make([]byte, head-link)...)
	patch := func(at int, v uint64) {
		copy(b[at:], put(nil, offset, v))
	}
	for _, p := range f.pages {
		var offsets, counts []uint64
		for _, c := range p.chunks {
			offsets, counts = append(offsets, uint64(len(b))), append(counts, uint64(len(c)))
			b = append(b, c...)
		}
		tags := append([]testTag(nil), p.tags...)
		if p.chunks != nil {
			a, c := uint16(273), uint16(279)
			if p.tiled {
				a, c = 324, 325
			}
			tags = append(tags, long(a, offsets...), long(c, counts...))
		}
		patch(link, uint64(len(b)))
		b = put(b, count, uint64(len(tags)))
		tail := len(b) + len(tags)*entry + offset
		var values []byte
		for _, t := range tags {
			size := typeBytes[t.typ]
			v := []byte(t.text)
			n := len(v)
			if t.text == "" {
				n = len(t.values)
				each := size
				if t.typ == 5 {
					each, n = 4, n/2
				}
				for _, x := range t.values {
					v = put(v, each, x)
				}
			}
			b = put(put(put(b, 2, uint64(t.tag)), 2, uint64(t.typ)), offset, uint64(n))
			if len(v) <= offset {
				b = append(append(b, v...), make([]byte, offset-len(v))...)
				continue
			}
			b = put(b, offset, uint64(tail+len(values)))
			values = append(values, v...)
		}
		link = len(b)
		b = put(b, offset, 0)
		b = append(b, values...)
	}
	return b
}

// ramp is a page of 16-bit pixels whose values say where they stand.
func ramp(w, h, page int, o binary.AppendByteOrder) []byte {
	var b []byte
	for y := range h {
		for x := range w {
			b = o.AppendUint16(b, uint16(1000*page+100*y+x))
		}
	}
	return b
}

// rampStack is an uncompressed 16-bit stack of one strip a page.
func rampStack(w, h, pages int, with ...testTag) testFile {
	f := testFile{}
	for i := range pages {
		f.pages = append(f.pages, testPage{tags: greyTags(w, h, 16), chunks: [][]byte{ramp(w, h, i, binary.LittleEndian)}})
	}
	f.pages[0].tags = greyTags(w, h, 16, with...)
	return f
}

func openBytes(b []byte, o OpenOptions) (*Stack, error) {
	return openReader(bytes.NewReader(b), int64(len(b)), "stack.tif", o)
}

func mustOpen(t *testing.T, b []byte) *Stack {
	t.Helper()
	s, err := openBytes(b, OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func writeTemp(t *testing.T, name string, b []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// same compares bit by bit, so that −0 and 0 differ.
func samePixels(t *testing.T, got Frame, w, h int, want func(x, y int) float32) {
	t.Helper()
	if got.Width != w || got.Height != h || len(got.Pix) != w*h {
		t.Fatalf("frame of %d x %d with %d pixels, want %d x %d", got.Width, got.Height, len(got.Pix), w, h)
	}
	for y := range h {
		for x := range w {
			if g, v := got.At(x, y), want(x, y); math.Float32bits(g) != math.Float32bits(v) {
				t.Fatalf("pixel (%d, %d) is %v, want %v", x, y, g, v)
			}
		}
	}
}
