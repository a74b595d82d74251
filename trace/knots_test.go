package trace

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Knots follow the noise alone: closest in good light, further apart the dimmer it is, never beyond their bounds.
func TestKnotsFollowTheLight(t *testing.T) {
	last := 0.0
	for _, p := range []float64{1e-6, 0.01, 0.05, 0.1, 0.2, 0.5, 10} {
		k := chooseKnots(p)
		if k < last || k < finestKnots || k > coarsestKnots {
			t.Errorf("noise %g: knots %g widths apart, after %g", p, k, last)
		}
		last = k
	}
	if chooseKnots(1e-6) != finestKnots || chooseKnots(10) != coarsestKnots || chooseKnots(math.NaN()) != firstKnots {
		t.Errorf("knots %g, %g and %g widths apart", chooseKnots(1e-6), chooseKnots(10), chooseKnots(math.NaN()))
	}
}

// With the knots that the light allows: waves of 1.0 to 1.5 µm are as noisy as photons make them, and not more than 1.3 times; a fit's
// errors are as large as the knots were chosen for; an end is not far worse than the middle, because it carries neither moment nor
// shear; and the length scatters as predicted, by its ends, its bends and what its tangent's noise adds.
func TestFineKnotsReachTheBound(t *testing.T) {
	const background, read, draws = 8.0, 1.5, 40
	s := testWidthPx * testPixelUm
	beta := (background + read*read) / sq(testPixelUm)
	for i, lambda := range []float64{300, 700, 2000} {
		bound := sq(s) / (lambda * information(beta*s/lambda))
		knots := chooseKnots(bound / (s * s * s))
		at := sine(12.4, 20.3, 80.3, 0.08, 7, 1.2)
		trueLength := lengthOf(at)
		d := newDrawing(110, 60, testSigmaPx, background)
		d.line(at, lambda*testPixelUm)
		tracer := testTracer(knots, read)
		rng := rand.New(rand.NewPCG(201, uint64(i)))
		var waves, interior, ends, se, lengths, lengthSE []float64
		for range draws {
			r, ok := fitOf(tracer, d.exposed(rng, read))
			if !ok {
				t.Fatalf("%g photons per µm: not found", lambda)
			}
			for n := 6; n <= 8; n++ {
				q := 2 * math.Pi * float64(n) / (trueLength * testPixelUm)
				waves = append(waves, waveError(r, at, n)*math.Pow(testPixelUm, 1.5)/math.Exp(q*q*s*s/2))
			}
			interior = append(interior, interiorError(r, at))
			n := len(r.points)
			for _, p := range []xy{r.points[1], r.points[n-2]} {
				ends = append(ends, 1000*testPixelUm*acrossError(p, at))
			}
			se = append(se, median(r.se)/testWidthPx)
			lengths, lengthSE = append(lengths, r.length), append(lengthSE, r.lengthSE)
		}
		mean, sd := meanSD(lengths)
		t.Logf("%g photons per µm, knots %.2f widths apart: waves %.2f of the bound, standard error %.3f widths, middle %.1f nm, ends %.1f nm, length %+.2f %%, its scatter %.2f of the predicted",
			lambda, knots, sq(rms(waves))/bound, median(se), rms(interior), rms(ends), 100*(mean/trueLength-1), sd/median(lengthSE))
		if knots*ResolvedKnots*s < 1.08 { // waves that are meant to come through
			// 120 values know a variance to 13 %.
			if ratio := sq(rms(waves)) / bound; !(ratio > 0.65 && ratio < 1.45) {
				t.Errorf("%g photons per µm: waves of 1.1 to 1.5 µm %.2f times as noisy as the bound", lambda, ratio)
			}
		}
		if knots < coarsestKnots && !(median(se) < 1.15*largestError) {
			t.Errorf("%g photons per µm: standard error %.3f widths, want %g or less", lambda, median(se), largestError)
		}
		if !(rms(ends) < 2.2*rms(interior)) {
			t.Errorf("%g photons per µm: the ends are %.1f nm off, the middle %.1f", lambda, rms(ends), rms(interior))
		}
		if !(math.Abs(mean/trueLength-1) < 0.01) {
			t.Errorf("%g photons per µm: length %.3f of the true one", lambda, mean/trueLength)
		}
		// 40 lengths know their scatter to 11 %.
		if r := sd / median(lengthSE); !(r > 0.65 && r < 1.4) {
			t.Errorf("%g photons per µm: lengths scatter by %.2f of what is predicted", lambda, r)
		}
	}
}
