package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/cmd/wend/internal/tables"
	"wend/imaging"
)

// wend runs the program in the test's folder.
func wend(t *testing.T, args ...string) (status int, stdout, stderr string) {
	t.Helper()
	var out, err bytes.Buffer
	status = run(context.Background(), args, &out, &err)
	return status, out.String(), err.String()
}

// must runs the program and fails the test unless it ends with the status wanted.
func must(t *testing.T, want int, args ...string) (stdout, stderr string) {
	t.Helper()
	status, stdout, stderr := wend(t, args...)
	if status != want {
		t.Fatalf("wend %s: exit status %d, want %d\n%s%s", strings.Join(args, " "), status, want, stdout, stderr)
	}
	return stdout, stderr
}

// filamentMovie writes a small movie of one filament with its truth into the folder name.
func filamentMovie(t *testing.T, name string, change func(*movie.Options)) {
	t.Helper()
	o := movie.DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx, o.PixelUm = 24, 100, 84, 0.108
	o.LengthUm, o.LpUm, o.DragPaS, o.ExposureS, o.IntervalS = 6, 9, 4e-3, 0.02, 0.4
	o.PhotonsPerUm, o.BackgroundPerPx, o.WanderUm = 1200, 8, 0.2
	if change != nil {
		change(&o)
	}
	m, err := movie.New(o)
	if err != nil {
		t.Fatal(err)
	}
	if err := m.Write(t.Context(), name, nil); err != nil {
		t.Fatal(err)
	}
}

// bareStack writes frames without any metadata, each a number that its pixels hold.
func bareStack(t *testing.T, path string, m imaging.StackMeta) {
	t.Helper()
	w, err := imaging.CreateStack(path, m)
	if err != nil {
		t.Fatal(err)
	}
	for i := range m.Frames * max(1, m.Channels) {
		f := imaging.NewFrame(m.Width, m.Height)
		for k := range f.Pix {
			f.Pix[k] = float32(100 + (k*7919+i*104729)%13)
		}
		if err := w.WriteFrame(f); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
}

// table reads a CSV file as maps from column to value.
func table(t *testing.T, path string) []map[string]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, r := range rows[1:] {
		m := make(map[string]string)
		for i, c := range rows[0] {
			m[c] = r[i]
		}
		out = append(out, m)
	}
	return out
}

func number64(t *testing.T, text string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// bytesOf reads every file below dir, by its path there.
func bytesOf(t *testing.T, dir string) map[string]string {
	t.Helper()
	out := make(map[string]string)
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		b, err := os.ReadFile(path)
		rel, _ := filepath.Rel(dir, path)
		out[rel] = string(b)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// The main job against the movie's own truth, which the simulator wrote and the tracing never sees: stiffness by
// its interval, contours by their distance from the true ones, length, light, calibration from the file.
func TestMeasureAgainstTruth(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) { o.Frames = 40 })
	stdout, _ := must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free", "--temperature-c", "22")
	for _, want := range []string{"likelihood", "40/40", "report.html"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("the table does not show %q:\n%s", want, stdout)
		}
	}
	rows := table(t, "wend-out/synth/filaments.csv")
	if len(rows) != 1 {
		t.Fatalf("%d filaments, want 1", len(rows))
	}
	f := rows[0]
	const lp, length = 9.0, 6.0
	if low, high := number64(t, f["lp_low_um"]), number64(t, f["lp_high_um"]); !(low <= lp && lp <= high && high < 3*lp) {
		t.Errorf("lp_um [%g, %g], want %g inside", low, high, lp)
	}
	// The blurred contour is about 1 % shorter than the chain.
	if l := number64(t, f["length_um"]); !(math.Abs(l/length-1) < 0.025) {
		t.Errorf("length %g µm, want %g", l, length)
	}
	if p := number64(t, f["photons_per_um"]); !(math.Abs(p/1200-1) < 0.15) {
		t.Errorf("%g photons per µm, want 1200", p)
	}
	if f["end_0"] != "free" || f["end_1"] != "free" || f["confinement"] == "tube" || f["confinement"] == "pinned" || f["lp_from"] != "likelihood" {
		t.Errorf("ends %s %s, confinement %s, from %s", f["end_0"], f["end_1"], f["confinement"], f["lp_from"])
	}
	truth := make(map[string][][2]float64)
	for _, r := range table(t, "made/contours.csv") {
		truth[r["frame"]] = append(truth[r["frame"]], [2]float64{number64(t, r["x_um"]), number64(t, r["y_um"])})
	}
	sum, n := 0.0, 0
	for _, r := range table(t, "wend-out/synth/contours.csv") {
		sum += math.Pow(toLine(number64(t, r["x_um"]), number64(t, r["y_um"]), truth[r["frame"]]), 2)
		n++
	}
	// 1200 photons per µm give about 8 nm along most of the line, the ends several times that.
	if rms := 1000 * math.Sqrt(sum/float64(n)); n < 40*40 || !(rms < 25) {
		t.Errorf("%d contour points %.1f nm rms from the true lines, want 25 or less", n, rms)
	}
	if frames := table(t, "wend-out/synth/frames.csv"); len(frames) != 40 || frames[3]["time_s"] != "1.200000" {
		t.Errorf("frames.csv: %d rows, frame 3 at %s s", len(frames), frames[3]["time_s"])
	}
	summary, err := os.ReadFile("wend-out/synth/summary.json")
	if err != nil || !strings.Contains(string(summary), "OME-XML PhysicalSizeX") {
		t.Errorf("summary.json does not say where the pixel size is from: %v", err)
	}
}

