package modes

import (
	"math"
	"testing"

	"wend/modes/chain"
)

// inBentTube is a movie of a filament in a straight tube, laid over an arc of the given radius (µm; 0: straight), with a drift of the stage, µm a frame.
func inBentTube(t testing.TB, f filament, radiusUm, driftX, driftY float64) Series {
	s := f.series(t)
	for i, c := range s.Curves {
		for j := range c.XUm {
			if radiusUm > 0 {
				sin, cos := math.Sincos(c.XUm[j] / radiusUm)
				r := radiusUm - c.YUm[j]
				c.XUm[j], c.YUm[j] = r*sin, radiusUm-r*cos
			}
			c.XUm[j] += driftX * float64(i)
			c.YUm[j] += driftY * float64(i)
		}
	}
	return s
}

// Recovery from contours: tubes straight and bent, with drift, exposures short against the tube's relaxation or the stiffness known; the movie gives back the bulk rms, free of the four-fold excess at the ends.
func TestAnalyseNetworkRecovers(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	for _, tc := range []struct {
		name           string
		rms, radius    float64
		driftX, driftY float64
		exposureS      float64
		known          bool
	}{
		{"straight", 0.12, 0, 0, 0, 0.003, false},
		{"bent, drifting", 0.12, 15, 0.003, 0.004, 0.003, false},
		{"wide, known", 0.25, 12, 0.002, -0.003, 0.05, true},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			const runs = 6
			held, sum, width := 0, 0.0, 0.0
			for i := range runs {
				f := filament{lengthUm: 12, lpUm: 16, dragPaS: 3e-3, frames: 120, intervalS: 0.2, exposureS: tc.exposureS, noiseUm3: 1e-4, tubeRmsUm: tc.rms, seed: uint64(40 + i)}
				s := inBentTube(t, f, tc.radius, tc.driftX, tc.driftY)
				if tc.known {
					s.KnownLpUm, s.KnownLpLowUm, s.KnownLpHighUm = 16, 14, 18
				}
				r := AnalyseNetwork(s, DefaultOptions())
				t.Logf("rms %.4f (%.4f to %.4f), Lp %.1f (%.1f to %.1f), %s, %s %v", r.Tube.RmsUm, r.Tube.RmsLowUm, r.Tube.RmsHighUm, r.LpUm, r.LpLowUm, r.LpHighUm, r.Confinement, r.Thermal, r.Flags)
				if r.Confinement != ConfinementTube || r.Thermal == ThermalNo {
					t.Errorf("confinement %s, thermal %s, flags %v", r.Confinement, r.Thermal, r.Flags)
				}
				if r.Tube.RmsLowUm <= tc.rms && tc.rms <= r.Tube.RmsHighUm {
					held++
				}
				sum += math.Log(r.Tube.RmsUm/tc.rms) / runs
				width += math.Log(r.Tube.RmsHighUm/r.Tube.RmsLowUm) / (2 * 1.96) / runs
				if tc.known && !math.IsNaN(r.LpUm) && r.LpFrom != FromLikelihood {
					t.Errorf("a known stiffness came out as measured: %g from %s", r.LpUm, r.LpFrom)
				}
			}
			t.Logf("%d of %d held, mean ln %+.3f, predicted sd %.3f", held, runs, sum, width)
			// Of 6 intervals of 95 % fewer than 4 hold the truth with probability 0.002.
			if held < 4 || !(math.Abs(sum) < 3.3*width/math.Sqrt(runs)+0.02) {
				t.Errorf("%d of %d intervals hold the truth, mean ln %+.3f", held, runs, sum)
			}
		})
	}
}

// A free filament is not called confined.
func TestAnalyseNetworkFree(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	t.Parallel()
	for i := range 4 {
		f := ordinary
		f.seed, f.slides = uint64(i+1), i%2 == 0
		r := AnalyseNetwork(f.series(t), DefaultOptions())
		if r.Confinement == ConfinementTube {
			t.Errorf("movie %d: called confined, rms %g (%g to %g)", i, r.Tube.RmsUm, r.Tube.RmsLowUm, r.Tube.RmsHighUm)
		}
		if !math.IsNaN(r.Tube.RmsUm) && r.Confinement == ConfinementFree {
			t.Errorf("movie %d: free, with a tube of %g µm", i, r.Tube.RmsUm)
		}
	}
}

