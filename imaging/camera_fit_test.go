package imaging

import (
	"math"
	"math/rand/v2"
	"testing"
)

// samplesOf draws pixels of a camera: expected counts from low to high, squared deviations with the camera's variance.
func samplesOf(c Camera, low, high float64, n int, rng *rand.Rand) NoiseSamples {
	var s NoiseSamples
	for range n {
		mean := low + (high-low)*math.Pow(rng.Float64(), 3) // mostly background
		d := rng.NormFloat64() * math.Sqrt(c.Variance(mean))
		s.Add(mean, d*d)
	}
	return s
}

// The straight line of variance against counts comes back: the photon transfer curve (Janesick, Photon Transfer, SPIE Press
// (2007), cited from memory) has the slope of the gain and vanishes where there is no light.
func TestFitCameraRecovers(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, want := range []Camera{{GainCounts: 2, OffsetCounts: 100}, {GainCounts: 0.46, OffsetCounts: 398}, {GainCounts: 11, OffsetCounts: 520}} {
		s := samplesOf(want, want.OffsetCounts+10*want.GainCounts, want.OffsetCounts+40*want.GainCounts, 60000, rng)
		got := FitCamera(s, math.NaN(), math.NaN(), want.OffsetCounts+10*want.GainCounts, 1)
		// 60 000 squared deviations, most near the background, know the slope to 2 %.
		if !(math.Abs(got.GainCounts/want.GainCounts-1) < 0.07) || got.Source != CameraFromStack {
			t.Errorf("gain %.3f (%s), want %.3f", got.GainCounts, got.Source, want.GainCounts)
		}
		if d := (got.OffsetCounts - want.OffsetCounts) / want.GainCounts; !(math.Abs(d) < 1) {
			t.Errorf("gain %g: level without light %.2f, want %.2f", want.GainCounts, got.OffsetCounts, want.OffsetCounts)
		}
		for _, m := range []float64{10, 25, 40} {
			at := want.OffsetCounts + m*want.GainCounts
			if r := got.Variance(at) / want.Variance(at); !(math.Abs(r-1) < 0.05) {
				t.Errorf("gain %g: variance at %g electrons is %.3f of the truth", want.GainCounts, m, r)
			}
		}
	}
}

// What is known is kept; what cannot be measured says so.
func TestFitCameraGivenAndFallback(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	truth := Camera{GainCounts: 2, OffsetCounts: 100, ReadVariance: 9}
	s := samplesOf(truth, 116, 180, 60000, rng)
	c := FitCamera(s, math.NaN(), 100, 116, math.Sqrt(truth.Variance(116)))
	if c.OffsetCounts != 100 || !(math.Abs(c.ReadVariance-9) < 6) {
		t.Errorf("offset given: %+v, want a read variance of 9", c)
	}
	c = FitCamera(s, 2, 100, 116, math.Sqrt(truth.Variance(116)))
	if c.GainCounts != 2 || c.OffsetCounts != 100 || c.Source != CameraGiven || !(math.Abs(c.Variance(116)/truth.Variance(116)-1) < 0.06) {
		t.Errorf("both given: %+v", c)
	}
	c = FitCamera(NoiseSamples{}, math.NaN(), math.NaN(), 116, 6)
	if c.Source != CameraFromBackground || !(math.Abs(c.Variance(116)-36) < 1e-9) {
		t.Errorf("no samples: %+v, want the background's own noise", c)
	}
	flat := samplesOf(Camera{GainCounts: 1e-9, ReadVariance: 25}, 100, 200, 60000, rng)
	if c := FitCamera(flat, math.NaN(), math.NaN(), 120, 5); c.Source != CameraFromBackground {
		t.Errorf("noise that does not rise with light: %+v, want the fallback", c)
	}
	if v := (Camera{GainCounts: 1, OffsetCounts: 100}).Variance(50); v != 1.0/12 {
		t.Errorf("variance below the level without light is %g, want that of rounding", v)
	}
}
