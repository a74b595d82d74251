package synth

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
)

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol) {
		t.Errorf("%s = %.10g, want %.10g within %.2g", what, got, want, tol)
	}
}

var optics = Optics{PixelUm: 0.107, PSFUm: 0.131}

func sum(im *Image) float64 {
	total := 0.0
	for _, v := range im.Pix {
		total += v
	}
	return total
}

func TestCumulative(t *testing.T) {
	for z := -9.0; z < 9; z += 0.00737 {
		near(t, "Φ", cumulative(z), math.Erfc(-z/math.Sqrt2)/2, 2e-10)
	}
}

func TestLineTotalPhotons(t *testing.T) {
	var im Image
	im.Reset(140, 90, 0)
	c := Sinusoid(2.013, 4.04, 9.7, 0.8, 6, 0.11)
	optics.AddLine(&im, c, 713, nil)
	// Each axis loses what lies beyond 5σ, 2Φ(−5) = 5.7e-7.
	near(t, "photons", sum(&im)/(713*c.Length()), 1, 2e-6)
	im.Reset(140, 90, 0)
	optics.AddLine(&im, c, 713, []float64{2, 0, 1, 3})
	near(t, "labelled photons", sum(&im)/(713*c.Length()), 1.5, 0.01)
	im.Reset(140, 90, 0)
	optics.AddPoint(&im, 3.3, 4.4, 1000)
	near(t, "point", sum(&im), 1000, 2e-3)
}

// Across a straight oblique line the noiseless image has its centroid on the line, and a
// variance of σ² plus a pixel's own, a²/12, along each axis.
func TestLineProfileAcross(t *testing.T) {
	for _, angle := range []float64{0, 0.3, 0.9, math.Pi / 2} {
		var im Image
		im.Reset(160, 170, 0)
		sin, cos := math.Sincos(angle)
		x0, y0 := 8.0137, 8.5291
		half := 5.5
		c := Curve{X: []float64{x0 - half*cos, x0 + half*cos}, Y: []float64{y0 - half*sin, y0 + half*sin}}
		optics.AddLine(&im, c, 1000, nil)
		var w, first, second float64
		for j := range im.Height {
			for i := range im.Width {
				dx, dy := float64(i)*optics.PixelUm-x0, float64(j)*optics.PixelUm-y0
				across := dy*cos - dx*sin
				v := im.Pix[j*im.Width+i]
				w += v
				first += v * across
				second += v * across * across
			}
		}
		near(t, "centroid across (µm)", first/w, 0, 1e-6)
		want := optics.PSFUm*optics.PSFUm + optics.PixelUm*optics.PixelUm/12
		near(t, "variance across (µm²)", second/w/want, 1, 2e-4)
	}
	// And the middle of a horizontal line is the closed form: pixel-integrated Gaussian across,
	// constant along.
	var im Image
	im.Reset(160, 60, 0)
	y := 3.177
	optics.AddLine(&im, Curve{X: []float64{2, 15}, Y: []float64{y, y}}, 1000, nil)
	for j := 20; j < 40; j++ {
		r := math.Sqrt2 * optics.PSFUm
		top, bottom := (float64(j)-0.5)*optics.PixelUm-y, (float64(j)+0.5)*optics.PixelUm-y
		want := 1000 * optics.PixelUm * (math.Erf(bottom/r) - math.Erf(top/r)) / 2
		near(t, "pixel", im.Pix[j*160+80], want, 1e-4)
	}
}

func TestLineLeavesTheImage(t *testing.T) {
	var im Image
	im.Reset(40, 30, 0)
	// Cut in half by the left edge, x = −½ pixel, and two lines wholly outside.
	x := -optics.PixelUm / 2
	optics.AddLine(&im, Curve{X: []float64{x - 2, x + 2}, Y: []float64{1.5, 1.5}}, 100, nil)
	near(t, "half", sum(&im), 200, 1e-3)
	optics.AddLine(&im, Curve{X: []float64{50, 60}, Y: []float64{1, 1}}, 100, nil)
	optics.AddLine(&im, Curve{X: []float64{1, 2}, Y: []float64{-9, -5}}, 100, nil)
	near(t, "half", sum(&im), 200, 1e-3)
}

func TestSceneAddsUp(t *testing.T) {
	s := Scene{Width: 120, Height: 80, Optics: optics, BackgroundPerPx: 7, Uneven: 0.6,
		Spots: []Spot{{4, 4, 500}}, HotPixels: []HotPixel{{3, 70, 90}}}
	line := Line{PhotonsPerUm: 200, Curves: []Curve{
		{X: []float64{2, 10}, Y: []float64{3, 3}}, {X: []float64{2, 10}, Y: []float64{5, 5}}, {X: []float64{2, 10}, Y: []float64{5, 6}}}}
	var im Image
	s.Expect([]Line{line}, 0.5, &im)
	length := (8 + 8 + math.Sqrt(65)) / 3
	near(t, "photons", sum(&im), 7*120*80+0.5*(200*length+500)+90, 2+1e-4*7*120*80)
	s.Expect(nil, 0, &im)
	low, high := math.Inf(1), math.Inf(-1)
	for i, v := range im.Pix {
		if i != 70*120+3 {
			low, high = math.Min(low, v), math.Max(high, v)
		}
	}
	if !(low >= 7*0.4 && low < 7*0.75 && high <= 7*1.6 && high > 7*1.15) {
		t.Errorf("background from %.2f to %.2f, want clearly uneven within 2.8 to 11.2", low, high)
	}
}

