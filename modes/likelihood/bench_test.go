package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// movie draws the modes of a free filament of lengthUm that a line width of 0.13 µm resolves, 12 at most, with noise that wanders
// over the frames about noiseUm3 and is noiseScale times what is said.
func movie(lengthUm, lpUm, dragPaS float64, frames int, intervalS, exposureS, noiseUm3, noiseScale float64, rng *rand.Rand) Data {
	d := Data{Frames: Frames{ExposureS: exposureS}, TemperatureK: 295.15}
	for i := range frames {
		d.TimesS = append(d.TimesS, float64(i)*intervalS)
	}
	for n := 1; n <= 12; n++ {
		k := (float64(n) + 0.5) * math.Pi / lengthUm
		if k > 6.44 {
			break
		}
		y := Simulate(ModeProcess(k, lpUm, dragPaS, d.TemperatureK), d.Frames, rng)
		r := make([]float64, frames)
		for i := range r {
			r[i] = noiseUm3 * math.Exp(k*k*0.13*0.13) * (1 + 0.2*math.Sin(float64(i)))
			y[i] += 7 + math.Sqrt(noiseScale*r[i])*rng.NormFloat64()
		}
		d.Tracks = append(d.Tracks, Track{k, y, r})
	}
	return d
}

// 500 frames, 12 modes: the largest movie that should take less than a second.
func BenchmarkFit(b *testing.B) {
	d := movie(12, 8, 5e-3, 500, 0.3, 0.1, 2e-4, 1, rand.New(rand.NewPCG(1, 1)))
	for b.Loop() {
		if _, err := Fit(d, DefaultOptions()); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkRestricted(b *testing.B) {
	d := movie(12, 8, 5e-3, 500, 0.3, 0.1, 2e-4, 1, rand.New(rand.NewPCG(1, 1)))
	t := d.Tracks[0]
	p := ModeProcess(t.WavenumberPerUm, 8, 5e-3, d.TemperatureK)
	for b.Loop() {
		Restricted(p, d.Frames, t.Amplitude, t.NoiseVariance)
	}
}
