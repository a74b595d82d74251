package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// confined is movie with a tube of stiffness ratio times that of the first mode, 10 µm, Lp 17 µm, drag 2.4e-3 Pa·s.
func confined(ratio float64, frames int, rng *rand.Rand) Data {
	d := movie(10, 17, 2.4e-3, frames, 0.5, 0.03, 2e-4, 1, rng)
	first := math.Pow(d.Tracks[0].WavenumberPerUm, 4)
	for i, t := range d.Tracks {
		p := HeldProcess(17*(math.Pow(t.WavenumberPerUm, 4)+ratio*first), 2.4e-3, d.TemperatureK)
		y := Simulate(p, d.Frames, rng)
		for j := range y {
			y[j] += math.Sqrt(t.NoiseVariance[j]) * rng.NormFloat64()
		}
		d.Tracks[i].Amplitude = y
	}
	return d
}

// A tube that nothing holds is no tube, one that is all leaves kT/γ to every mode with the same relaxation time ζ/γ, and the
// two add as rates do.
func TestTubeLimits(t *testing.T) {
	d := confined(0, 10, rand.New(rand.NewPCG(1, 1)))
	m := newModel(d, DefaultOptions())
	k1, k5 := d.Tracks[0].WavenumberPerUm, d.Tracks[4].WavenumberPerUm
	at := vector{paramLp: math.Log(17), paramDrag: math.Log(2.4e-3)}
	if got, want := m.process(k5, at), ModeProcess(k5, 17, 2.4e-3, d.TemperatureK); !(math.Abs(got.Variance/want.Variance-1) < 1e-12) {
		t.Errorf("no tube: %+v, want %+v", got, want)
	}
	at[paramTube] = math.Log(1 + 1e6)
	a, b := m.process(k1, at), m.process(k5, at)
	if !(math.Abs(a.Variance/b.Variance-1) < 1e-3) || !(math.Abs(a.Variance*17*math.Pow(k1, 4)*1e6-1) < 1e-3) {
		t.Errorf("nothing but a tube: variances %g and %g µm³", a.Variance, b.Variance)
	}
	at[paramTube] = math.Log(1 + 3)
	free, both := ModeProcess(k1, 17, 2.4e-3, d.TemperatureK), m.process(k1, at)
	if !(math.Abs(free.RelaxationS/both.RelaxationS-4) < 1e-9) {
		t.Errorf("a tube three times as stiff as the mode: relaxation %g s, free %g s", both.RelaxationS, free.RelaxationS)
	}
}

// Recovery: free filaments are hardly ever called confined, confined ones found, and the intervals of the tube and, with it fitted, of
// the persistence length hold the truth.
func TestConfinementRecovers(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	const runs = 25
	o := DefaultOptions()
	for _, ratio := range []float64{0, 2.8} {
		called, held, heldLp := 0, 0, 0
		for i := range runs {
			d := confined(ratio, 120, rand.New(rand.NewPCG(8, uint64(i))))
			free, err := Fit(d, o)
			if err != nil {
				t.Fatal(err)
			}
			tube, err := Confinement(d, o, free)
			if err != nil {
				t.Fatal(err)
			}
			if tube.Gain > 5.41 { // half of chi-squared's tail of 0.02
				called++
			}
			if tube.Ratio.Low <= ratio && ratio <= tube.Ratio.High {
				held++
			}
			if ratio > 0 {
				with := o
				with.Confined, with.LpOnly = true, true
				r, err := Fit(d, with)
				if err != nil {
					t.Fatal(err)
				}
				if r.LpUm.Low <= 17 && 17 <= r.LpUm.High {
					heldLp++
				}
			}
		}
		// Below 20 of 25 has probability 0.001 at 95 %; at 1 %, three or more of 25 have 0.002.
		if held < 20 || ratio > 0 && heldLp < 20 {
			t.Errorf("ratio %g: of %d, %d intervals of the ratio and %d of Lp hold the truth", ratio, runs, held, heldLp)
		}
		if ratio == 0 && called > 2 || ratio > 0 && called < runs-1 {
			t.Errorf("ratio %g: %d of %d called confined", ratio, called, runs)
		}
	}
}
