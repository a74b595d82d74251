package imaging

import (
	"encoding/binary"
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// patched returns b with the bytes p put at offset at.
func patched(b []byte, at int, p ...byte) []byte {
	c := append([]byte(nil), b...)
	copy(c[at:], p)
	return c
}

func onePage(w, h, bits int, data []byte, with ...testTag) []byte {
	return testFile{pages: []testPage{{tags: greyTags(w, h, bits, with...), chunks: [][]byte{data}}}}.bytes()
}

func TestOpenErrors(t *testing.T) {
	page := func(w, h int, tags ...testTag) testPage {
		return testPage{tags: greyTags(w, h, 16, tags...), chunks: [][]byte{ramp(w, h, 0, binary.LittleEndian)}}
	}
	three := rampStack(4, 3, 3).bytes() // 24 bytes of pixels and 9 entries a page: pages of 138 bytes
	dirAt := func(p int) int { return 8 + p*138 + 24 }
	loop := patched(three, dirAt(2)+2+9*12, byte(dirAt(1)))
	const wantKind = ", want 8- or 16-bit unsigned or 32-bit float grey"
	for _, tc := range []struct {
		name    string
		bytes   []byte
		want    string
		damaged bool
	}{
		{"empty", nil, "imaging: stack.tif: an empty file, want a TIFF stack", true},
		{"five bytes", []byte("II*\x00\x08"), "imaging: stack.tif: 5 bytes long, want a TIFF stack", true},
		{"a zip file", []byte("PK\x03\x04 and so on"), "imaging: stack.tif: not a TIFF: it starts with the bytes 50 4B 03 04, want 49 49 (II) or 4D 4D (MM)", false},
		{"version", []byte("II\x2c\x00\x08\x00\x00\x00"), "imaging: stack.tif: not a TIFF: version 44, want 42 (TIFF) or 43 (BigTIFF)", false},
		{"short BigTIFF", []byte("II\x2b\x00\x08\x00\x00\x00"), "imaging: stack.tif: 8 bytes long, want at least the 16 of a BigTIFF header", true},
		{"odd BigTIFF", []byte("II\x2b\x00\x04\x00\x00\x00\x10\x00\x00\x00\x00\x00\x00\x00"), "imaging: stack.tif: BigTIFF header with offset size 4 and constant 0, want 8 and 0", true},
		{"no directory", []byte("II\x2a\x00\x00\x00\x00\x00"), "imaging: stack.tif page 1: the header names no directory", true},
		{"directory beyond", []byte("II\x2a\x00\x64\x00\x00\x00"), "imaging: stack.tif page 1: its directory is at byte 100, the file ends at byte 8", true},
		{"no entries", []byte("II\x2a\x00\x08\x00\x00\x00\x00\x00\x00\x00\x00\x00"), "imaging: stack.tif page 1: its directory at byte 8 has 0 entries, want 1 to 4096", true},
		{"cut directory", three[:dirAt(0)+20], "imaging: stack.tif page 1: its directory needs bytes 32 to 146, the file ends at byte 52", true},
		{"loop", loop, "imaging: stack.tif page 4: its directory at byte 170 is that of page 2 again: the chain of pages is a loop; the 3 pages before it are intact (--readable-frames analyses what is intact)", true},
		{"cut pixels", append(append([]byte(nil), three[:dirAt(2)-1]...), 0)[:dirAt(2)-1], "imaging: stack.tif page 3: its directory is at byte 308, the file ends at byte 307; the 2 pages before it are intact (--readable-frames analyses what is intact)", true},
		{"one page left", three[:150], "imaging: stack.tif page 2: its directory is at byte 170, the file ends at byte 150; the page before it is intact (--readable-frames analyses what is intact)", true},
		{"RGB", onePage(2, 1, 8, make([]byte, 6), short(258, 8, 8, 8), short(277, 3), short(262, 2)), "imaging: stack.tif page 1: 8-bit RGB" + wantKind, false},
		{"RGB with alpha, in planes", onePage(2, 1, 8, make([]byte, 8), short(258, 8, 8, 8, 8), short(277, 4), short(262, 2), short(284, 2)), "imaging: stack.tif page 1: 8-bit RGB with 4 samples per pixel in separate planes" + wantKind, false},
		{"grey with two samples", onePage(2, 1, 16, make([]byte, 8), short(258, 16, 16), short(277, 2)), "imaging: stack.tif page 1: 16-bit grey with 2 samples per pixel" + wantKind, false},
		{"palette", onePage(2, 1, 8, make([]byte, 2), short(262, 3)), "imaging: stack.tif page 1: 8-bit palette colour" + wantKind, false},
		{"signed", onePage(2, 1, 16, make([]byte, 4), short(339, 2)), "imaging: stack.tif page 1: 16-bit signed grey" + wantKind, false},
		{"1 bit", onePage(8, 1, 1, make([]byte, 1)), "imaging: stack.tif page 1: 1-bit unsigned grey" + wantKind, false},
		{"12 bits", onePage(2, 1, 12, make([]byte, 3)), "imaging: stack.tif page 1: 12-bit unsigned grey" + wantKind, false},
		{"32 bits", onePage(2, 1, 32, make([]byte, 8)), "imaging: stack.tif page 1: 32-bit unsigned grey" + wantKind, false},
		{"64-bit float", onePage(2, 1, 64, make([]byte, 16), short(339, 3)), "imaging: stack.tif page 1: 64-bit float grey" + wantKind, false},
		{"complex", onePage(2, 1, 64, make([]byte, 16), short(339, 6)), "imaging: stack.tif page 1: 64-bit complex grey" + wantKind, false},
		{"mixed depths", onePage(2, 1, 8, make([]byte, 6), short(258, 8, 8, 16), short(277, 3), short(262, 2)), "imaging: stack.tif page 1: mixed-depth RGB" + wantKind, false},
		{"no photometric", onePage(2, 1, 8, make([]byte, 2), testTag{tag: 262}), "imaging: stack.tif page 1: 8-bit pixels without a photometric tag" + wantKind, false},
		{"JPEG", onePage(2, 1, 8, make([]byte, 2), short(259, 7)), "imaging: stack.tif page 1: JPEG compression, want none, LZW, Deflate, PackBits or Zstandard", false},
		{"unknown compression", onePage(2, 1, 8, make([]byte, 2), short(259, 77)), "imaging: stack.tif page 1: code 77 compression, want none, LZW, Deflate, PackBits or Zstandard", false},
		{"reversed bits", onePage(2, 1, 8, make([]byte, 2), short(266, 2)), "imaging: stack.tif page 1: bits in reverse order (FillOrder 2), want FillOrder 1", false},
		{"white float", onePage(2, 1, 32, make([]byte, 8), short(339, 3), short(262, 0)), "imaging: stack.tif page 1: float grey with zero as white, want zero as black: its values cannot be inverted without a largest one", false},
		{"predictor 3 of integers", onePage(2, 1, 16, deflate(make([]byte, 4)), short(259, 8), short(317, 3)), "imaging: stack.tif page 1: 16-bit unsigned grey with the floating-point predictor (3), want predictor 1 or 2", false},
		{"predictor 4", onePage(2, 1, 16, deflate(make([]byte, 4)), short(259, 8), short(317, 4)), "imaging: stack.tif page 1: predictor 4, want 1, 2 or 3", false},
		{"no pixels", onePage(0, 1, 16, make([]byte, 4)), "imaging: stack.tif page 1: 0 x 1 pixels, want at least 1 x 1", true},
		{"other size", testFile{pages: []testPage{page(4, 3), page(4, 3), page(4, 2)}}.bytes(), "imaging: stack.tif page 3: 4 x 2 pixels, want 4 x 3 as on page 1", false},
		{"other depth", testFile{pages: []testPage{page(4, 3), {tags: greyTags(4, 3, 8), chunks: [][]byte{make([]byte, 12)}}}}.bytes(), "imaging: stack.tif page 2: 8-bit unsigned grey, want 16-bit unsigned grey as on page 1", false},
		{"only thumbnails", testFile{pages: []testPage{page(4, 3, long(254, 1))}}.bytes(), "imaging: stack.tif: 1 pages, all of them thumbnails or masks, want a stack", false},
		{"too little in a strip", onePage(4, 3, 16, make([]byte, 20)), "imaging: stack.tif page 1: strip 1 of 1 has 20 bytes, want 24", true},
		{"too few strips", onePage(4, 3, 16, make([]byte, 24), long(278, 1)), "imaging: stack.tif page 1: 1 strip offsets, want 3", true},
		{"huge claim", onePage(30000, 20000, 8, make([]byte, 13), short(259, 8)), "imaging: stack.tif page 1: strip 1 of 1 has 13 bytes of Deflate data, too few for 600000000 bytes of pixels", true},
		{"too large", onePage(60000, 60000, 16, make([]byte, 40)), "imaging: stack.tif page 1: 60000 x 60000 pixels of 16 bits, want at most 1073741824 bytes for a page", false},
		{"huge tiles", testFile{pages: []testPage{{tags: greyTags(4, 3, 8, long(322, 1<<31), long(323, 1<<31)), chunks: [][]byte{make([]byte, 12)}, tiled: true}}}.bytes(), "imaging: stack.tif page 1: tiles of 2147483648 x 2147483648 pixels, want at least 1 x 1 and at most 1073741824 bytes", true},
		{"no offsets", testFile{pages: []testPage{{tags: greyTags(4, 3, 8)}}}.bytes(), "imaging: stack.tif page 1: no strip or tile offsets: the directory does not say where the pixels are", true},
		{"text as width", onePage(4, 3, 16, make([]byte, 24), ascii(256, "")), "imaging: stack.tif page 1: tag 256 (ImageWidth) has field type 2 (1 bytes), want an unsigned integer", true},
		{"two widths", onePage(4, 3, 16, make([]byte, 24), long(256, 4, 4)), "imaging: stack.tif page 1: tag 256 (ImageWidth) has 2 values, want 1", true},
		{"strip beyond", testFile{pages: []testPage{{tags: append(greyTags(4, 3, 16), long(273, 4000), long(279, 24))}}}.bytes(), "imaging: stack.tif page 1: strip 1 of 1 needs bytes 4000 to 4024, the file ends at byte 122", true},
		{"slices and frames", rampStack(4, 3, 4, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="2" SizeC="1" SizeT="2"`))).bytes(), "imaging: stack.tif: 2 slices in Z and 2 frames in time, want one slice for each frame: save one slice, or a projection along Z, as a stack of its own", false},
		{"companion", rampStack(4, 3, 1, ascii(270, `<OME UUID="u"><BinaryOnly MetadataFile="set.companion.ome" UUID="v"/></OME>`)).bytes(), "imaging: stack.tif: its OME-XML stands in another file (set.companion.ome), want it in the file itself", false},
		{"many files", rampStack(4, 3, 2, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="2"`, `<TiffData IFD="0"><UUID FileName="a.tif">u</UUID></TiffData><TiffData IFD="0" FirstT="1"><UUID FileName="b.tif">v</UUID></TiffData>`))).bytes(), "imaging: stack.tif: OME-XML says that its planes lie in 2 files, want all of them in one", false},
		{"half a frame", rampStack(4, 3, 3, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="2"`))).bytes(), "imaging: stack.tif: OME-XML says 2 channels x 2 frames (XYCZT), the file has 3 pages, want 4", false},
		{"channel after channel", rampStack(4, 3, 6, ascii(270, ome(`DimensionOrder="XYTZC" SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="4"`))).bytes(), "imaging: stack.tif: OME-XML says 2 channels x 4 frames (XYTZC), the file has 6 pages, want 8", false},
		{"hole", rampStack(4, 3, 3, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="3"`, `<TiffData IFD="0"/><TiffData IFD="1" FirstT="2"/>`))).bytes(), "imaging: stack.tif: OME-XML maps no page to channel 0 of frame 1 (from 0), but does to later frames", true},
		{"mapped twice", rampStack(4, 3, 3, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="3"`, `<TiffData IFD="0" PlaneCount="3"/><TiffData IFD="0" PlaneCount="3"/>`))).bytes(), "imaging: stack.tif: OME-XML TiffData maps more than the 3 planes of the image", false},
		{"plane beyond", rampStack(4, 3, 3, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="3"`, `<TiffData IFD="0" FirstT="3"/>`))).bytes(), "imaging: stack.tif: OME-XML TiffData names channel 0, slice 0, frame 3 (from 0), the image has 1, 1, 3", false},
	} {
		t.Run(tc.name, func(t *testing.T) {
			s, err := openBytes(tc.bytes, OpenOptions{})
			if s != nil || err == nil {
				t.Fatalf("stack %v, error %v", s, err)
			}
			if err.Error() != tc.want {
				t.Errorf("error\n%s\nwant\n%s", err, tc.want)
			}
			if d := errors.Is(err, ErrDamaged); d != tc.damaged {
				t.Errorf("ErrDamaged %v, want %v", d, tc.damaged)
			}
		})
	}
}

