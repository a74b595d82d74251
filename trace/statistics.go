package trace

import (
	"math"
	"slices"
)

// median returns the middle of the values that are numbers, NaN if there are none. v is left as it was.
func median(v []float64) float64 { return quantile(v, 0.5) }

// quantile returns the p-quantile of the values that are numbers, by linear interpolation.
func quantile(v []float64, p float64) float64 {
	s := make([]float64, 0, len(v))
	for _, x := range v {
		if !math.IsNaN(x) {
			s = append(s, x)
		}
	}
	if len(s) == 0 {
		return math.NaN()
	}
	slices.Sort(s)
	at := p * float64(len(s)-1)
	k := min(int(at), len(s)-1)
	if k == len(s)-1 {
		return s[k]
	}
	return s[k] + (at-float64(k))*(s[k+1]-s[k])
}

// spread returns the standard deviation that a Gaussian with the same median absolute deviation has.
func spread(v []float64) float64 {
	m := median(v)
	d := make([]float64, len(v))
	for i, x := range v {
		d[i] = math.Abs(x - m)
	}
	return 1.4826 * median(d)
}
