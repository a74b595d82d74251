package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// inNetwork draws the modes of a rod in a tube, the rigid ones first, with a drift of the stage in them.
func inNetwork(lengthUm, lpUm, rmsUm, dragPaS float64, frames int, intervalS, exposureS, noiseUm3 float64, rng *rand.Rand) Data {
	d := Data{Frames: Frames{ExposureS: exposureS}, TemperatureK: 295.15, Trend: 2}
	for i := range frames {
		d.TimesS = append(d.TimesS, float64(i)*intervalS)
	}
	g := TubePerUm3(rmsUm, lpUm)
	for n := -1; n <= 12; n++ {
		k := 0.0
		if n > 0 {
			k = (float64(n) + 0.5) * math.Pi / lengthUm
		}
		if k > 6.44 {
			break
		}
		y := Simulate(HeldProcess(lpUm*math.Pow(k, 4)+g, dragPaS, d.TemperatureK), d.Frames, rng)
		r := make([]float64, frames)
		for i := range r {
			r[i] = noiseUm3 * math.Exp(k*k*0.13*0.13)
			x := float64(i) / float64(frames)
			y[i] += math.Sqrt(r[i])*rng.NormFloat64() + 3*x - 2*x*x
		}
		d.Tracks = append(d.Tracks, Track{k, y, r})
	}
	return d
}

// With the constant as the only column, the two filters are one.
func TestRestrictedAboutConstant(t *testing.T) {
	d := inNetwork(10, 17, 0.1, 3e-3, 50, 0.1, 0.03, 1e-4, rand.New(rand.NewPCG(1, 1)))
	p := HeldProcess(5, 3e-3, d.TemperatureK)
	tr := d.Tracks[3]
	ones := make([]float64, 50)
	for i := range ones {
		ones[i] = 1
	}
	got, want := restrictedAbout(p, d.Frames, tr.Amplitude, tr.NoiseVariance, [][]float64{ones}), Restricted(p, d.Frames, tr.Amplitude, tr.NoiseVariance)
	if !(math.Abs(got/want-1) < 1e-10) {
		t.Errorf("%.12g, want %.12g", got, want)
	}
	// What is in the columns does not matter, up to what the columns' own size adds.
	moved := append([]float64(nil), tr.Amplitude...)
	columns := polynomials(d.TimesS, 2)
	for i := range moved {
		moved[i] += 4 - 3*columns[1][i] + 5*columns[2][i]
	}
	a, b := restrictedAbout(p, d.Frames, tr.Amplitude, tr.NoiseVariance, columns), restrictedAbout(p, d.Frames, moved, tr.NoiseVariance, columns)
	if !(math.Abs(a-b) < 1e-7*math.Abs(a)) {
		t.Errorf("a drift changes the likelihood from %.10g to %.10g", a, b)
	}
}

// Bulk rms 50, 100 and 200 nm with Lp 17 µm are tubes of 1.180, 0.1858 and 0.02926 N/m² at 25 °C: closed form of the harmonic tube, values worked out on paper
// to four digits. An infinitely stiff one has no rms.
func TestTubePerUm3(t *testing.T) {
	const kt = 4.11640e-21 // J at 25 °C
	for _, tc := range []struct{ rms, want float64 }{{0.05, 1.180}, {0.1, 0.1858}, {0.2, 0.02926}} {
		if got := TubePerUm3(tc.rms, 17) * kt * 1e18; !(math.Abs(got/tc.want-1) < 5e-4) {
			t.Errorf("rms %g µm: %.5g N/m², want %.5g", tc.rms, got, tc.want)
		}
	}
}

// Recovery: tubes narrow and wide, sampled fast and slowly, with the stiffness fitted or known.
func TestNetworkRecovers(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	for _, tc := range []struct {
		name               string
		rms, drag          float64
		frames             int
		interval, exposure float64
		known              float64
	}{
		{"narrow", 0.06, 2.4e-3, 100, 0.1, 0.001, 17},
		{"wide", 0.2, 5e-3, 100, 0.3, 0.02, 0},
		{"blurred", 0.1, 5e-3, 100, 0.2, 0.2, 17},
	} {
		const runs = 16
		held, heldLp, free := 0, 0, 0
		sum, sum2 := 0.0, 0.0
		for i := range runs {
			d := inNetwork(12, 17, tc.rms, tc.drag, tc.frames, tc.interval, tc.exposure, 1e-4, rand.New(rand.NewPCG(4, uint64(i))))
			o := DefaultOptions()
			o.Network, o.KnownLpUm, o.KnownLpSD = true, tc.known, 0.1
			r, err := Fit(d, o)
			if err != nil {
				t.Fatal(err)
			}
			if r.TubeRmsUm.Low <= tc.rms && tc.rms <= r.TubeRmsUm.High {
				held++
			}
			if r.LpUm.Low <= 17 && 17 <= r.LpUm.High {
				heldLp++
			}
			if !(FreeGain(r) > 7.7) {
				free++
			}
			e := math.Log(r.TubeRmsUm.Value / tc.rms)
			sum, sum2 = sum+e, sum2+e*e
		}
		bias := sum / runs
		se := math.Sqrt((sum2/runs - bias*bias) / (runs - 1))
		t.Logf("%s: rms held %d, Lp held %d of %d, bias of ln rms %+.3f ± %.3f", tc.name, held, heldLp, runs, bias, se)
		// Below 12 of 16 has probability 0.001.
		if held < 12 || heldLp < 12 || free > 0 {
			t.Errorf("%s: of %d, rms held %d times, Lp %d, not told from free %d", tc.name, runs, held, heldLp, free)
		}
		if !(math.Abs(bias) < 3.3*se+0.01) {
			t.Errorf("%s: bias of ln rms %.3f ± %.3f", tc.name, bias, se)
		}
	}
}