func TestReadErrors(t *testing.T) {
	data := make([]byte, 24)
	packed := deflate(data)
	spoilt := patched(packed, len(packed)-1, packed[len(packed)-1]+1)
	nan := binary.LittleEndian.AppendUint32(make([]byte, 4), math.Float32bits(float32(math.NaN())))
	for _, tc := range []struct {
		name    string
		bytes   []byte
		want    string
		damaged bool
	}{
		{"checksum", onePage(4, 3, 16, spoilt, short(259, 8)), "imaging: stack.tif page 1: strip 1 of 1: Deflate data spoilt after 24 of 24 bytes: zlib: invalid checksum", true},
		{"not Deflate", onePage(4, 3, 16, []byte("hello, world"), short(259, 8)), "imaging: stack.tif page 1: strip 1 of 1: Deflate data spoilt after 0 of 24 bytes: zlib: invalid header", true},
		{"short Deflate", onePage(4, 3, 16, deflate(data[:20]), short(259, 8)), "imaging: stack.tif page 1: strip 1 of 1: Deflate data end after 20 of 24 bytes", true},
		{"short PackBits", onePage(4, 3, 16, []byte{2, 1, 2, 3}, short(259, 32773)), "imaging: stack.tif page 1: strip 1 of 1: PackBits data end after 3 of 24 bytes", true},
		{"old LZW", onePage(4, 3, 16, []byte{0, 1, 2, 3}, short(259, 5)), "imaging: stack.tif page 1: strip 1 of 1: old-style LZW with its bits in reverse order, want LZW as in TIFF 6.0", false},
		{"LZW code", onePage(4, 3, 16, []byte{0x80, 0x7F, 0xFF}, short(259, 5)), "imaging: stack.tif page 1: strip 1 of 1: LZW data spoilt after 0 of 24 bytes: a code that stands for nothing yet", true},
		{"not a number", onePage(2, 1, 32, nan, short(339, 3)), "imaging: stack.tif page 1: pixel (1, 0) is NaN, want a finite number", false},
	} {
		t.Run(tc.name, func(t *testing.T) {
			s := mustOpen(t, tc.bytes)
			var f Frame
			err := s.ReadFrame(0, 0, &f)
			if err == nil || err.Error() != tc.want {
				t.Errorf("error\n%v\nwant\n%s", err, tc.want)
			}
			if d := errors.Is(err, ErrDamaged); d != tc.damaged {
				t.Errorf("ErrDamaged %v, want %v", d, tc.damaged)
			}
		})
	}
	s := mustOpen(t, rampStack(4, 3, 2).bytes())
	var f Frame
	for _, tc := range []struct {
		channel, frame int
		want           string
	}{
		{1, 0, "imaging: stack.tif: no channel 1 (from 0), the stack has 1"},
		{-1, 0, "imaging: stack.tif: no channel -1 (from 0), the stack has 1"},
		{0, 2, "imaging: stack.tif: no frame 2 (from 0), the stack has 2"},
		{0, -1, "imaging: stack.tif: no frame -1 (from 0), the stack has 2"},
	} {
		if err := s.ReadFrame(tc.channel, tc.frame, &f); err == nil || err.Error() != tc.want {
			t.Errorf("error %v, want %s", err, tc.want)
		}
	}
}

