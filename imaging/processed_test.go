package imaging_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
)

// rawPair is two frames of noise of the given photons a pixel, with read noise, as whole counts, under a filament that moves by a pixel.
func rawPair(photons float64, rng *rand.Rand) [2]imaging.Frame {
	var out [2]imaging.Frame
	for k := range out {
		f := imaging.NewFrame(140, 111)
		for y := range f.Height {
			row := rng.NormFloat64() // the camera's row
			for x := range f.Width {
				line := 5 * photons * math.Exp(-math.Pow(float64(y)-50-float64(k)-float64(x)/9, 2)/4)
				mean := photons*(1+0.3*math.Sin(float64(x)/40)) + line
				f.Pix[y*f.Width+x] = float32(math.Round(100 + 2*(mean+math.Sqrt(mean+2)*rng.NormFloat64()+0.1*row)))
			}
		}
		out[k] = f
	}
	return out
}

// mixed weighs every pixel with its neighbours: weights by offset.
func mixed(f imaging.Frame, weights map[[2]int]float64) imaging.Frame {
	out := imaging.NewFrame(f.Width, f.Height)
	for y := range f.Height {
		for x := range f.Width {
			s := 0.0
			for o, w := range weights {
				u, v := min(max(x+o[0], 0), f.Width-1), min(max(y+o[1], 0), f.Height-1)
				s += w * float64(f.At(u, v))
			}
			out.Pix[y*f.Width+x] = float32(math.Round(s))
		}
	}
	return out
}

func gaussian(sigma float64) map[[2]int]float64 {
	w, sum := map[[2]int]float64{}, 0.0
	for y := -4; y <= 4; y++ {
		for x := -4; x <= 4; x++ {
			v := math.Exp(-float64(x*x+y*y) / (2 * sigma * sigma))
			w[[2]int{x, y}] = v
			sum += v
		}
	}
	for k := range w {
		w[k] /= sum
	}
	return w
}

// Raw frames pass at any light, with uneven light, rows and a moving line; smoothed and shifted ones do not. The correlation of neighbours under weights w is Σw(k)w(k+1)/Σw².
func TestNoiseCorrelation(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, photons := range []float64{1, 8, 100, 3000} {
		for range 60 {
			p := rawPair(photons, rng)
			if r := imaging.NoiseCorrelation(p[0], p[1]); !(math.Abs(r) < imaging.ProcessedAbove) {
				t.Errorf("raw, %g photons: %.3f", photons, r)
			}
		}
	}
	half := map[[2]int]float64{{0, 0}: 0.25, {1, 0}: 0.25, {0, 1}: 0.25, {1, 1}: 0.25}
	quarter := map[[2]int]float64{{0, 0}: 0.75, {1, 0}: 0.25}
	for _, tc := range []struct {
		name    string
		weights map[[2]int]float64
		want    float64
	}{{"Gaussian of half a pixel", gaussian(0.5), 0.26}, {"Gaussian of a pixel", gaussian(1), 0.67}, {"shift by half a pixel", half, 0.5}, {"shift by a quarter in x", quarter, 0.15}} {
		p := rawPair(100, rng)
		r := imaging.NoiseCorrelation(mixed(p[0], tc.weights), mixed(p[1], tc.weights))
		if !(r > imaging.ProcessedAbove) || !(math.Abs(r-tc.want) < 0.12) {
			t.Errorf("%s: %.3f, want about %.2f", tc.name, r, tc.want)
		}
	}
	// Two by two pixels put together are as good as a camera's.
	p := rawPair(100, rng)
	var binned [2]imaging.Frame
	for k := range p {
		f := imaging.NewFrame(p[k].Width/2, p[k].Height/2)
		for y := range f.Height {
			for x := range f.Width {
				f.Pix[y*f.Width+x] = (p[k].At(2*x, 2*y) + p[k].At(2*x+1, 2*y) + p[k].At(2*x, 2*y+1) + p[k].At(2*x+1, 2*y+1)) / 4
			}
		}
		binned[k] = f
	}
	if r := imaging.NoiseCorrelation(binned[0], binned[1]); !(math.Abs(r) < imaging.ProcessedAbove) {
		t.Errorf("binned: %.3f", r)
	}
	if r := imaging.NoiseCorrelation(p[0], p[0]); !math.IsNaN(r) {
		t.Errorf("equal frames: %g, want NaN", r)
	}
}