// toLine is the distance from a point to a line of points, µm.
func toLine(x, y float64, line [][2]float64) float64 {
	best := math.Inf(1)
	for i := 0; i+1 < len(line); i++ {
		dx, dy := line[i+1][0]-line[i][0], line[i+1][1]-line[i][1]
		u := min(max(((x-line[i][0])*dx+(y-line[i][1])*dy)/(dx*dx+dy*dy), 0), 1)
		best = min(best, math.Hypot(x-line[i][0]-u*dx, y-line[i][1]-u*dy))
	}
	return best
}

// A broken stack fails alone; its error names file, what was found and what was wanted.
func TestBrokenStackDoesNotStopOthers(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	if err := os.WriteFile("text.tif", []byte("this is no image at all, only a line of words\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	stdout, stderr := must(t, exitSomeFailed, "measure", "text.tif", "made/synth.ome.tif", "missing.tif", "--setting", "free")
	for _, want := range []string{"text.tif", "missing.tif", "2 of 3 stacks failed", "want"} {
		if !strings.Contains(stderr, want) {
			t.Errorf("standard error does not say %q:\n%s", want, stderr)
		}
	}
	if !strings.Contains(stdout, "synth") {
		t.Errorf("the good stack is not in the table:\n%s", stdout)
	}
	if _, err := os.Stat("wend-out/text"); !errors.Is(err, fs.ErrNotExist) {
		t.Error("a folder was left for the broken stack")
	}
	if len(table(t, "wend-out/synth/filaments.csv")) != 1 {
		t.Error("the good stack was not measured")
	}
}

// Wrong use is told before any work: nothing is written.
func TestWrongUse(t *testing.T) {
	t.Chdir(t.TempDir())
	bareStack(t, "bare.tif", imaging.StackMeta{Width: 40, Height: 30, Frames: 3})
	bareStack(t, "two.tif", imaging.StackMeta{Width: 40, Height: 30, Frames: 2, Channels: 2, ChannelNames: []string{"actin", "beads"},
		PixelUm: 0.1, IntervalS: 1, ExposureS: 0.1})
	if err := os.Mkdir("other", 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.Link("two.tif", "other/two.tiff"); err != nil {
		t.Fatal(err)
	}
	for _, tc := range []struct {
		args []string
		want []string
	}{
		{[]string{"measure"}, []string{"no stack"}},
		{[]string{"look"}, []string{"no stack"}},
		{[]string{"mesure"}, []string{`"mesure"`, "--help"}},
		{[]string{"measure", "bare.tif"}, []string{"--setting"}},
		{[]string{"measure", "bare.tif", "--setting", "free"}, []string{"bare.tif", "--pixel-um", "--interval-s", "--exposure-s"}},
		{[]string{"measure", "bare.tif", "--setting", "fre"}, []string{"fre"}},
		{[]string{"measure", "bare.tif", "--setting", "adsorbed"}, []string{"adsorbed", "free"}},
		{[]string{"measure", "bare.tif", "--setting", "free", "--pixel-um", "0"}, []string{"--pixel-um 0", "above 0"}},
		{[]string{"measure", "bare.tif", "--setting", "free", "--pixel-um", "ten"}, []string{"pixel-um", "number"}},
		{[]string{"measure", "bare.tif", "--setting", "free", "--pixel-um", "0.1", "--interval-s", "1", "--exposure-s", "2"},
			[]string{"exposure 2 s", "interval 1 s"}},
		{[]string{"measure", "bare.tif", "--setting", "free", "--pixel-um", "0.1", "--interval-s", "1", "--exposure-s", "0", "--frames", "1-9"},
			[]string{"--frames 1-9", "0-2"}},
		{[]string{"measure", "bare.tif", "--frames", "5"}, []string{"FIRST-LAST"}},
		{[]string{"measure", "bare.tif", "--colour", "red"}, []string{"--colour", "--help"}},
		{[]string{"measure", "two.tif", "--setting", "free"}, []string{"1 (actin)", "2 (beads)", "--channel"}},
		{[]string{"measure", "two.tif", "--setting", "free", "--channel", "3"}, []string{"--channel 3", "2 (beads)"}},
		{[]string{"measure", "two.tif", "other/two.tiff", "--setting", "free", "--channel", "1"}, []string{"both write", "rename"}},
		{[]string{"measure", "two.tif", "--setting", "free", "--channel", "1", "--workers", "-1"}, []string{"--workers -1"}},
		{[]string{"synth"}, []string{"--out"}},
		{[]string{"synth", "--out", "s", "--lp-um", "-3"}, []string{"persistence"}},
	} {
		_, stderr := must(t, exitWrongUse, tc.args...)
		for _, want := range tc.want {
			if !strings.Contains(stderr, want) {
				t.Errorf("wend %s: %q does not say %q", strings.Join(tc.args, " "), stderr, want)
			}
		}
		if lines := strings.Count(strings.TrimSpace(stderr), "\n"); lines > 0 {
			t.Errorf("wend %s: %d lines where one is enough:\n%s", strings.Join(tc.args, " "), lines+1, stderr)
		}
	}
	for _, path := range []string{"wend-out", "s"} {
		if _, err := os.Stat(path); !errors.Is(err, fs.ErrNotExist) {
			t.Errorf("%s was written before the use was found wrong", path)
		}
	}
}

// A finished stack is not done again, unless asked for or with other settings; the results do not depend on the
// number of workers, to the byte.
func TestFinishedAndReproducible(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	args := []string{"measure", "made/synth.ome.tif", "--setting", "free", "--workers", "1"}
	must(t, exitDone, args...)
	first := bytesOf(t, "wend-out")
	if len(first) < 11 {
		t.Fatalf("%d result files, want 11 or more", len(first))
	}
	before, err := os.Stat("wend-out/synth/contours.csv")
	if err != nil {
		t.Fatal(err)
	}
	if stdout, _ := must(t, exitDone, args...); !strings.Contains(stdout, "done before") || !strings.Contains(stdout, "likelihood") {
		t.Errorf("the second run does not say that it is done, with the numbers:\n%s", stdout)
	}
	after, err := os.Stat("wend-out/synth/contours.csv")
	if err != nil || !os.SameFile(before, after) {
		t.Errorf("a finished stack was done again: %v", err)
	}
	if stdout, _ := must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free", "--workers", "4", "--redo"); strings.Contains(stdout, "done before") {
		t.Error("--redo did not measure again")
	}
	for name, text := range bytesOf(t, "wend-out") {
		if text != first[name] {
			t.Errorf("%s differs between 1 and 4 workers", name)
		}
	}
	if stdout, _ := must(t, exitDone, append(args, "--frames", "2-20")...); strings.Contains(stdout, "done before") {
		t.Error("other frames were not measured")
	}
	rows := table(t, "wend-out/synth/frames.csv")
	if len(rows) != 19 || rows[0]["frame"] != "2" || rows[18]["frame"] != "20" {
		t.Errorf("--frames 2-20 gave %d rows", len(rows))
	}
}

// The analysis done anew from saved contours, without an image, gives the tables that measure gave, to the byte.
func TestSavedContoursGiveTheSameTables(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free")
	r, err := tables.Read("wend-out/synth")
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Filaments) != 1 {
		t.Fatalf("%d filaments read back, want 1", len(r.Filaments))
	}
	for i, f := range r.Filaments {
		r.Filaments[i] = job.Analyse(f.Filament, r.TimesS, r.Settings, r.Optics)
	}
	if err := tables.Write("anew", r); err != nil {
		t.Fatal(err)
	}
	want := bytesOf(t, "wend-out/synth")
	for name, text := range bytesOf(t, "anew") {
		if text != want[name] {
			t.Errorf("%s differs when analysed from saved contours", name)
		}
	}
}

// A stack without a filament is done: tables with their header, and a warning.
func TestNoFilament(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) { o.Filaments, o.Frames = 0, 6 })
	stdout, _ := must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free")
	if !strings.Contains(stdout, "no filament found") || !strings.Contains(stdout, "wend look") {
		t.Errorf("the table does not say that nothing was found and what to do:\n%s", stdout)
	}
	for _, name := range []string{"filaments", "estimates", "frames", "contours", "modes", "tangent", "tube", "lags"} {
		if rows := table(t, "wend-out/synth/"+name+".csv"); len(rows) != 0 {
			t.Errorf("%s.csv has %d rows, want its header only", name, len(rows))
		}
	}
	if _, err := os.Stat("wend-out/synth/report.html"); err != nil {
		t.Error(err)
	}
}