func TestOpenPathErrors(t *testing.T) {
	dir := t.TempDir()
	if _, err := Open(dir, OpenOptions{}); err == nil || err.Error() != "imaging: "+dir+": a folder, want a TIFF stack" {
		t.Errorf("folder: %v", err)
	}
	missing := filepath.Join(dir, "missing.tif")
	if _, err := Open(missing, OpenOptions{}); !errors.Is(err, fs.ErrNotExist) || err.Error() != "imaging: open "+missing+": no such file or directory" {
		t.Errorf("missing: %v", err)
	}
	empty := filepath.Join(dir, "empty.tif")
	if err := os.WriteFile(empty, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	if _, err := Open(empty, OpenOptions{}); err == nil || err.Error() != "imaging: "+empty+": an empty file, want a TIFF stack" {
		t.Errorf("empty: %v", err)
	}
}

func TestMaxPageBytes(t *testing.T) {
	b := rampStack(4, 3, 1).bytes()
	if _, err := openBytes(b, OpenOptions{MaxPageBytes: 24}); err != nil {
		t.Error(err)
	}
	if _, err := openBytes(b, OpenOptions{MaxPageBytes: 23}); err == nil || !strings.Contains(err.Error(), "want at most 23 bytes for a page") {
		t.Errorf("error %v, want the limit of 23 bytes", err)
	}
}
