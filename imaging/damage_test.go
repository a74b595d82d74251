package imaging

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"sync"
	"testing"
)

// damageSeeds are small stacks of all kinds that are read.
func damageSeeds(t testing.TB) map[string][]byte {
	seeds := map[string][]byte{
		"plain": rampStack(4, 3, 3).bytes(),
		"big":   testFile{bigEndian: true, bigTIFF: true, pages: []testPage{{tags: greyTags(4, 3, 16), chunks: [][]byte{ramp(4, 3, 0, binary.BigEndian)}}}}.bytes(),
		"ome": rampStack(4, 3, 4, ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="2" PhysicalSizeX="0.1" TimeIncrement="1"`,
			`<TiffData IFD="0" PlaneCount="4"/><Plane TheC="0" TheT="0" TheZ="0" DeltaT="0"/><Plane TheC="0" TheT="1" TheZ="0" DeltaT="1" ExposureTime="0.1"/>`))).bytes(),
	}
	for _, name := range []string{
		"u16-lzw-2-little-strips", "u8-packbits-big-tiles-bigtiff", "f32-zip-3-little-strips", "u16-zstd-2-big-tiles-bigtiff", "u16-zip-2-little-strips",
	} {
		b, err := os.ReadFile(filepath.Join("testdata", "tiff", name+".tif"))
		if err != nil {
			t.Fatal(err)
		}
		seeds[name] = b
	}
	return seeds
}

// readAll reads every plane; a frame that comes without an error must have its size. It
// returns the number of planes read, and the first error.
func readAll(s *Stack) (int, error) {
	var f Frame
	n := 0
	for t := range s.Frames() {
		for c := range s.Info().SizeC {
			if err := s.ReadFrame(c, t, &f); err != nil {
				return n, err
			}
			if f.Width != s.Info().Width || f.Height != s.Info().Height || len(f.Pix) != f.Width*f.Height {
				return n, fmt.Errorf("frame of %d x %d with %d pixels", f.Width, f.Height, len(f.Pix))
			}
			n++
		}
	}
	return n, nil
}

// A stack cut anywhere is an error that is ErrDamaged, or all of it is still there (what was
// cut off being text that is not read); with ReadableFrames the intact pages come unchanged.
func TestCutAtEveryByte(t *testing.T) {
	for name, b := range damageSeeds(t) {
		whole := mustOpen(t, b)
		pages := whole.Info().Pages
		step := 1 + len(b)/1500
		for cut := 0; cut < len(b); cut += step {
			s, err := openBytes(b[:cut], OpenOptions{})
			if err == nil {
				if n, err := readAll(s); err != nil || n != pages {
					t.Errorf("%s cut at %d of %d: %d of %d planes and error %v without a word from Open", name, cut, len(b), n, pages, err)
				}
				continue
			}
			if !errors.Is(err, ErrDamaged) || !strings.HasPrefix(err.Error(), "imaging: stack.tif") {
				t.Errorf("%s cut at %d: %v", name, cut, err)
			}
			s, err = openBytes(b[:cut], OpenOptions{ReadableFrames: true})
			if err != nil {
				continue
			}
			if s.Damage() == nil || s.Frames()*s.Info().SizeC >= pages || s.Frames() == 0 {
				t.Errorf("%s cut at %d: %d of %d planes, damage %v", name, cut, s.Frames(), pages, s.Damage())
			}
			var got, want Frame
			for i := range s.Frames() {
				for c := range s.Info().SizeC {
					if err := s.ReadFrame(c, i, &got); err != nil {
						t.Fatal(err)
					}
					if err := whole.ReadFrame(c, i, &want); err != nil {
						t.Fatal(err)
					}
					samePixels(t, got, want.Width, want.Height, func(x, y int) float32 { return want.At(x, y) })
				}
			}
		}
	}
}

func TestReadableFrames(t *testing.T) {
	text := ascii(270, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="4"`))
	b := rampStack(4, 3, 8, text).bytes()
	cut := b[:len(b)-140] // the last page and a little of the one before
	if _, err := openBytes(cut, OpenOptions{}); err == nil || !strings.Contains(err.Error(), "the 6 pages before it are intact (--readable-frames analyses what is intact)") {
		t.Fatalf("error %v", err)
	}
	s, err := openBytes(cut, OpenOptions{ReadableFrames: true})
	if err != nil {
		t.Fatal(err)
	}
	if s.Frames() != 3 || s.Info().SizeT != 3 || !errors.Is(s.Damage(), ErrDamaged) {
		t.Errorf("%d frames, damage %v, want 3 whole frames of two channels", s.Frames(), s.Damage())
	}
	if w := s.Info().Warnings; len(w) != 1 || !strings.HasPrefix(w[0], "the stack is damaged: imaging: stack.tif page 7: ") {
		t.Errorf("warnings %q", w)
	}
	if n, err := readAll(s); n != 6 || err != nil {
		t.Errorf("%d planes, error %v", n, err)
	}
	s, err = openBytes(b, OpenOptions{ReadableFrames: true})
	if err != nil || s.Damage() != nil || s.Frames() != 4 {
		t.Errorf("whole stack: error %v, damage %v", err, s.Damage())
	}
	// One channel after the other: what is left holds no whole frame.
	b = rampStack(4, 3, 8, ascii(270, ome(`DimensionOrder="XYTZC" SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="4"`))).bytes()
	want := "imaging: stack.tif: the 6 intact pages end within the second channel, as the file holds one channel after the other, so no frame is whole"
	if _, err := openBytes(b[:len(b)-140], OpenOptions{ReadableFrames: true}); err == nil || err.Error() != want {
		t.Errorf("error %v, want %s", err, want)
	}
}

