package trace

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
)

// interiorError is the root of the mean square distance from the fitted points, four at each end left out, to the
// true curve, in nm.
func interiorError(r fitted, at func(t float64) xy) float64 {
	sum, n := 0.0, 0
	for _, p := range r.points[4 : len(r.points)-4] {
		sum += sq(acrossError(p, at))
		n++
	}
	return 1000 * testPixelUm * math.Sqrt(sum/float64(n))
}

// Without noise the centreline is where the light is, whatever the shape: within 3 nm. (The frame carries a hundredth of a
// count of noise, so that the ridge map has a unit.)
func TestFitIsUnbiased(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for name, at := range map[string]func(t float64) xy{
		"straight": sine(12.3, 20.7, 80.4, 0.13, 0, 1),
		"sine":     sine(12.3, 25.2, 80.4, 0.08, 7, 1.3),
		"arc": func(t float64) xy {
			sin, cos := math.Sincos(0.4 + 2*t)
			return xy{55.2 - 38*cos, 45.6 - 38*sin}
		},
	} {
		d := newDrawing(110, 60, testSigmaPx, 8)
		d.line(at, 600*testPixelUm)
		f := imaging.NewFrame(110, 60)
		for i, v := range d.frame.Pix {
			f.Pix[i] = v + float32(0.01*rng.NormFloat64())
		}
		r, ok := fitOf(testTracer(4, 1), f)
		if !ok {
			t.Errorf("%s: not found", name)
			continue
		}
		if e := interiorError(r, at); !(e < 3) {
			t.Errorf("%s: %.2f nm rms off without noise, want 3 or less", name, e)
		}
		if b := r.brightness / (600 * testPixelUm); !(math.Abs(b-1) < 0.02) {
			t.Errorf("%s: brightness %.4f of the truth", name, b)
		}
		if b := r.background / 8; !(math.Abs(b-1) < 0.02) {
			t.Errorf("%s: background %.4f of the truth", name, b)
		}
		if w := (r.width + r.widthStep) / testWidthPx; !(math.Abs(w-1) < 0.03) {
			t.Errorf("%s: width %.4f of the truth", name, w)
		}
	}
}

// The errors that a fit predicts are those that it makes, over many draws of the noise: across the line, in length,
// at the ends, in the noise density of long waves; and the density is what theory allows.
//
// Theory: a strip of a line of λ photons per length over a background of β per area tells the line's place to
// P = s²/(λJ), J = ∫u²φ²/(φ+r)du, r = βs/λ, s² with the pixel's a²/12: the one-dimensional analogue of
// Mortensen, Churchman, Spudich & Flyvbjerg, Nat. Methods 7:377 (2010) (cited from memory). By quadrature 1/J is
// 1.1715 at r = 0.01, 2.0078 at 0.1 and 3.5332 at 0.3, which the test puts back in first.
func TestFitPredictsItsErrors(t *testing.T) {
	for _, tc := range []struct{ r, want float64 }{{0.01, 1.1715}, {0.1, 2.0078}, {0.3, 3.5332}} {
		if got := 1 / information(tc.r); !(math.Abs(got-tc.want) < 2e-4) {
			t.Fatalf("1/J(%g) = %.4f, want %.4f", tc.r, got, tc.want)
		}
	}
	const lambda, background, read = 600.0, 8.0, 1.5 // per µm, per pixel, electrons
	at := sine(12.4, 20.3, 80.3, 0.08, 7, 1.2)
	trueLength := lengthOf(at)
	d := newDrawing(110, 60, testSigmaPx, background)
	d.line(at, lambda*testPixelUm)
	tracer := testTracer(5, read)
	rng := rand.New(rand.NewPCG(2, 3))
	const draws = 60
	var across, acrossSE, lengths, lengthSE, density, ends, endsSE []float64
	var waves [4][]float64
	for range draws {
		r, ok := fitOf(tracer, d.exposed(rng, read))
		if !ok {
			t.Fatal("not found")
		}
		across = append(across, interiorError(r, at))
		acrossSE = append(acrossSE, 1000*testPixelUm*median(r.se))
		lengths = append(lengths, r.length)
		lengthSE = append(lengthSE, r.lengthSE)
		density = append(density, r.noise)
		ends = append(ends, r.points[0].minus(at(0)).dot(at(1e-3).minus(at(0)).unit()))
		endsSE = append(endsSE, r.endsSE[0])
		for k := range waves {
			waves[k] = append(waves[k], waveError(r, at, k+1))
		}
	}
	// 60 draws know a standard deviation to 9 %, and a root of a mean over 60 lines of dozens of independent
	// pieces much better. At so few photons a fit is 5 to 15 % above the bound (as for points: the bound is for many).
	if ratio := rms(across) / median(acrossSE); !(ratio > 0.93 && ratio < 1.25) {
		t.Errorf("across the line: %.1f nm, predicted %.1f", rms(across), median(acrossSE))
	}
	mean, sd := meanSD(lengths)
	if !(math.Abs(mean/trueLength-1) < 0.004) {
		t.Errorf("length %.3f pixels, want %.3f", mean, trueLength)
	}
	if ratio := sd / median(lengthSE); !(ratio > 0.65 && ratio < 1.35) {
		t.Errorf("length scatters by %.3f pixels, predicted %.3f", sd, median(lengthSE))
	}
	mean, sd = meanSD(ends)
	if !(math.Abs(mean) < 0.15) || !(sd/median(endsSE) < 1.5) {
		t.Errorf("end %.3f ± %.3f pixels off, predicted ± %.3f", mean, sd, median(endsSE))
	}
	for k, w := range waves {
		q := 2 * math.Pi * float64(k+1) / trueLength
		predicted := median(density) * math.Exp(sq(q*testWidthPx))
		// The variance of 60 values is known to 18 %.
		if ratio := sq(rms(w)) / predicted; !(ratio > 0.55 && ratio < 1.75) {
			t.Errorf("wave %d: error variance %.4g pixels³, predicted %.4g", k+1, sq(rms(w)), predicted)
		}
	}
	s := testWidthPx * testPixelUm
	beta := (background + read*read) / sq(testPixelUm)
	bound := sq(s) / (lambda * information(beta*s/lambda))
	if ratio := median(density) * math.Pow(testPixelUm, 3) / bound; !(ratio > 0.95 && ratio < 1.2) {
		t.Errorf("noise density %.3g µm³, the bound is %.3g", median(density)*math.Pow(testPixelUm, 3), bound)
	}
}

