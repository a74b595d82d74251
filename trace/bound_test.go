package trace

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
)

// endInformation is K = ∫φ²/(Φ+b)du by the trapezoid rule: what a line that ends abruptly, over a background
// of b times its plateau, tells of where it ends.
func endInformation(b float64) float64 {
	sum := 0.0
	const step = 1e-3
	for u := -9.0; u <= 9; u += step {
		phi := math.Exp(-u*u/2) / math.Sqrt(2*math.Pi)
		sum += phi * phi / (math.Erfc(-u/math.Sqrt2)/2 + b) * step
	}
	return sum
}

// In bright and in dim light the predicted noise is what theory allows, the errors scatter as
// predicted, and the ends do too.
//
// The bounds. Across: P = s²/(λJ), see [TestFitPredictsItsErrors]. Along: a line of λ photons per length seen
// through a Gaussian s ends as λΦ((x-e)/s); its derivative by e is λφ/s, so that Poisson's information is
// ∫(λφ/s)²/(λΦ+b)dx = λK/s and the variance s/(λK). Here too the one-dimensional analogue of Mortensen et al.,
// Nat. Methods 7:377 (2010) (cited from memory). The light across a line is weighted by the fit, so that the
// background that counts is what lies in 2√π·s across (a Gaussian weight). The fit does not know the
// line's brightness and width at its end, and a smeared end may be either, so that it cannot reach that bound.
func TestErrorsAndBoundsFromDimToBright(t *testing.T) {
	for _, tc := range []struct{ b, want float64 }{{0, 0.9032}, {0.1, 0.580}, {1, 0.193}} {
		if got := endInformation(tc.b); !(math.Abs(got-tc.want) < 6e-4) {
			t.Fatalf("K(%g) = %.4f, want %.4f", tc.b, got, tc.want)
		}
	}
	const background, read, draws = 8.0, 1.5, 32
	s := testWidthPx * testPixelUm
	beta := (background + read*read) / sq(testPixelUm)
	for i, lambda := range []float64{300, 1200, 5000} {
		at := sine(12.4, 21.3, 80.3, 0.08, 5, 0.9)
		d := newDrawing(110, 56, testSigmaPx, background)
		d.line(at, lambda*testPixelUm)
		rng := rand.New(rand.NewPCG(61, uint64(i)))
		tracer := testTracer(5, read)
		var density, ends, endsSE, across, acrossSE []float64
		direction := [2]xy{at(0).minus(at(1e-3)).unit(), at(1).minus(at(1 - 1e-3)).unit()}
		for range draws {
			r, ok := fitOf(tracer, d.exposed(rng, read))
			if !ok {
				t.Fatalf("%g photons per µm: not found", lambda)
			}
			density = append(density, r.noise*math.Pow(testPixelUm, 3))
			across = append(across, interiorError(r, at))
			acrossSE = append(acrossSE, 1000*testPixelUm*rms(r.se[4:len(r.se)-4]))
			for k, p := range [2]xy{r.points[0], r.points[len(r.points)-1]} {
				ends = append(ends, p.minus(at(float64(k))).dot(direction[k]))
				endsSE = append(endsSE, r.endsSE[k])
			}
		}
		bound := sq(s) / (lambda * information(beta*s/lambda))
		ratio := median(density) / bound
		t.Logf("%g photons per µm: P %.3g µm³, %.3f of the bound; rms %.2f nm, predicted %.2f", lambda, median(density), ratio, rms(across), rms(acrossSE))
		if !(ratio > 0.9 && ratio < 1.25) {
			t.Errorf("%g photons per µm: noise density %.3g µm³, the bound is %.3g", lambda, median(density), bound)
		}
		// 32 lines of 18 and more coefficients: a ratio of rms values is known to 1/√(2·32·18) = 3 %. In dim light a
		// fit is a few per cent above what its normal equations say, as Mortensen et al. show of points; in bright
		// light the knots' own error of up to a nanometre adds.
		allowed := math.Hypot(1.06*rms(acrossSE), 1)
		if got := rms(across); !(got < 1.09*allowed && got > 0.88*rms(acrossSE)) {
			t.Errorf("%g photons per µm: %.2f nm rms off, predicted %.2f", lambda, got, rms(acrossSE))
		}
		mean, sd := meanSD(ends)
		least := math.Sqrt(s/(lambda*endInformation(beta*2*math.Sqrt(math.Pi)*s/lambda))) / testPixelUm
		t.Logf("%g photons per µm: ends %.3f ± %.3f pixels off, predicted ± %.3f, bound %.3f", lambda, mean, sd, median(endsSE), least)
		if p := median(endsSE); !(p > 0.8*least && p < 5*least) {
			t.Errorf("%g photons per µm: ends known to ± %.3f pixels, the bound is %.3f", lambda, p, least)
		}
		// 64 ends know their standard deviation to 9 %.
		if r := sd / median(endsSE); !(r > 0.6 && r < 1.4) {
			t.Errorf("%g photons per µm: ends scatter by %.3f pixels, predicted %.3f", lambda, sd, median(endsSE))
		}
	}
}