func TestThumbnailsAreSkipped(t *testing.T) {
	f := rampStack(4, 3, 3)
	thumb := testPage{tags: greyTags(2, 1, 8, long(254, 1), short(277, 3), short(262, 2)), chunks: [][]byte{make([]byte, 6)}}
	mask := testPage{tags: greyTags(4, 3, 1, long(254, 4), short(262, 4)), chunks: [][]byte{make([]byte, 3)}}
	f.pages = []testPage{thumb, f.pages[0], mask, f.pages[1], f.pages[2]}
	s := mustOpen(t, f.bytes())
	if w := s.Info().Warnings; s.Frames() != 3 || len(w) != 1 || w[0] != "2 reduced or mask pages were skipped" {
		t.Fatalf("%d frames, warnings %q", s.Frames(), w)
	}
	var got Frame
	for i, page := range []int{2, 4, 5} {
		if n := s.index.pageNumber(i); n != page {
			t.Errorf("frame %d is page %d of the file, want %d", i, n, page)
		}
		if n := s.index.planeOf(page - 1); n != i {
			t.Errorf("page %d is plane %d, want %d", page, n, i)
		}
		if err := s.ReadFrame(0, i, &got); err != nil || got.Pix[0] != float32(1000*i) {
			t.Errorf("frame %d: first pixel %v, error %v", i, got.Pix[0], err)
		}
	}
	if n := s.index.planeOf(2); n != -1 {
		t.Errorf("a thumbnail is plane %d", n)
	}
}

// Mutated stacks give an error or pixels, never a panic, and take little memory.
func TestMutatedStacks(t *testing.T) {
	seeds := damageSeeds(t)
	rng := rand.New(rand.NewPCG(7, 11))
	names := []string{"plain", "big", "ome", "u16-lzw-2-little-strips", "u8-packbits-big-tiles-bigtiff", "f32-zip-3-little-strips", "u16-zstd-2-big-tiles-bigtiff", "u16-zip-2-little-strips"}
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	opened, refused := 0, 0
	const rounds = 1600
	for i := range rounds {
		b := bytes.Clone(seeds[names[i%len(names)]])
		for range 1 + rng.IntN(4) {
			at := rng.IntN(len(b))
			switch rng.IntN(4) {
			case 0:
				b[at] ^= 1 << rng.IntN(8)
			case 1:
				b[at] = byte(rng.Uint32())
			case 2:
				copy(b[at:], []byte{0xFF, 0xFF, 0xFF, 0x7F})
			default:
				copy(b[at:], b[rng.IntN(len(b)):])
			}
		}
		s, err := openBytes(b, OpenOptions{ReadableFrames: i%2 == 0, MaxPageBytes: 1 << 20})
		if err == nil {
			opened++
			_, err = readAll(s)
			s.Close()
		}
		if err != nil {
			refused++
			if !strings.HasPrefix(err.Error(), "imaging: stack.tif") {
				t.Errorf("round %d: %v", i, err)
			}
		}
	}
	runtime.ReadMemStats(&after)
	if per := (after.TotalAlloc - before.TotalAlloc) / rounds; per > 4<<20 {
		t.Errorf("%d bytes allocated for a file of a few kilobytes, want below 4 MiB", per)
	}
	if opened < rounds/10 || refused < rounds/10 {
		t.Errorf("%d opened, %d refused: the mutations test nothing", opened, refused)
	}
}

// The memory of an open stack does not grow by more than a few bytes a page.
func TestIndexIsSmall(t *testing.T) {
	const pages = 20000
	b := rampStack(4, 3, pages).bytes()
	var before, after runtime.MemStats
	runtime.GC()
	runtime.ReadMemStats(&before)
	s := mustOpen(t, b)
	runtime.GC()
	runtime.ReadMemStats(&after)
	if s.Frames() != pages {
		t.Fatalf("%d frames, want %d", s.Frames(), pages)
	}
	if per := (int64(after.HeapAlloc) - int64(before.HeapAlloc)) / pages; per > 24 {
		t.Errorf("%d bytes a page, want at most 24", per)
	}
	runtime.KeepAlive(b)
	runtime.KeepAlive(s)
}

// Many goroutines read one stack; run with -race.
func TestConcurrentReads(t *testing.T) {
	s, err := Open("testdata/tiff/channels.ome.tif", OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	var wg sync.WaitGroup
	for g := range 8 {
		wg.Go(func() {
			var f Frame
			for i := range 60 {
				c, frame := (g+i)%2, (g+i/3)%4
				if err := s.ReadFrame(c, frame, &f); err != nil {
					t.Error(err)
					return
				}
				for _, p := range [][2]int{{0, 0}, {28, 20}, {g, i % 21}} {
					if got, want := f.At(p[0], p[1]), outsidePixel("u16", frame+100*c, p[0], p[1]); got != want {
						t.Errorf("channel %d frame %d pixel %v is %v, want %v", c, frame, p, got, want)
						return
					}
				}
			}
		})
	}
	wg.Wait()
}

func TestHashFile(t *testing.T) {
	// FIPS 180-2, appendix B.1: the message "abc".
	const want = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
	if got, err := HashFile(writeTemp(t, "abc", []byte("abc"))); got != want || err != nil {
		t.Errorf("%s, %v; want %s", got, err, want)
	}
	if _, err := HashFile(filepath.Join(t.TempDir(), "none")); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("error %v", err)
	}
}
