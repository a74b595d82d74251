package imaging

import (
	"bytes"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"
)

// writeStack writes the frames, which hold the channels of one time one after the other.
func writeStack(path string, m StackMeta, frames []Frame) error {
	w, err := CreateStack(path, m)
	if err != nil {
		return err
	}
	for _, f := range frames {
		if err := w.WriteFrame(f); err != nil {
			w.Close()
			return err
		}
	}
	return w.Close()
}

// What is written reads back the same: pixels, axes, calibration, and no warnings.
func TestWriteReadRoundTrip(t *testing.T) {
	dir := t.TempDir()
	rapid.Check(t, func(t *rapid.T) {
		m := StackMeta{
			Width: rapid.IntRange(1, 40).Draw(t, "width"), Height: rapid.IntRange(1, 30).Draw(t, "height"),
			Frames: rapid.IntRange(1, 4).Draw(t, "frames"), Channels: rapid.IntRange(1, 3).Draw(t, "channels"),
			PixelType:    rapid.SampledFrom([]string{"uint8", "uint16", "float32"}).Draw(t, "type"),
			Uncompressed: rapid.Bool().Draw(t, "uncompressed"), BigTIFF: rapid.Bool().Draw(t, "big"),
			PixelUm:   rapid.Float64Range(1e-3, 49).Draw(t, "pixel"),
			IntervalS: rapid.Float64Range(1e-6, 1e4).Draw(t, "interval"),
			ExposureS: rapid.Float64Range(1e-6, 1e2).Draw(t, "exposure"),
		}
		for c := range m.Channels {
			m.ChannelNames = append(m.ChannelNames, rapid.SampledFrom([]string{"actin", `a "b" <c> & µ`, "568 nm"}).Draw(t, fmt.Sprint("name", c)))
		}
		if rapid.Bool().Draw(t, "uneven") {
			at := 0.25
			for range m.Frames {
				m.TimesS = append(m.TimesS, at)
				at += m.IntervalS * rapid.Float64Range(0.995, 1.005).Draw(t, "step")
			}
		}
		top := map[string]int{"uint8": 255, "uint16": 65535, "float32": 1 << 24}[m.PixelType]
		var frames []Frame
		for range m.Frames * m.Channels {
			f := NewFrame(m.Width, m.Height)
			seed := rapid.Uint32().Draw(t, "seed")
			for i := range f.Pix {
				seed = seed*1664525 + 1013904223
				f.Pix[i] = float32(int(seed>>8) % (top + 1))
				if m.PixelType == "float32" {
					f.Pix[i] = f.Pix[i]/512 - 1000
				}
			}
			frames = append(frames, f)
		}
		path := filepath.Join(dir, "round.ome.tif")
		if err := writeStack(path, m, frames); err != nil {
			t.Fatal(err)
		}
		s, err := Open(path, OpenOptions{})
		if err != nil {
			t.Fatal(err)
		}
		defer s.Close()
		in := s.Info()
		if in.SizeC != m.Channels || in.SizeT != m.Frames || s.Frames() != m.Frames || in.PixelType != m.PixelType || len(in.Warnings) > 0 {
			t.Fatalf("%+v", in)
		}
		if d := cmp.Diff(m.ChannelNames, in.ChannelNames); d != "" {
			t.Fatalf("names (-want +got):\n%s", d)
		}
		if (in.Format == "BigTIFF") != m.BigTIFF {
			t.Fatalf("format %s", in.Format)
		}
		if c := in.Calibration; c.PixelUm.Value != m.PixelUm || c.ExposureS.Value != m.ExposureS ||
			math.Abs(c.IntervalS.Value/m.IntervalS-1) > 0.006 || m.TimesS == nil && c.IntervalS.Value != m.IntervalS {
			t.Fatalf("calibration %+v", c)
		}
		for i, at := range in.Calibration.TimesS {
			if want := m.TimesS[i] - m.TimesS[0]; at != want {
				t.Fatalf("time %d is %v, want %v", i, at, want)
			}
		}
		if m.TimesS != nil && m.Frames > 1 && len(in.Calibration.TimesS) != m.Frames {
			t.Fatalf("%d times, want %d", len(in.Calibration.TimesS), m.Frames)
		}
		var f Frame
		for i, want := range frames {
			if err := s.ReadFrame(i%m.Channels, i/m.Channels, &f); err != nil {
				t.Fatal(err)
			}
			if d := cmp.Diff(want, f); d != "" {
				t.Fatalf("plane %d (-want +got):\n%s", i, d)
			}
		}
		// The resolution tags say the same to readers that know no OME-XML.
		plain, _ := s.index.first.resolutionUm()
		if math.Abs(plain.Value/m.PixelUm-1) > 1e-5 && math.Abs(25400/m.PixelUm-72) > 1 && math.Abs(25400/m.PixelUm-96) > 1 {
			t.Fatalf("resolution tags give %v µm, want %v", plain.Value, m.PixelUm)
		}
	})
}

func TestWriterRoundsAndCutsOff(t *testing.T) {
	for _, tc := range []struct {
		pixelType string
		top       float32
	}{{"uint8", 255}, {"uint16", 65535}} { // just above the limit is where a count would wrap to 0
		path := filepath.Join(t.TempDir(), "a.tif")
		f := Frame{Width: 8, Height: 1, Pix: []float32{-3, 0.49, 0.5, 1.5, 2.4999, tc.top - 0.4, 2 * tc.top, tc.top + 0.75}}
		if err := writeStack(path, StackMeta{Width: 8, Height: 1, Frames: 1, PixelType: tc.pixelType}, []Frame{f}); err != nil {
			t.Fatal(err)
		}
		s, err := Open(path, OpenOptions{})
		if err != nil {
			t.Fatal(err)
		}
		defer s.Close()
		var got Frame
		if err := s.ReadFrame(0, 0, &got); err != nil {
			t.Fatal(err)
		}
		want := []float32{0, 0, 1, 2, 2, tc.top, tc.top, tc.top}
		samePixels(t, got, 8, 1, func(x, _ int) float32 { return want[x] })
	}
}