// Counts become photons, pixels become µm: a camera of two counts per electron above an offset of 100.
func TestFrameUnits(t *testing.T) {
	const lambda, background, gain, offset, read, px = 900.0, 12.0, 2.0, 100.0, 1.5, 0.09
	sigma := 0.13 / px
	d := newDrawing(140, 60, sigma, background)
	at := sine(18.4, 22.3, 100.3, 0.08, 5, 0.9)
	d.line(at, lambda*px)
	rng := rand.New(rand.NewPCG(65, 66))
	tracer, err := NewTracer(Options{PixelUm: px}, Conditions{WidthPx: math.Sqrt(sq(sigma) + 1.0/12), KnotWidths: 5, MaxCount: math.Inf(1),
		Camera: imaging.Camera{GainCounts: gain, OffsetCounts: offset, ReadVariance: sq(gain * read)}})
	if err != nil {
		t.Fatal(err)
	}
	var photons, back, snr, width []float64
	for k := range 12 {
		f := d.exposed(rng, read)
		for i, v := range f.Pix {
			f.Pix[i] = float32(math.Round(offset + gain*float64(v)))
		}
		list, err := tracer.Frame(f, k)
		if err != nil || len(list) != 1 || !list[0].Used() {
			t.Fatalf("contours %v, error %v, want one that is used", reasons(list), err)
		}
		c := list[0]
		photons, back = append(photons, c.PhotonsPerUm), append(back, c.BackgroundPerUm2)
		snr, width = append(snr, c.SNR), append(width, c.WidthUm)
		if c.Frame != k || c.Points[0].SUm != 0 {
			t.Errorf("frame %d begins at s = %g, want frame %d and 0", c.Frame, c.Points[0].SUm, k)
		}
		for i := 1; i < len(c.Points); i++ {
			p, q := c.Points[i-1], c.Points[i]
			if step := math.Hypot(q.XUm-p.XUm, q.YUm-p.YUm); math.Abs(q.SUm-p.SUm-step) > 1e-9 || step > 0.15 || step < 0.05 {
				t.Fatalf("points %d and %d: %g µm apart, s grows by %g", i-1, i, step, q.SUm-p.SUm)
			}
		}
	}
	// 10 µm of line hold 9000 photons: with the background a line's brightness is known to 2 %, twelve to 0.6 %.
	for _, v := range []struct {
		what      string
		got, want float64
		tolerance float64
	}{
		{"photons per µm", meanOf(photons), lambda, 0.02 * lambda},
		{"background per µm²", meanOf(back), background / sq(px), 0.02 * background / sq(px)},
		{"width in µm", meanOf(width), 0.13, 0.03 * 0.13},
		// Peak brightness λ·a/(√(2π)·s) over √(background + read²), all in electrons per pixel.
		{"SNR", meanOf(snr), lambda * px / math.Sqrt(2*math.Pi) / math.Sqrt(sq(sigma)+1.0/12) / math.Sqrt(background+sq(read)), 0.25},
	} {
		if !(math.Abs(v.got-v.want) < v.tolerance) {
			t.Errorf("%s: %.4g, want %.4g ± %.2g", v.what, v.got, v.want, v.tolerance)
		}
	}
}

func meanOf(v []float64) float64 {
	m, _ := meanSD(v)
	return m
}

// Cancelling in the middle ends a movie with the context's error, and no progress is told after the last frame.
func TestMovieCancelledInTheMiddle(t *testing.T) {
	m := swaying(6, 2, 100, 1.5, 70)
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	calls := 0
	_, filaments, err := Movie(ctx, m, 0, 5, Options{PixelUm: testPixelUm}, noHint, 1, func(done int) {
		if calls++; done == 2 {
			cancel()
		}
	})
	if err != context.Canceled || filaments != nil || calls >= 6 {
		t.Errorf("error %v, %d filaments, %d calls; want context canceled, none, fewer than 6", err, len(filaments), calls)
	}
}

// BenchmarkFit fits one line of 9 µm at 600 photons per µm again and again, memory used again.
func BenchmarkFit(b *testing.B) {
	at := sine(12.4, 20.3, 80.3, 0.08, 7, 1.2)
	d := newDrawing(110, 60, testSigmaPx, 8)
	d.line(at, 600*testPixelUm)
	f := d.exposed(rand.New(rand.NewPCG(71, 72)), 1.5)
	tracer := testTracer(5, 1.5)
	candidates, err := tracer.detect(f)
	if err != nil || len(candidates) != 1 {
		b.Fatalf("%d candidates, error %v", len(candidates), err)
	}
	fit := &tracer.fitter
	fit.camera, fit.width, fit.knots = tracer.conditions.Camera, testWidthPx, finestKnots
	b.ReportAllocs()
	for b.Loop() {
		if _, err := fit.fit(f, tracer.background, nil, candidates[0].path); err != nil {
			b.Fatal(err)
		}
	}
}
