package trace

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The width that the pixels ask for is that of the line, in every single fit. (The smear along the line can do all that a
// width can; what tells them apart is that the smear is expected to be small.)
func TestWidthOfSingleFits(t *testing.T) {
	for i, lambda := range []float64{500, 900, 3000} {
		at := sine(12.4, 21.3, 80.3, 0.08, 5, 0.9)
		d := newDrawing(110, 56, testSigmaPx, 8)
		d.line(at, lambda*testPixelUm)
		rng := rand.New(rand.NewPCG(91, uint64(i)))
		for _, assumed := range []float64{0.92, 1, 1.08} {
			tracer := testTracer(5, 1.5)
			tracer.conditions.WidthPx *= assumed
			var widths []float64
			for range 10 {
				r, ok := fitOf(tracer, d.exposed(rng, 1.5))
				if !ok || !(r.widthSE > 0) {
					t.Fatalf("%g photons per µm: found %v, standard error of the width %g", lambda, ok, r.widthSE)
				}
				w := (r.width + r.widthStep) / testWidthPx
				widths = append(widths, w)
				if !(math.Abs(w-1) < 4*r.widthSE/testWidthPx) {
					t.Errorf("%g photons per µm, assumed %g: width %.3f ± %.3f of the truth", lambda, assumed, w, r.widthSE/testWidthPx)
				}
			}
			// In a strip of two widths a width is known to 1/√(2·photons) and, with the background, to about
			// twice that: over 90 pixels of line 1.7 % at 500 photons per µm. What the step takes for linear adds some.
			if m, sd := meanSD(widths); !(math.Abs(m-1) < 0.05) || !(sd < 0.08) {
				t.Errorf("%g photons per µm, assumed %g: width %.4f ± %.4f of the truth", lambda, assumed, m, sd)
			}
		}
	}
}