func TestWriterGivesTheSameBytes(t *testing.T) {
	dir := t.TempDir()
	var files [2][]byte
	for i := range files {
		path := filepath.Join(dir, fmt.Sprint(i, ".tif"))
		f := NewFrame(31, 17)
		for j := range f.Pix {
			f.Pix[j] = float32(j * j % 4096)
		}
		if err := writeStack(path, StackMeta{Width: 31, Height: 17, Frames: 2, PixelUm: 0.1, ExposureS: 0.01}, []Frame{f, f}); err != nil {
			t.Fatal(err)
		}
		var err error
		if files[i], err = os.ReadFile(path); err != nil {
			t.Fatal(err)
		}
	}
	if len(files[0]) == 0 || !bytes.Equal(files[0], files[1]) {
		t.Errorf("two runs gave %d and %d bytes that differ", len(files[0]), len(files[1]))
	}
}

// A stack that is not finished leaves nothing, and one that stood there before stays.
func TestWriterAllOrNothing(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "a.tif")
	if err := os.WriteFile(path, []byte("before"), 0o644); err != nil {
		t.Fatal(err)
	}
	w, err := CreateStack(path, StackMeta{Width: 4, Height: 3, Frames: 2})
	if err != nil {
		t.Fatal(err)
	}
	if err := w.WriteFrame(NewFrame(4, 3)); err != nil {
		t.Fatal(err)
	}
	if b, _ := os.ReadFile(path); string(b) != "before" {
		t.Errorf("an unfinished stack is visible: %d bytes", len(b))
	}
	want := "imaging: " + path + ": 1 planes written, want 2; the file was not kept"
	if err := w.Close(); err == nil || err.Error() != want {
		t.Errorf("Close: %v, want %s", err, want)
	}
	if err := w.WriteFrame(NewFrame(4, 3)); err == nil {
		t.Error("a frame was taken after Close")
	}
	names, err := os.ReadDir(dir)
	if err != nil || len(names) != 1 {
		t.Errorf("%d files left (%v), want the one from before", len(names), err)
	}
	if b, _ := os.ReadFile(path); string(b) != "before" {
		t.Errorf("the file from before now holds %q", b)
	}
}

func TestWriterErrors(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.tif")
	good := StackMeta{Width: 4, Height: 3, Frames: 1}
	for _, tc := range []struct {
		change func(*StackMeta)
		want   string
	}{
		{func(m *StackMeta) { m.Width = 0 }, "1 frames of 1 channels of 0 x 3 pixels, want at least one of each"},
		{func(m *StackMeta) { m.Frames = 0 }, "0 frames of 1 channels of 4 x 3 pixels, want at least one of each"},
		{func(m *StackMeta) { m.Frames, m.Channels = 3_000_000, 2 }, "3000000 frames of 2 channels, want at most 4000000 planes"},
		{func(m *StackMeta) { m.PixelType = "int16" }, `pixel type "int16", want uint8, uint16 or float32`},
		{func(m *StackMeta) { m.TimesS = []float64{0, 1} }, "2 times, want one for each of 1 frames"},
		{func(m *StackMeta) { m.ChannelNames = []string{"a", "b"} }, "2 channel names, want at most 1"},
		{func(m *StackMeta) { m.Width, m.Height = 1<<20, 1<<20 }, "pages of 1048576 x 1048576 pixels, want at most 1073741824 bytes for a page"},
	} {
		m := good
		tc.change(&m)
		if _, err := CreateStack(path, m); err == nil || err.Error() != "imaging: "+path+": "+tc.want {
			t.Errorf("error %v, want %s", err, tc.want)
		}
	}
	for _, tc := range []struct {
		frame Frame
		want  string
	}{
		{NewFrame(3, 4), " plane 1: 3 x 4 pixels, want 4 x 3"},
		{Frame{4, 3, append(make([]float32, 11), float32(math.Inf(1)))}, " plane 1: pixel (3, 2) is +Inf, want a finite number"},
	} {
		w, err := CreateStack(path, good)
		if err != nil {
			t.Fatal(err)
		}
		if err := w.WriteFrame(tc.frame); err == nil || err.Error() != "imaging: "+path+tc.want {
			t.Errorf("error %v, want %s", err, tc.want)
		}
		w.Close()
	}
	w, err := CreateStack(path, good)
	if err != nil {
		t.Fatal(err)
	}
	for range 2 {
		err = w.WriteFrame(NewFrame(4, 3))
	}
	if err == nil || !strings.Contains(err.Error(), "a plane too many, want 1") {
		t.Errorf("error %v", err)
	}
	if err := w.Close(); err != nil {
		t.Error(err)
	}
	if _, err := CreateStack(filepath.Join(t.TempDir(), "no", "a.tif"), good); err == nil {
		t.Error("a folder that does not exist was no error")
	}
}

// A stack that may pass 4 GiB is begun as BigTIFF.
func TestWriterChoosesBigTIFF(t *testing.T) {
	for frames, want := range map[int]bool{2000: false, 8300: true} {
		w, err := CreateStack(filepath.Join(t.TempDir(), "a.tif"), StackMeta{Width: 512, Height: 512, Frames: frames})
		if err != nil {
			t.Fatal(err)
		}
		if w.big != want {
			t.Errorf("%d frames: BigTIFF %v, want %v", frames, w.big, want)
		}
		w.Close()
	}
}
