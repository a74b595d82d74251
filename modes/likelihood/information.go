package likelihood

import (
	"math"
	"math/rand/v2"
)

// CramerRaoSD returns the least standard deviation that an unbiased estimate of ln Lp can have from movies like d, for the given truth, with the drag, the
// noise scale and the intrinsic shape unknown: from the curvature of the restricted log-likelihood at the truth, its mean over
// draws of the amplitudes. d's own amplitudes are not used. +Inf where the data tell nothing.
func CramerRaoSD(d Data, lpUm, dragPaS float64, draws int, rng *rand.Rand) float64 {
	truth := vector{paramLp: math.Log(lpUm), paramDrag: math.Log(dragPaS)}
	free := [params]bool{paramLp: true, paramDrag: true, paramNoise: true}
	var sum [params][params]float64
	for range draws {
		drawn := d
		drawn.Tracks = nil
		for _, t := range d.Tracks {
			p := ModeProcess(t.WavenumberPerUm, lpUm, dragPaS, d.TemperatureK)
			t.Amplitude = Simulate(p, d.Frames, rng)
			motion := d.MotionNoise * Hidden(p, d.ExposureS)
			for i, r := range t.NoiseVariance {
				t.Amplitude[i] += math.Sqrt(r+motion) * rng.NormFloat64()
			}
			drawn.Tracks = append(drawn.Tracks, t)
		}
		m := newModel(drawn, Options{NoiseScaleSD: math.Inf(1)})
		_, h := slopes(m.value, truth, m.value(truth), free)
		for i := range h {
			for j := range h {
				sum[i][j] += h[i][j] / float64(draws)
			}
		}
	}
	// What the data do not tell at all would make the matrix singular: known to a factor e^5 it does no harm.
	for _, i := range []int{paramDrag, paramNoise} {
		sum[i][i] -= 1. / 25
	}
	return widths(sum, free)[paramLp]
}