// The axis of an arc is the arc, and drift is found: a rigid rod that slides along a bent path while the stage moves.
func TestFindTube(t *testing.T) {
	const radius, frames = 20.0, 60
	var curves []Curve
	var times []float64
	for i := range frames {
		c := Curve{}
		for j := range 101 {
			s := 0.1*float64(j) + 2*math.Sin(float64(i)*0.7)
			sin, cos := math.Sincos(s / radius)
			c.XUm = append(c.XUm, radius*sin+0.01*float64(i))
			c.YUm = append(c.YUm, radius*(1-cos)-0.006*float64(i))
		}
		curves, times = append(curves, c), append(times, float64(i))
	}
	f, ok := findTube(curves, times)
	if !ok || !f.alongIsTold {
		t.Fatalf("found %v, along is told %v", ok, f != nil && f.alongIsTold)
	}
	dx0, dy0, _ := f.drift(0)
	dx, dy, turn := f.drift(frames - 1)
	if !(math.Abs(dx-dx0-0.59) < 0.03) || !(math.Abs(dy-dy0+0.354) < 0.03) || !(math.Abs(turn) < 0.005) {
		t.Errorf("drift %.3f, %.3f µm and %.4f rad, want 0.590, -0.354 and 0", dx-dx0, dy-dy0, turn)
	}
	for i, c := range curves {
		for j := 10; j < 90; j += 20 {
			px, py := f.moved(i, c.XUm[j], c.YUm[j])
			if _, across, _ := f.nearest(px, py); !(math.Abs(across) < 0.01) {
				t.Fatalf("frame %d, point %d: %.4f µm off the axis", i, j, across)
			}
		}
	}
}

// A free end moves with four times the variance of the bulk: semi-infinite rod in a harmonic tube, ⟨y²⟩(x)/bulk = 1 + e^-u(2 + cos u − sin u), u = √2·x/ℓ, closed form.
func TestRodInTubeEndExcess(t *testing.T) {
	const lp, rms, length = 17.0, 0.1, 30.0
	th := tubeTheory{lpUm: lp, dragPaS: 1e-3, temperatureK: 295}
	th.perUm3 = math.Pow(2*math.Sqrt2*math.Pow(lp, 0.25)*rms*rms, -4.0/3)
	l := th.deflectionUm()
	for _, x := range []float64{0, 0.25, 1, 2, 15 / l} {
		sum := 0.0
		for m := range 200 {
			k := 0.0
			if m >= rigidModes {
				k = BeamWavenumber(m-rigidModes+1, length)
			}
			psi := tubeMode(m, x*l/length)
			sum += th.process(k).Variance * psi * psi / length
		}
		u := math.Sqrt2 * x
		want := 1 + math.Exp(-u)*(2+math.Cos(u)-math.Sin(u))
		if got := sum / (rms * rms); !(math.Abs(got/want-1) < 0.01) {
			t.Errorf("%.2f deflection lengths from the end: %.3f of the bulk, want %.3f", x, got, want)
		}
	}
}

// The covariance estimator gives back the diffusion along the axis under noise of the ends.
func TestSlidingRecovers(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	t.Parallel()
	held := 0
	const runs = 6
	for i := range runs {
		f := filament{lengthUm: 12, lpUm: 16, dragPaS: 3e-3, frames: 150, intervalS: 0.2, exposureS: 0.02, noiseUm3: 1e-4, tubeRmsUm: 0.12, seed: uint64(70 + i), slides: true}
		s := inBentTube(t, f, 12, 0, 0)
		r := AnalyseNetwork(s, DefaultOptions())
		// Along its axis the rod feels half the drag.
		want := chain.KT(295.15) * 1e18 / (f.dragPaS / 2 * f.lengthUm)
		e := estimate(t, r, QuantitySliding, MethodEnds)
		if e.Low <= want && want <= e.High {
			held++
		}
		t.Logf("%.3f (%.3f to %.3f), want %.3f", e.Value, e.Low, e.High, want)
	}
	if held < 4 {
		t.Errorf("%d of %d intervals hold the truth", held, runs)
	}
}