// information is J(r) by the trapezoid rule.
func information(r float64) float64 {
	sum := 0.0
	const step = 1e-3
	for u := -9.0; u <= 9; u += step {
		phi := math.Exp(-u*u/2) / math.Sqrt(2*math.Pi)
		sum += u * u * phi * phi / (phi + r) * step
	}
	return sum
}

// waveError projects the error across the line on a long cosine wave, normalised to ∫ψ² = 1, pixels^1.5.
func waveError(r fitted, at func(t float64) xy, waves int) float64 {
	s := arcLengths(r.points)
	length := s[len(s)-1]
	sum := 0.0
	for i := 1; i < len(s)-1; i++ {
		p := r.points[i]
		tangent := r.points[i+1].minus(r.points[i-1]).unit()
		normal := xy{-tangent.y, tangent.x}
		sum += normal.dot(p.minus(nearestOn(p, at))) * math.Sqrt(2/length) * math.Cos(2*math.Pi*float64(waves)*s[i]/length) * (s[i+1] - s[i-1]) / 2
	}
	return sum
}

func rms(v []float64) float64 {
	sum := 0.0
	for _, x := range v {
		sum += x * x
	}
	return math.Sqrt(sum / float64(len(v)))
}

func meanSD(v []float64) (mean, sd float64) {
	for _, x := range v {
		mean += x / float64(len(v))
	}
	for _, x := range v {
		sd += sq(x-mean) / float64(len(v)-1)
	}
	return mean, math.Sqrt(sd)
}

// Waves at least as long as Conditions.ResolvedWidths says come through with their amplitude.
func TestTransfer(t *testing.T) {
	if testing.Verbose() {
		t.Log("amplitude out over in, by knots (line widths) and wavelength (of the resolved one)")
	}
	rng := rand.New(rand.NewPCG(4, 4))
	const amplitude = 0.025 / testPixelUm
	for _, knots := range []float64{finestKnots, 3, 4, 6, 8} {
		resolved := Conditions{KnotWidths: knots}.ResolvedWidths() * testWidthPx
		for _, factor := range []float64{0.85, 1, 1.2, 1.6} {
			wave := factor * resolved
			length := 140.0
			at := func(u float64) xy {
				return xy{15.3 + length*u, 21.4 + 0.07*length*u + amplitude*math.Sin(2*math.Pi*length*u/wave)}
			}
			d := newDrawing(172, 54, testSigmaPx, 8)
			d.line(at, 3000*testPixelUm)
			f := imaging.NewFrame(172, 54)
			for i, v := range d.frame.Pix {
				f.Pix[i] = v + float32(0.05*rng.NormFloat64())
			}
			r, ok := fitOf(testTracer(knots, 1), f)
			if !ok {
				t.Fatalf("knots %g, wavelength %g: not found", knots, wave)
			}
			// Regression of the deviation from the axis on the wave, the ends left out.
			var xy, yy float64
			for _, p := range r.points[8 : len(r.points)-8] {
				w := math.Sin(2 * math.Pi * (p.x - 15.3) / wave)
				xy += w * (p.y - 21.4 - 0.07*(p.x-15.3))
				yy += w * w
			}
			ratio := xy / yy / amplitude
			t.Logf("knots %g wavelength %.2f (%.0f nm): %.3f", knots, factor, 1000*testPixelUm*wave, ratio)
			if factor >= 1 && !(math.Abs(ratio-1) < 0.04) {
				t.Errorf("knots %g, wavelength %.2f of the resolved one: amplitude × %.3f, want 1 within 4 %%", knots, factor, ratio)
			}
		}
	}
}