func TestPoissonMoments(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 3))
	for _, mean := range []float64{0.05, 1.3, 9.9, 10, 14.2, 61, 4000} {
		const n = 60000
		var s1, s2, s3 float64
		zero := 0
		for range n {
			k := Poisson(mean, rng)
			if k == 0 {
				zero++
			}
			d := k - mean
			s1, s2, s3 = s1+d, s2+d*d, s3+d*d*d
		}
		// Fourth central moment 3μ²+μ; sixth about 15μ³ (+25μ²+μ).
		near(t, "mean", s1/n, 0, 4.5*math.Sqrt(mean/n))
		near(t, "variance", s2/n, mean, 4.5*math.Sqrt((2*mean*mean+mean)/n))
		near(t, "third moment", s3/n, mean, 4.5*math.Sqrt((15*mean*mean*mean+25*mean*mean+mean)/n))
		p := math.Exp(-mean)
		near(t, "P(0)", float64(zero)/n, p, 4.5*math.Sqrt(p*(1-p)/n)+1e-12)
	}
	if Poisson(0, rng) != 0 || Poisson(math.NaN(), rng) != 0 || Poisson(-3, rng) != 0 {
		t.Error("a mean not above 0 must give 0")
	}
}

// The distribution itself against its probabilities, over both samplers: χ² within 4.5
// standard deviations of its degrees of freedom.
func TestPoissonDistribution(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 3))
	for _, mean := range []float64{3, 12, 40} {
		const n = 100000
		seen := make([]float64, 200)
		for range n {
			seen[int(Poisson(mean, rng))]++
		}
		chi2, cells, p := 0.0, 0.0, math.Exp(-mean)
		for k := range seen {
			if want := n * p; want > 20 {
				chi2 += (seen[k] - want) * (seen[k] - want) / want
				cells++
			}
			p *= mean / float64(k+1)
		}
		near(t, "χ²", chi2, cells, 4.5*math.Sqrt(2*cells))
	}
}

func TestCameraNoise(t *testing.T) {
	cam := Camera{Gain: 2.3, Offset: 100, ReadNoiseE: 1.7}
	rng := rand.New(rand.NewPCG(4, 4))
	var im Image
	var f imaging.Frame
	var means, variances []float64
	for _, photons := range []float64{0, 20, 300} {
		im.Reset(200, 150, photons)
		cam.Expose(&im, rng, &f)
		n := float64(len(f.Pix))
		var s1, s2 float64
		for _, v := range f.Pix {
			s1 += float64(v)
			s2 += float64(v) * float64(v)
		}
		mean := s1 / n
		variance := s2/n - mean*mean
		near(t, "mean", mean, 100+2.3*photons, 4*math.Sqrt(variance/n))
		near(t, "variance/model", variance/cam.Model().Variance(100+2.3*photons), 1, 4*math.Sqrt(2/n))
		means, variances = append(means, mean), append(variances, variance)
	}
	// The slope of variance on mean is the gain.
	near(t, "gain", (variances[2]-variances[1])/(means[2]-means[1]), 2.3, 4*2.3*math.Sqrt(2/30000.0)*1.1)
	im.Reset(10, 10, 1e6)
	cam.Expose(&im, rng, &f)
	if f.Pix[5] != MaxCount {
		t.Errorf("saturated pixel %g, want %d", f.Pix[5], MaxCount)
	}
}

func TestSpottyLabels(t *testing.T) {
	labels := SpottyLabels(200, 30, 0.05, rand.New(rand.NewPCG(1, 2)))
	if len(labels) != 4000 {
		t.Fatalf("%d parts, want 4000", len(labels))
	}
	var s1, s2 float64
	for _, l := range labels {
		s1 += l / 4000
		s2 += (l - 1) * (l - 1) / 4000
	}
	near(t, "mean", s1, 1, 4*math.Sqrt(1/1.5/4000))
	near(t, "variance", s2, 1/1.5, 4*(1/1.5)*math.Sqrt((2+1/1.5)/4000))
}

func BenchmarkExpect(b *testing.B) { // a 12 µm filament, 16 sub-steps
	s := Scene{Width: 256, Height: 200, Optics: optics, BackgroundPerPx: 10}
	line := Line{PhotonsPerUm: 500}
	for range 16 {
		line.Curves = append(line.Curves, Sinusoid(4, 10, 12, 0.5, 8, 0.2))
	}
	var im Image
	for b.Loop() {
		s.Expect([]Line{line}, 1, &im)
	}
}

func BenchmarkExpose(b *testing.B) {
	var im Image
	im.Reset(256, 200, 30)
	var f imaging.Frame
	rng := rand.New(rand.NewPCG(4, 4))
	for b.Loop() {
		Camera{Gain: 2, Offset: 100, ReadNoiseE: 1.5}.Expose(&im, rng, &f)
	}
}
