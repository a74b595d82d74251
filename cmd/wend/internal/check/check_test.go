package check

import (
	"context"
	"math"
	"testing"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/imaging"
)

// The conditions read off a measured movie are those that it was made with: light and length closely, the width with some of the motion in it, bend and drag
// as well as sixty frames tell.
func TestConditionsOf(t *testing.T) {
	o := movie.DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx = 60, 150, 130
	o.PhotonsPerUm, o.BleachTo, o.BackgroundPerPx, o.LengthUm, o.BendPerUm, o.DragPaS = 1500, 0.5, 10, 8, 0.1, 6e-3
	m, err := movie.New(o)
	if err != nil {
		t.Fatal(err)
	}
	nan := math.NaN()
	s := job.Settings{PixelUm: o.PixelUm, IntervalS: o.IntervalS, ExposureS: o.ExposureS, TemperatureC: o.TemperatureC,
		Setting: "free", Channel: 1, MinLengthUm: 2, LastFrame: o.Frames - 1, Gain: nan, Offset: nan}
	r, err := job.Measure(context.Background(), m, imaging.Info{MaxCount: 65535, SizeC: 1}, s, 1, nil)
	if err != nil || len(r.Filaments) != 1 {
		t.Fatal(err, len(r.Filaments))
	}
	c, err := ConditionsOf(r, &r.Filaments[0])
	if err != nil {
		t.Fatal(err)
	}
	for _, q := range []struct {
		name            string
		got, want, part float64
	}{
		{"length", c.Movie.LengthUm, o.LengthUm, 0.03}, {"photons", c.Movie.PhotonsPerUm, o.PhotonsPerUm, 0.1}, {"fading", c.Movie.BleachTo, o.BleachTo, 0.1},
		{"background", c.Movie.BackgroundPerPx, o.BackgroundPerPx, 0.25}, {"PSF", c.Movie.PSFUm, o.PSFUm, 0.2}, {"gain", c.Movie.Gain, o.Gain, 0.15},
		{"bend", c.Movie.BendPerUm, o.BendPerUm, 0.5}, {"drag", c.Movie.DragPaS / o.DragPaS, 1.3, 1}, {"Lp", c.Movie.LpUm, o.LpUm, 0.4},
	} {
		if !(math.Abs(q.got/q.want-1) < q.part) {
			t.Errorf("%s %.4g, want %.4g", q.name, q.got, q.want)
		}
	}
	if c.Movie.Frames != 60 || c.OfBound {
		t.Errorf("%d frames, of a bound %v", c.Movie.Frames, c.OfBound)
	}
	r.Settings.Setting = "network"
	if _, err := ConditionsOf(r, &r.Filaments[0]); err == nil {
		t.Error("a network: no error")
	}
}

// Movies are counted: two values about a truth of 10, a bound, nothing.
func TestCount(t *testing.T) {
	o := Outcome{Movies: 4, TrueUm: 10}
	nan := math.NaN()
	f := func(v, low, high float64) *job.Filament {
		f := &job.Filament{FramesUsed: 1}
		f.LpUm, f.LpLowUm, f.LpHighUm, f.Thermal = v, low, high, "yes"
		return f
	}
	o.count([]*job.Filament{f(10*math.Exp(0.1), 9, 13), f(10*math.Exp(-0.3), 6, 9), f(nan, 4, math.Inf(1)), nil})
	if o.Answered != 2 || o.Bounds != 1 || o.Refused != 1 || o.Held != 2 || o.ThermalYes != 3 {
		t.Errorf("%+v", o)
	}
	if !(math.Abs(o.Bias+0.1) < 1e-12) || !(math.Abs(o.Scatter-0.2*math.Sqrt2) < 1e-12) || !(math.Abs(o.BiasSE-0.2) < 1e-12) {
		t.Errorf("bias %g ± %g, scatter %g", o.Bias, o.BiasSE, o.Scatter)
	}
}

// 19 of 20: 0.751 to 0.999 (scipy 1.10.1, scipy.stats.binomtest(19,20).proportion_ci()).
func TestBinomial(t *testing.T) {
	if low, high := binomial(19, 20); !(math.Abs(low-0.7512672) < 1e-6) || !(math.Abs(high-0.9987349) < 1e-6) {
		t.Errorf("%.7f to %.7f", low, high)
	}
}
