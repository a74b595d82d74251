package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"wend/cmd/wend/internal/movie"
	"wend/imaging"
)

// synth runs the command and returns what it said.
func synth(t *testing.T, args ...string) (string, error) {
	t.Helper()
	cmd := newSynthCommand()
	var said bytes.Buffer
	cmd.SetOut(&said)
	cmd.SetErr(&said)
	cmd.SilenceUsage, cmd.SilenceErrors = true, true
	cmd.SetArgs(args)
	err := cmd.ExecuteContext(context.Background())
	return said.String(), err
}

var synthSmall = []string{"--frames", "5", "--filaments", "2", "--length-um", "4", "--width-px", "180", "--height-px", "150",
	"--pixel-um", "0.108", "--interval-s", "0.25", "--exposure-s", "0.02", "--lp-um", "9", "--bleach-to", "0.7", "--turn-rad", "inf"}

func TestSynthWritesMovieAndTruth(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "new", "movie")
	if _, err := synth(t, append(synthSmall, "--out", dir)...); err != nil {
		t.Fatal(err)
	}
	s, err := imaging.Open(filepath.Join(dir, movie.StackFile), imaging.OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	info := s.Info()
	if s.Frames() != 5 || info.Width != 180 || info.Height != 150 || info.PixelType != "uint16" {
		t.Errorf("stack of %d frames %d × %d %s", s.Frames(), info.Width, info.Height, info.PixelType)
	}
	if c := info.Calibration; c.PixelUm.Value != 0.108 || c.IntervalS.Value != 0.25 || c.ExposureS.Value != 0.02 {
		t.Errorf("calibration %+v", c)
	}

	text, err := os.ReadFile(filepath.Join(dir, "truth.json"))
	if err != nil {
		t.Fatal(err)
	}
	var truth struct {
		Settings  map[string]any
		Filaments []movie.FilamentTruth
	}
	if err := json.Unmarshal(text, &truth); err != nil {
		t.Fatal(err)
	}
	if len(truth.Filaments) != 2 || truth.Filaments[1].LpUm != 9 || truth.Filaments[0].LengthUm != 4 || !(truth.Filaments[0].DragPaS > 0) {
		t.Errorf("filaments %+v", truth.Filaments)
	}
	if truth.Settings["turn_rad"] != "inf" || truth.Settings["seed"] != 1.0 {
		t.Errorf("settings %v", truth.Settings)
	}

	// Every contour point lies on light: the mean count there is far above the offset's and
	// the background's.
	f, err := os.Open(filepath.Join(dir, "contours.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if got := strings.Join(rows[0], ","); got != "filament,frame,point,s_um,x_um,y_um,se_nm" {
		t.Fatalf("columns %s", got)
	}
	frames := make([]imaging.Frame, 5)
	for i := range frames {
		if err := s.ReadFrame(0, i, &frames[i]); err != nil {
			t.Fatal(err)
		}
	}
	seen, on := map[string]int{}, 0.0
	for _, r := range rows[1:] {
		frame, _ := strconv.Atoi(r[1])
		x, _ := strconv.ParseFloat(r[4], 64)
		y, _ := strconv.ParseFloat(r[5], 64)
		seen[r[0]+"/"+r[1]]++
		on += float64(frames[frame].At(int(math.Round(x/0.108)), int(math.Round(y/0.108)))) / float64(len(rows)-1)
	}
	if len(seen) != 10 {
		t.Errorf("contours of %d filament-frames, want 10", len(seen))
	}
	for key, n := range seen {
		if n < 35 || n > 41 {
			t.Errorf("%s: %d points on 4 µm, want about 40", key, n)
		}
	}
	// Background 140 counts; on the ridge well over half of its peak, 0.85 after bleaching on
	// average.
	if want := 140 + 0.6*0.85*2*2000*0.108*0.108/(0.13*math.Sqrt(2*math.Pi)); !(on > want) {
		t.Errorf("mean count on the true contours %.0f, want above %.0f", on, want)
	}
}

func TestSynthSameBytes(t *testing.T) {
	dirs := []string{t.TempDir(), t.TempDir(), t.TempDir()}
	for i, seed := range []string{"3", "3", "4"} {
		if _, err := synth(t, append(synthSmall, "--out", dirs[i], "--seed", seed)...); err != nil {
			t.Fatal(err)
		}
	}
	for _, name := range []string{"synth.ome.tif", "contours.csv", "truth.json"} {
		var got [3][]byte
		for i, dir := range dirs {
			b, err := os.ReadFile(filepath.Join(dir, name))
			if err != nil {
				t.Fatal(err)
			}
			got[i] = b
		}
		if !bytes.Equal(got[0], got[1]) {
			t.Errorf("%s: the same seed gave other bytes", name)
		}
		if bytes.Equal(got[0], got[2]) {
			t.Errorf("%s: another seed gave the same bytes", name)
		}
	}
}

func TestSynthRefuses(t *testing.T) {
	dir := t.TempDir()
	for _, args := range [][]string{
		{},
		{"--out", dir, "--lp-um", "-3"},
		{"--out", dir, "--exposure-s", "2"},
		{"--out", dir, "--length-um", "60"},
		{"--out", dir, "--pixel-um", "NaN"},
		{"--out", dir, "--bleach-to", "0"},
	} {
		if _, err := synth(t, args...); !errors.Is(err, movie.ErrOptions) {
			t.Errorf("%v: error %v, want ErrOptions", args, err)
		}
	}
	if _, err := synth(t, "--out", dir, "surplus"); err == nil {
		t.Error("a surplus argument was taken")
	}
	if left, _ := os.ReadDir(dir); len(left) != 0 {
		t.Errorf("wrong use left %d files", len(left))
	}
	if err := os.WriteFile(filepath.Join(dir, "contours.csv"), []byte("measured\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	if _, err := synth(t, append(synthSmall, "--out", dir)...); !errors.Is(err, movie.ErrOccupied) {
		t.Errorf("error %v, want ErrOccupied", err)
	}
	if b, _ := os.ReadFile(filepath.Join(dir, "contours.csv")); string(b) != "measured\n" {
		t.Error("measured contours were overwritten")
	}
}

func TestSynthExample(t *testing.T) {
	t.Chdir(t.TempDir())
	fields := strings.Fields(newSynthCommand().Example)
	if len(fields) < 3 || fields[0] != "wend" || fields[1] != "synth" {
		t.Fatalf("example %v", fields)
	}
	said, err := synth(t, fields[2:]...)
	if err != nil {
		t.Fatal(err)
	}
	if said != "demo: 50 frames, filaments: 1\n" {
		t.Errorf("said %q", said)
	}
}

func TestSynthCancelled(t *testing.T) {
	dir := t.TempDir()
	ctx, cancel := context.WithCancel(context.Background())
	m, err := movie.New(movie.DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	err = m.Write(ctx, dir, func(frame int) {
		if frame == 2 {
			cancel()
		}
	})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want context.Canceled", err)
	}
	if left, _ := os.ReadDir(dir); len(left) != 0 {
		t.Errorf("a cancelled movie left %s", left[0].Name())
	}
}
