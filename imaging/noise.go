package imaging

import (
	"math"
	"slices"
)

// noisePairs is about how many pairs of pixels NoiseStd looks at.
const noisePairs = 32_000

// NoiseStd returns the standard deviation (counts) of the pixel noise of the background of f, taken
// as white, bg being the background from [EstimateBackground]. It comes from differences of
// neighbouring pixels, so that smooth structure does not count, of the darker half of all pairs, so that
// filaments do not: sum and difference of two pixels of equal noise are independent, so the choice by the
// sum leaves the difference as it was. Where the noise of neighbours is correlated (denoised or
// resampled images) the result is too low. NaN if f has no two finite neighbours; frames of
// different shape panic.
func NoiseStd(f, bg Frame) float64 {
	if f.Width != bg.Width || f.Height != bg.Height || len(f.Pix) != len(bg.Pix) || len(f.Pix) != f.Width*f.Height {
		panic("imaging: NoiseStd: frame and background of different shape")
	}
	if f.Width < 2 || f.Height < 1 {
		return math.NaN()
	}
	step := max(1, len(f.Pix)/noisePairs) | 1
	sums, diffs := make([]float32, 0, len(f.Pix)/step+1), make([]float32, 0, len(f.Pix)/step+1)
	for i := 0; i+1 < len(f.Pix); i += step {
		if i%f.Width == f.Width-1 { // its neighbour is in the next row
			continue
		}
		a, b := f.Pix[i]-bg.Pix[i], f.Pix[i+1]-bg.Pix[i+1]
		if d := a - b; d-d == 0 { // finite
			sums, diffs = append(sums, a+b), append(diffs, d)
		}
	}
	if len(sums) == 0 {
		return math.NaN()
	}
	middle := selectRank(slices.Clone(sums), len(sums)/2)
	n := 0
	for i, s := range sums {
		if s <= middle {
			diffs[n] = float32(math.Abs(float64(diffs[i])))
			n++
		}
	}
	diffs = diffs[:n]
	// A start from the median, then the root mean square of what lies within three standard
	// deviations, made good for what the cut removes from a Gaussian. Unlike the
	// median it does not jump where counts are coarse.
	kept := 1 - 6*math.Exp(-4.5)/math.Sqrt(2*math.Pi)/math.Erf(3/math.Sqrt2)
	sd := 1.4826 * float64(selectRank(slices.Clone(diffs), len(diffs)/2))
	if sd == 0 {
		sd = math.Inf(1)
	}
	for range 5 {
		sum, count := 0.0, 0
		for _, d := range diffs {
			if v := float64(d); v <= 3*sd {
				sum += v * v
				count++
			}
		}
		rms := math.Sqrt(sum / float64(count))
		if !math.IsInf(sd, 1) {
			rms /= math.Sqrt(kept)
		}
		sd = rms
	}
	return sd / math.Sqrt2
}

// selectRank returns the value of v, which must not be empty, that has k smaller or equal ones before it when
// sorted, and reorders v so that it stands at k, none before it larger and none after it smaller.
func selectRank(v []float32, k int) float32 {
	lo, hi := 0, len(v)-1
	for lo < hi {
		pivot := max(min(v[lo], v[hi]), min(max(v[lo], v[hi]), v[(lo+hi)/2]))
		i, j := lo, hi
		for i <= j {
			for v[i] < pivot {
				i++
			}
			for v[j] > pivot {
				j--
			}
			if i <= j {
				v[i], v[j] = v[j], v[i]
				i++
				j--
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return v[k]
		}
	}
	return v[k]
}
