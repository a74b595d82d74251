package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Recovery: over movies with few and many shapes, with weak and strong blur and with noise other than predicted, the
// intervals hold the truth, the estimate is not biased and the curvature predicts the scatter.
func TestFitRecovers(t *testing.T) {
	for _, tc := range []struct {
		name                      string
		length, lp, drag          float64
		frames                    int
		interval, exposure, noise float64
		scale                     float64
	}{
		{"sparse", 6, 2, 1e-2, 30, 1, 0.02, 5e-5, 1.25},
		{"dense", 10, 6, 1e-2, 60, 0.1, 0.1, 2e-4, 0.8},
		{"blurred", 8, 6, 5e-3, 50, 0.3, 0.3, 2e-4, 1},
		{"noisy", 8, 20, 5e-3, 40, 0.3, 0.1, 1e-3, 1},
	} {
		const runs = 25
		held, heldDrag, sum, sum2, predicted := 0, 0, 0.0, 0.0, 0.0
		for i := range runs {
			d := movie(tc.length, tc.lp, tc.drag, tc.frames, tc.interval, tc.exposure, tc.noise, tc.scale,
				rand.New(rand.NewPCG(3, uint64(i))))
			r, err := Fit(d, DefaultOptions())
			if err != nil {
				t.Fatal(err)
			}
			if r.LpUm.Low <= tc.lp && tc.lp <= r.LpUm.High {
				held++
			}
			if r.DragPaS.Low <= tc.drag && tc.drag <= r.DragPaS.High {
				heldDrag++
			}
			e := math.Log(r.LpUm.Value / tc.lp)
			sum += e
			sum2 += e * e
			predicted += r.LpSD * r.LpSD
		}
		// Fewer than 20 of 25 has probability 0.001.
		if held < 20 || heldDrag < 20 {
			t.Errorf("%s: %d intervals of Lp and %d of drag of %d hold the truth", tc.name, held, heldDrag, runs)
		}
		rms, want := math.Sqrt(sum2/runs), math.Sqrt(predicted/runs)
		// The standard deviation of 25 values is known to 14 %.
		if ratio := rms / want; !(ratio > 0.58 && ratio < 1.5) {
			t.Errorf("%s: rms error of ln Lp %.3f, predicted %.3f", tc.name, rms, want)
		}
		if z := sum / runs / (want / math.Sqrt(runs)); !(math.Abs(z) < 3.3) {
			t.Errorf("%s: mean error of ln Lp %.3f, %.1f standard errors", tc.name, sum/runs, z)
		}
	}
}

// Units are physics only: lengths times a and times times a³ at the same drag leave kT/ζ and so the problem the same, up to the scale.
func TestFitScales(t *testing.T) {
	d := movie(8, 6, 5e-3, 60, 0.3, 0.1, 2e-4, 1, rand.New(rand.NewPCG(5, 5)))
	ref, err := Fit(d, DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	const a = 1.7
	e := Data{TemperatureK: d.TemperatureK}
	e.ExposureS = d.ExposureS * a * a * a
	for _, x := range d.TimesS {
		e.TimesS = append(e.TimesS, x*a*a*a)
	}
	for _, tr := range d.Tracks {
		u := Track{WavenumberPerUm: tr.WavenumberPerUm / a}
		for i := range tr.Amplitude {
			u.Amplitude = append(u.Amplitude, tr.Amplitude[i]*math.Pow(a, 1.5))
			u.NoiseVariance = append(u.NoiseVariance, tr.NoiseVariance[i]*a*a*a)
		}
		e.Tracks = append(e.Tracks, u)
	}
	got, err := Fit(e, DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"Lp", got.LpUm.Value, a * ref.LpUm.Value}, {"Lp low", got.LpUm.Low, a * ref.LpUm.Low}, {"Lp high", got.LpUm.High, a * ref.LpUm.High},
		{"drag", got.DragPaS.Value, ref.DragPaS.Value}, {"drag high", got.DragPaS.High, ref.DragPaS.High},
		{"noise scale", got.NoiseScale, ref.NoiseScale}, {"noise scale", got.NoiseScale, ref.NoiseScale},
	} {
		if !(math.Abs(c.got/c.want-1) < 2e-3) {
			t.Errorf("%s: %.6g, want %.6g", c.name, c.got, c.want)
		}
	}
}

// Nothing but noise gives a lower bound and no value; the bound is the stiffness whose signal would have been seen.
func TestFitNoiseOnly(t *testing.T) {
	d := movie(8, 6, 5e-3, 60, 0.3, 0, 2e-4, 1, rand.New(rand.NewPCG(5, 5)))
	rng := rand.New(rand.NewPCG(1, 1))
	for _, tr := range d.Tracks {
		for i := range tr.Amplitude {
			tr.Amplitude[i] = math.Sqrt(tr.NoiseVariance[i]) * rng.NormFloat64()
		}
	}
	r, err := Fit(d, DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	if !math.IsInf(r.LpUm.High, 1) || !math.IsNaN(r.LpUm.Value) {
		t.Errorf("interval %+v, want an open one without a value", r.LpUm)
	}
	// Variance 1/(Lp·k⁴) of mode 1 against a noise of 2e-4 µm³ known to a few per cent from all modes.
	if v := 1 / (r.LpUm.Low * math.Pow(1.5*math.Pi/8, 4)); !(v > 2e-6 && v < 4e-4) {
		t.Errorf("lower bound %.3g µm: variance %.3g µm³ of the first mode, noise 2e-4", r.LpUm.Low, v)
	}
}

func TestFitRefuses(t *testing.T) {
	good := func() Data { return movie(8, 6, 5e-3, 10, 0.3, 0.1, 2e-4, 1, rand.New(rand.NewPCG(5, 5))) }
	for name, spoil := range map[string]func(*Data){
		"one frame":       func(d *Data) { d.TimesS = d.TimesS[:1] },
		"no mode":         func(d *Data) { d.Tracks = nil },
		"cold":            func(d *Data) { d.TemperatureK = 0 },
		"time stands":     func(d *Data) { d.TimesS[4] = d.TimesS[3] },
		"long exposure":   func(d *Data) { d.ExposureS = 0.4 },
		"nan":             func(d *Data) { d.Tracks[1].Amplitude[2] = math.NaN() },
		"no noise":        func(d *Data) { d.Tracks[1].NoiseVariance[2] = 0 },
		"ragged":          func(d *Data) { d.Tracks[0].Amplitude = d.Tracks[0].Amplitude[:5] },
		"zero wavenumber": func(d *Data) { d.Tracks[0].WavenumberPerUm = 0 },
	} {
		d := good()
		spoil(&d)
		if _, err := Fit(d, DefaultOptions()); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if _, err := Fit(good(), DefaultOptions()); err != nil {
		t.Error(err)
	}
}
