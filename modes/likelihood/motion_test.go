package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// What an exposure hides is v(1-S). S(1) = 0.735759 (Wong & Halvorsen, Opt. Express 14:12517 (2006), the blur of a
// harmonic mode; value from its closed form 2(α-1+e^-α)/α²); nothing is hidden from an instant, all from for ever.
func TestHidden(t *testing.T) {
	p := Process{Variance: 2, RelaxationS: 0.5}
	for _, tc := range []struct{ exposureS, want float64 }{{0, 0}, {0.5, 2 * (1 - 0.735759)}, {1e9, 2}} {
		if got := Hidden(p, tc.exposureS); !(math.Abs(got-tc.want) < 2e-6) {
			t.Errorf("Hidden after %g s = %.7f, want %.7f", tc.exposureS, got, tc.want)
		}
	}
}

// Motion noise is nothing but more noise: the likelihood with it is that of the same data with the noise
// variances raised by hand, and without exposure it does nothing.
func TestMotionNoiseIsNoise(t *testing.T) {
	const share = 0.05
	at := vector{paramLp: math.Log(8), paramDrag: math.Log(4e-3)}
	for _, exposure := range []float64{0, 0.2} {
		d := movie(8, 8, 4e-3, 40, 0.4, exposure, 1e-4, 1, rand.New(rand.NewPCG(5, 6)))
		raised := d
		raised.Tracks = nil
		for _, track := range d.Tracks {
			hidden := share * Hidden(ModeProcess(track.WavenumberPerUm, 8, 4e-3, d.TemperatureK), exposure)
			copied := track
			copied.NoiseVariance = nil
			for _, r := range track.NoiseVariance {
				copied.NoiseVariance = append(copied.NoiseVariance, r+hidden)
			}
			raised.Tracks = append(raised.Tracks, copied)
		}
		plain := newModel(d, DefaultOptions()).value(at)
		d.MotionNoise = share
		got, want := newModel(d, DefaultOptions()).value(at), newModel(raised, DefaultOptions()).value(at)
		if !(math.Abs(got-want) < 1e-9*math.Abs(want)) {
			t.Errorf("exposure %g s: log-likelihood %.9f, want %.9f", exposure, got, want)
		}
		if same := got == plain; same != (exposure == 0) {
			t.Errorf("exposure %g s: motion noise without effect is %v", exposure, same)
		}
	}
}

// Recovery: amplitudes that carry motion noise are fitted without bias when the fit knows of it, and come out too
// soft when it does not.
func TestMotionNoiseRecovery(t *testing.T) {
	const lp, drag, exposure, share, runs = 12.0, 6e-3, 0.2, 0.08, 20
	mean := func(known float64) (bias, se float64) {
		sum, sum2 := 0.0, 0.0
		for i := range runs {
			rng := rand.New(rand.NewPCG(9, uint64(i)))
			d := movie(9, lp, drag, 100, 0.5, exposure, 1e-4, 1, rng)
			for _, track := range d.Tracks {
				sd := math.Sqrt(share * Hidden(ModeProcess(track.WavenumberPerUm, lp, drag, d.TemperatureK), exposure))
				for j := range track.Amplitude {
					track.Amplitude[j] += sd * rng.NormFloat64()
				}
			}
			d.MotionNoise = known
			r, err := Fit(d, DefaultOptions())
			if err != nil {
				t.Fatal(err)
			}
			e := math.Log(r.LpUm.Value / lp)
			sum += e
			sum2 += e * e
		}
		bias = sum / runs
		return bias, math.Sqrt((sum2/runs - bias*bias) / (runs - 1))
	}
	told, se := mean(share)
	if !(math.Abs(told) < 3.3*se) {
		t.Errorf("told of its motion noise, the fit is off by %.3f ± %.3f in ln Lp", told, se)
	}
	if untold, _ := mean(0); !(untold < told-2*se) {
		t.Errorf("not told, the fit is off by %.3f, told by %.3f: want it clearly softer", untold, told)
	}
}
