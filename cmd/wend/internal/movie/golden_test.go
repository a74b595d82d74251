package movie

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"testing"

	"github.com/google/go-cmp/cmp"

	"wend/imaging"
)

var update = flag.Bool("update", false, "write the golden file anew")

// TestGolden holds a small movie against the one of earlier builds: a change of the order
// in which random numbers are drawn changes every movie of every seed, and should be meant.
func TestGolden(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		t.Skip("rounding differs where the compiler fuses multiply and add")
	}
	o := DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx, o.LengthUm, o.LpUm, o.WanderUm, o.TurnRad = 3, 60, 52, 2, 8, 0.05, 0.1
	o.Spots, o.HotPixels, o.DyePerUm, o.Flicker, o.Uneven, o.BleachTo = 1, 1, 40, 0.1, 0.3, 0.5
	m := mustNew(t, o)
	var got bytes.Buffer
	var f imaging.Frame
	for frame := range m.Frames() {
		for i, c := range m.Truth(frame) {
			for k := range c.SUm {
				fmt.Fprintf(&got, "contour %d %d %d: %.4f %.4f %.4f\n", i+1, frame, k, c.SUm[k], c.XUm[k], c.YUm[k])
			}
		}
		m.Frame(frame, &f)
		for y := 0; y < f.Height; y += 13 {
			fmt.Fprintf(&got, "counts %d %d: %v\n", frame, y, f.Pix[y*f.Width:(y+1)*f.Width])
		}
	}
	name := filepath.Join("testdata", "golden.txt")
	if *update {
		if err := os.MkdirAll("testdata", 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(name, got.Bytes(), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff(string(want), got.String()); d != "" {
		t.Errorf("the movie changed (-want +got):\n%s", d)
	}
}