// look says what is there, against what the simulator put there, and what is missing.
func TestLook(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	stdout, _ := must(t, exitDone, "look", "made/synth.ome.tif")
	for _, want := range []string{"100 × 84 pixels", "frames 24", "uint16", "0.108 µm (OME-XML", "0.4 s", "0.02 s", "1 in the first frame", "0 % of the pixels"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("look does not say %q:\n%s", want, stdout)
		}
	}
	look, err := job.LookAt("made/synth.ome.tif", job.NewRequest())
	if err != nil {
		t.Fatal(err)
	}
	// Gain 2; the level without light lies below the offset of 100 by the read noise, 1.5² electrons or 4.5 counts.
	if c := look.Conditions.Camera; !(math.Abs(c.GainCounts/2-1) < 0.15) || !(math.Abs(c.OffsetCounts-95.5) < 4) {
		t.Errorf("gain %.3g, zero-light level %.4g, want 2 and 95.5", c.GainCounts, c.OffsetCounts)
	}
	// The PSF of 130 nm and the pixel of 108 nm make 134 nm, motion in 20 ms a little more.
	if w := 108 * look.Conditions.WidthPx; !(w > 130 && w < 165) {
		t.Errorf("line width %.0f nm, want about 140", w)
	}
	bareStack(t, "bare.tif", imaging.StackMeta{Width: 60, Height: 50, Frames: 3})
	stdout, _ = must(t, exitDone, "look", "bare.tif")
	for _, want := range []string{"no pixel size in the file: pass --pixel-um", "pass --interval-s", "pass --exposure-s", "only 3 frames", "no filament"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("look at a bare stack does not say %q:\n%s", want, stdout)
		}
	}
	if err := os.WriteFile("cut.tif", []byte("II*\x00"), 0o644); err != nil {
		t.Fatal(err)
	}
	stdout, stderr := must(t, exitSomeFailed, "look", "cut.tif", "bare.tif")
	if !strings.Contains(stderr, "cut.tif") || !strings.Contains(stdout, "bare.tif") {
		t.Errorf("a broken stack stopped the look at a good one:\n%s%s", stdout, stderr)
	}
}

