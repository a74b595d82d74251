package job_test

import (
	"context"
	"math"
	"testing"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/imaging"
)

// shown is a synthetic movie as a source, its counts turned into value = (counts - zero)·factor.
type shown struct {
	m            *movie.Movie
	zero, factor float64
}

func (s shown) Frames() int { return s.m.Frames() }

func (s shown) ReadFrame(t int, dst *imaging.Frame) error {
	s.m.Frame(t, dst)
	for i, v := range dst.Pix {
		dst.Pix[i] = float32((float64(v) - s.zero) * s.factor)
	}
	return nil
}

func filmed(t *testing.T) (*movie.Movie, job.Settings) {
	t.Helper()
	o := movie.DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx, o.PixelUm = 16, 100, 84, 0.108
	o.LengthUm, o.LpUm, o.DragPaS, o.ExposureS, o.IntervalS, o.PhotonsPerUm, o.BackgroundPerPx, o.WanderUm = 6, 9, 4e-3, 0.02, 0.4, 1200, 8, 0.2
	m, err := movie.New(o)
	if err != nil {
		t.Fatal(err)
	}
	return m, job.Settings{PixelUm: o.PixelUm, IntervalS: o.IntervalS, ExposureS: o.ExposureS, TemperatureC: 22, Setting: "free", Channel: 1,
		MinLengthUm: 2, LastFrame: o.Frames - 1, Gain: math.NaN(), Offset: math.NaN()}
}

// The numbers do not depend on the unit in which a floating-point stack holds its light: values from 0 to 1 give what counts
// give, and the camera comes back in the stack's own unit.
func TestFloatsInAnyUnit(t *testing.T) {
	m, s := filmed(t)
	var want job.Filament
	for i, factor := range []float64{1, 1.0 / 4000, 1e6} {
		r, err := job.Measure(context.Background(), shown{m, 90, factor}, imaging.Info{PixelType: "float32", MaxCount: math.NaN(), SizeC: 1}, s, 1, nil)
		if err != nil || len(r.Filaments) != 1 {
			t.Fatalf("factor %g: %d filaments, %v", factor, len(r.Filaments), err)
		}
		f := r.Filaments[0]
		if g := r.Camera.GainCounts / factor; !(math.Abs(g/2-1) < 0.15) {
			t.Errorf("factor %g: gain %.3g of 2", factor, g)
		}
		if i == 0 {
			want = f
			continue
		}
		for name, pair := range map[string][2]float64{"Lp": {f.LpUm, want.LpUm}, "length": {f.LengthUm, want.LengthUm}, "photons": {f.PhotonsPerUm, want.PhotonsPerUm}} {
			if !(math.Abs(pair[0]/pair[1]-1) < 0.03) {
				t.Errorf("factor %g: %s %.4g, in counts %.4g", factor, name, pair[0], pair[1])
			}
		}
	}
}
