package main

import (
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"slices"
	"strings"
	"testing"

	"wend/imaging"
)

const demoStack = "../../testdata/demo.ome.tif"

// The demo stack is, to the pixel, what the command in testdata/README.md makes, and has the calibration that
// the demo relies on.
func TestDemoStackIsMadeAsSaid(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		t.Skip("rounding differs where the compiler fuses multiply and add")
	}
	text, err := os.ReadFile("../../testdata/README.md")
	if err != nil {
		t.Fatal(err)
	}
	command := regexp.MustCompile("(?s)```sh\nwend (synth .*?)\n```").FindSubmatch(text)
	if command == nil {
		t.Fatal("testdata/README.md has no command")
	}
	want, err := imaging.Open(demoStack, imaging.OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer want.Close()
	t.Chdir(t.TempDir())
	must(t, exitDone, strings.Fields(string(command[1]))...)
	got, err := imaging.Open("demo/synth.ome.tif", imaging.OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer got.Close()
	if got.Frames() != want.Frames() || want.Frames() != 60 {
		t.Fatalf("%d frames, the demo has %d, want 60", got.Frames(), want.Frames())
	}
	if a, b := got.Info().Calibration, want.Info().Calibration; a.PixelUm != b.PixelUm || a.IntervalS != b.IntervalS || a.ExposureS != b.ExposureS {
		t.Errorf("calibration %+v, the demo has %+v", a, b)
	}
	var a, b imaging.Frame
	for frame := range want.Frames() {
		if err := got.ReadFrame(0, frame, &a); err != nil {
			t.Fatal(err)
		}
		if err := want.ReadFrame(0, frame, &b); err != nil {
			t.Fatal(err)
		}
		if !slices.Equal(a.Pix, b.Pix) {
			t.Fatalf("frame %d is not the demo's", frame)
		}
	}
}

// The demo's answer against the truth that testdata/README.md states.
func TestDemoAgainstTruth(t *testing.T) {
	stack, err := filepath.Abs(demoStack)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	must(t, exitDone, "measure", stack, "--setting", "free")
	rows := table(t, "wend-out/demo/filaments.csv")
	if len(rows) != 1 || rows[0]["frames_used"] != "60" || rows[0]["flags"] != "" {
		t.Fatalf("filaments %v, want one, used in 60 frames, without a flag", rows)
	}
	low, high := number64(t, rows[0]["lp_low_um"]), number64(t, rows[0]["lp_high_um"])
	if !(low < 12 && 12 < high && high < 3*low) {
		t.Errorf("persistence length %g to %g µm, want 12 inside", low, high)
	}
	if length := number64(t, rows[0]["length_um"]); !(length > 6.8 && length < 7.2) {
		t.Errorf("length %g µm, want 7", length)
	}
}
