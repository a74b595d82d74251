package imaging

import (
	"math"
	"slices"
)

// ProcessedAbove is the [NoiseCorrelation] above which images are not as the camera took them: raw frames stay within a few hundredths of 0, the
// mildest smoothing that matters, a Gaussian of half a pixel, has 0.2.
const ProcessedAbove = 0.08

// NoiseCorrelation returns by how much the noise of next neighbours is more alike than that of pixels three apart, as a correlation, from the difference of two frames that
// follow one another: 0 for raw camera frames, where every pixel's noise is its own, whatever the light; well above 0 where images were denoised, resampled, registered
// to a fraction of a pixel, deconvolved or compressed with loss. What differs between the frames for other reasons, moving light, flicker, a row of the
// camera that is brighter as a whole, is as alike three pixels apart. Pixels at and near lines and spots, and those that changed by more than the noise, are left out. NaN where there is no noise to be seen:
// frames of different shape, too small, or mostly equal.
func NoiseCorrelation(a, b Frame) float64 {
	if a.Width != b.Width || a.Height != b.Height || a.Width < 16 || a.Height < 16 {
		return math.NaN()
	}
	n := len(a.Pix)
	lines := bright(a, b)
	d := make([]float32, n)
	size := make([]float32, 0, n)
	zeros := 0
	for i := range d {
		d[i] = b.Pix[i] - a.Pix[i]
		if d[i] == 0 {
			zeros++
		}
		if lines[i] {
			d[i] = float32(math.NaN())
			continue
		}
		if d[i]-d[i] == 0 {
			size = append(size, float32(math.Abs(float64(d[i]))))
		}
	}
	if zeros > n/2 || len(size) < n/8 {
		return math.NaN()
	}
	sd := 1.4826 * float64(selectRank(size, len(size)/2))
	if !(sd > 0) {
		return math.NaN()
	}
	// Flicker moves all pixels.
	middle := float64(selectRank(slices.DeleteFunc(slices.Clone(d), func(v float32) bool { return v-v != 0 }), len(size)/2))
	const far = 3.5
	ok := func(v float32) bool { return math.Abs(float64(v)-middle) < far*sd }
	alike := func(step int) float64 {
		sum, square, pairs := 0.0, 0.0, 0
		for y := range a.Height {
			for x := range a.Width {
				i := y*a.Width + x
				if !ok(d[i]) {
					continue
				}
				u := float64(d[i]) - middle
				if x+step < a.Width && ok(d[i+step]) {
					v := float64(d[i+step]) - middle
					sum, square, pairs = sum+u*v, square+(u*u+v*v)/2, pairs+1
				}
				if j := i + step*a.Width; y+step < a.Height && ok(d[j]) {
					v := float64(d[j]) - middle
					sum, square, pairs = sum+u*v, square+(u*u+v*v)/2, pairs+1
				}
			}
		}
		if pairs < 100 || !(square > 0) {
			return math.NaN()
		}
		return sum / square
	}
	return alike(1) - alike(3)
}

// bright marks the pixels within three of one that, with its neighbours, is brighter than the background by three standard deviations in the sum of two frames: sum and
// difference of equal noise are independent, so that the choice leaves the difference as it was. The standard deviation is that of the means of nine themselves.
func bright(a, b Frame) []bool {
	const block, near, far = 32, 3, 3
	sum := NewFrame(a.Width, a.Height)
	for i := range sum.Pix {
		sum.Pix[i] = a.Pix[i] + b.Pix[i]
	}
	var bg Frame
	EstimateBackground(sum, block, &bg)
	mean := NewFrame(a.Width, a.Height)
	size := make([]float32, 0, len(mean.Pix))
	for y := 1; y < a.Height-1; y++ {
		for x := 1; x < a.Width-1; x++ {
			m := float32(0)
			for v := y - 1; v <= y+1; v++ {
				for u := x - 1; u <= x+1; u++ {
					m += (sum.At(u, v) - bg.At(u, v)) / 9
				}
			}
			mean.Pix[y*a.Width+x] = m
			size = append(size, float32(math.Abs(float64(m))))
		}
	}
	limit := far * 1.4826 * selectRank(size, len(size)/2)
	out := make([]bool, len(sum.Pix))
	for y := 1; y < a.Height-1; y++ {
		for x := 1; x < a.Width-1; x++ {
			if mean.At(x, y) > limit {
				for v := max(0, y-near); v <= min(a.Height-1, y+near); v++ {
					for u := max(0, x-near); u <= min(a.Width-1, x+near); u++ {
						out[v*a.Width+u] = true
					}
				}
			}
		}
	}
	return out
}
