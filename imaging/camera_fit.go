package imaging

import (
	"math"
	"slices"
)

// NoiseSamples collects pairs of an expected count and a squared deviation from it.
type NoiseSamples struct {
	mean, square []float32
}

// Add adds a pixel that was expected at mean counts and deviated by the square root of square.
func (n *NoiseSamples) Add(mean, square float64) {
	n.mean = append(n.mean, float32(mean))
	n.square = append(n.square, float32(square))
}

// Len is the number of pixels.
func (n *NoiseSamples) Len() int { return len(n.mean) }

// What FitCamera writes into Camera.Source.
const (
	CameraFromStack      = "variance against brightness in the stack"
	CameraFromBackground = "background noise, taken as shot noise"
	CameraGiven          = "given"
)

// FitCamera fits the straight line variance = a + gain·counts (the photon transfer curve) to
// samples, by weighted least squares over classes of equal size. gain and offset that are not NaN
// are kept. The level without light is where the variance would vanish, unless offset is given:
// read noise then counts as light, which changes no error, only the background's photons. Too few
// samples, or a line that does not rise, leave the background's own noise, taken as shot noise
// above an offset of zero.
func FitCamera(s NoiseSamples, gain, offset, backgroundCounts, backgroundNoise float64) Camera {
	a, g, ok := photonTransfer(s)
	v := max(backgroundNoise*backgroundNoise, 1.0/12)
	source := CameraFromStack
	switch {
	case ok && !math.IsNaN(gain):
		// The line keeps its height where most pixels are, at the background.
		a += (g - gain) * backgroundCounts
		g, source = gain, CameraGiven
	case ok:
	case !math.IsNaN(gain):
		g, source = gain, CameraGiven
		a = v - g*backgroundCounts
	default:
		source = CameraFromBackground
		g = v / max(backgroundCounts, 1)
		if !math.IsNaN(offset) && backgroundCounts > offset {
			g = v / (backgroundCounts - offset)
		}
		a = v - g*backgroundCounts
	}
	c := Camera{GainCounts: g, OffsetCounts: -a / g, Source: source}
	if !math.IsNaN(offset) {
		c.OffsetCounts = offset
		c.ReadVariance = max(a+g*offset, 0)
	}
	return c
}

// photonTransfer fits variance = a + g·mean.
func photonTransfer(s NoiseSamples) (a, g float64, ok bool) {
	const classes, least = 24, 2000
	n := s.Len()
	if n < least {
		return 0, 0, false
	}
	order := make([]int32, n)
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(i, j int32) int {
		switch {
		case s.mean[i] < s.mean[j]:
			return -1
		case s.mean[i] > s.mean[j]:
			return 1
		}
		return int(i - j)
	})
	// Classes are of equal width in brightness above the darkest tenth, so that the rare bright
	// pixels count as what they are: the lever arm of the line.
	lo, hi := float64(s.mean[order[n/10]]), float64(s.mean[order[n-1-n/500]])
	if !(hi > lo) {
		return 0, 0, false
	}
	var sumMean, sumSquare, count [classes]float64
	for _, i := range order {
		k := int(float64(classes) * (float64(s.mean[i]) - lo) / (hi - lo))
		if k = max(k, 0); k >= classes {
			continue
		}
		sumMean[k] += float64(s.mean[i])
		sumSquare[k] += float64(s.square[i])
		count[k]++
	}
	// The variance of a class's mean square is 2v²/count; v from the line of the round before.
	for round := range 6 {
		var w0, w1, w2, y0, y1 float64
		for k := range count {
			if count[k] < 30 {
				continue
			}
			m, v := sumMean[k]/count[k], sumSquare[k]/count[k]
			expected := v
			if round > 0 {
				expected = max(a+g*m, 0.05*v)
			}
			w := count[k] / (2 * expected * expected)
			w0 += w
			w1 += w * m
			w2 += w * m * m
			y0 += w * v
			y1 += w * m * v
		}
		det := w0*w2 - w1*w1
		if !(det > 0) {
			return 0, 0, false
		}
		g = (w0*y1 - w1*y0) / det
		a = (w2*y0 - w1*y1) / det
		if round == 5 {
			// A slope within three standard errors of nothing says nothing.
			return a, g, g > 3*math.Sqrt(w0/det)
		}
	}
	return 0, 0, false
}
