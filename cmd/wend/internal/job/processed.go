package job

import (
	"math"

	"wend/imaging"
	"wend/trace"
)

// noiseCorrelation is the median over a few pairs of frames, spread over the movie, of how much the noise of neighbouring pixels is alike. NaN for fewer than two frames.
func noiseCorrelation(src trace.Source, first, last int) (float64, error) {
	const pairs = 7
	n := min(pairs, last-first)
	var all []float64
	var a, b imaging.Frame
	for i := range n {
		t := first
		if n > 1 {
			t += i * (last - 1 - first) / (n - 1)
		}
		if err := src.ReadFrame(t, &a); err != nil {
			return math.NaN(), err
		}
		if err := src.ReadFrame(t+1, &b); err != nil {
			return math.NaN(), err
		}
		all = append(all, imaging.NoiseCorrelation(a, b))
	}
	return median(all), nil
}