// Two processes do not write to one results folder.
func TestFolderInUse(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	unlock, err := lockFolder("wend-out")
	if err != nil {
		t.Fatal(err)
	}
	_, stderr := must(t, exitSomeFailed, "measure", "made/synth.ome.tif", "--setting", "free")
	if !strings.Contains(stderr, "in use") || !strings.Contains(stderr, "--out") {
		t.Errorf("standard error: %q", stderr)
	}
	unlock()
	must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free")
}

func TestHelpAndVersion(t *testing.T) {
	if stdout, _ := must(t, exitDone, "--version"); stdout != "wend "+job.Version+"\n" {
		t.Errorf("version: %q", stdout)
	}
	stdout, _ := must(t, exitDone, "--help")
	if commands := newRootCommand().Commands(); len(commands) != 4 {
		t.Errorf("%d commands, want 4", len(commands))
	}
	for _, want := range []string{"measure", "look", "check", "synth"} {
		if !strings.Contains(stdout, "  "+want+" ") {
			t.Errorf("help does not list %s:\n%s", want, stdout)
		}
	}
}

// wend help COMMAND is wend COMMAND --help.
func TestHelpOfCommand(t *testing.T) {
	want, _ := must(t, exitDone, "look", "--help")
	if got, _ := must(t, exitDone, "help", "look"); got != want || !strings.Contains(got, "STACK…") {
		t.Errorf("wend help look:\n%s\nwend look --help:\n%s", got, want)
	}
	if _, stderr := must(t, exitWrongUse, "help", "mesure"); !strings.Contains(stderr, `"mesure"`) {
		t.Errorf("wend help mesure: %q", stderr)
	}
}

func TestResultName(t *testing.T) {
	for path, want := range map[string]string{"a/b.ome.tif": "b", "B.OME.TIFF": "B", "c.tif": "c", "d.btf": "d", "e.tiff": "e", "f.x.tif": "f.x", ".tif": ".tif"} {
		if got := resultName(path); got != want {
			t.Errorf("results of %s go to %s, want %s", path, got, want)
		}
	}
}