// A hot pixel and a bright spot beside the line pull it by less than the noise.
func TestFitStandsDirt(t *testing.T) {
	at := sine(12.4, 20.3, 80.3, 0.08, 5, 1.2)
	d := newDrawing(110, 60, testSigmaPx, 8)
	d.line(at, 600*testPixelUm)
	rng := rand.New(rand.NewPCG(5, 6))
	clean := d.exposed(rng, 1.5)
	dirty := imaging.Frame{Width: clean.Width, Height: clean.Height, Pix: append([]float32(nil), clean.Pix...)}
	hot := at(0.4)
	dirty.Pix[(int(hot.y)+2)*dirty.Width+int(hot.x)] += 400
	spot := at(0.7)
	for y := -4; y <= 4; y++ {
		for x := -4; x <= 4; x++ {
			dirty.Pix[(int(spot.y)-12+y)*dirty.Width+int(spot.x)+x] += float32(150 * math.Exp(-float64(x*x+y*y)/(2*testSigmaPx*testSigmaPx)))
		}
	}
	a, okA := fitOf(testTracer(5, 1.5), clean)
	b, okB := fitOf(testTracer(5, 1.5), dirty)
	if !okA || !okB {
		t.Fatal("not found")
	}
	if ea, eb := interiorError(a, at), interiorError(b, at); !(eb < 1.3*ea+3) {
		t.Errorf("dirt moved the line: %.1f nm rms off, without it %.1f", eb, ea)
	}
}

// The derivatives that the normal equations are made of are those of the model's image.
func TestSlopesOfTheModel(t *testing.T) {
	at := sine(14.4, 20.3, 60.3, 0.08, 4, 0.8)
	d := newDrawing(90, 50, testSigmaPx, 8)
	d.line(at, 600*testPixelUm)
	back := imaging.NewFrame(90, 50)
	for i := range back.Pix {
		back.Pix[i] = 8
	}
	f := &fitter{camera: imaging.Camera{GainCounts: 1, ReadVariance: 1}, width: testWidthPx, knots: 4}
	var path []xy
	for i := 0; i <= 60; i++ {
		path = append(path, at(float64(i)/60))
	}
	if err := f.prepare(d.frame, back, nil, path, [2]float64{0, arcLengths(path)[60]}, false); err != nil {
		t.Fatal(err)
	}
	f.startLight()
	images := func() []float64 {
		f.place()
		f.accumulate(false, true)
		out := make([]float64, len(f.pixels))
		for i := range f.pixels {
			out[i] = f.pixels[i].model
		}
		return out
	}
	start := append([]float64(nil), f.parameters...)
	check := func(kind string, index int, step, tolerance float64) {
		t.Helper()
		// gradient = Σ w·slope·residual; with residual and weight of the start it must be that of finite differences.
		copy(f.parameters, start)
		images()
		got := f.gradient[index]
		var want float64
		weights := make([]float64, len(f.pixels))
		for i, p := range f.pixels {
			weights[i] = p.residual / f.camera.Variance(p.below+p.model)
		}
		f.parameters[index] = start[index] + step
		up := images()
		f.parameters[index] = start[index] - step
		down := images()
		for i := range up {
			want += (up[i] - down[i]) / (2 * step) * weights[i]
		}
		if !(math.Abs(got-want) < tolerance*math.Abs(want)+1e-6) {
			t.Errorf("%s: gradient %.6g, by differences %.6g", kind, got, want)
		}
	}
	for _, i := range []int{2, 5, 8} {
		start[f.shapeIdx[i]] = 0.3
		check("shape", f.shapeIdx[i], 1e-4, 1e-3)
	}
	check("light", f.lightIdx[2], 1e-3, 1e-3)
	check("smear", f.smearIdx[2], 1e-4, 1e-3)
	check("background", f.underIdx[1], 1e-3, 1e-3)
	// The end's slope is that of the continuous line, the model's that of nodes: they agree to a few per cent over a node.
	check("end", f.endsIdx[1], 0.5*(f.at[1]-f.at[0]), 0.1)
}
