package modes

import (
	"math"

	"wend/modes/chain"
	"wend/modes/likelihood"
)

// IndependentShapes returns the effective number of independent shapes in frames at timesS (s, ascending) of a mode with
// relaxation time relaxationS: 2/Var(ln variance) at the Cramér–Rao bound, without noise, for known drag and unknown mean. It is between 0 and
// the number of frames less one. The process is Markov, so the information is a sum over steps and exact for any gaps: with φ =
// exp(-Δ/τ), a = Δ/τ and τ proportional to the variance, a step gives ½(1-2φ²a/(1-φ²))² + φ²a²/(1-φ²).
func IndependentShapes(timesS []float64, relaxationS float64) float64 {
	if len(timesS) < 2 || !(relaxationS >= 0) {
		return 0
	}
	information := 0.5
	for i := 1; i < len(timesS); i++ {
		a := (timesS[i] - timesS[i-1]) / relaxationS
		if a > 300 {
			information += 0.5
			continue
		}
		r := 2 * a / math.Expm1(2*a) // 2aφ²/(1-φ²)
		if a == 0 {
			r = 1
		}
		information += 0.5*(1-r)*(1-r) + a*r/2
	}
	return math.Min(math.Max(0, 2*information-1), float64(len(timesS)-1))
}

// mixture is a quantity that is a sum of independent modes: weight[m] times the square of a mode of unit variance and relaxation
// time relaxation[m], s, seen over an exposure, plus noise of variance noise in every frame.
type mixture struct {
	frames     likelihood.Frames
	weight     []float64
	relaxation []float64
	noise      float64
}

// pairSum returns Σ over all pairs of frames of exp(-rate·dead), dead being the time between the end of one exposure and
// the start of the other.
func pairSum(f likelihood.Frames, rate float64) float64 {
	sum, b := 0.0, 0.0
	for i := 1; i < len(f.TimesS); i++ {
		gap := f.TimesS[i] - f.TimesS[i-1]
		b = b*math.Exp(-rate*gap) + math.Exp(-rate*math.Max(0, gap-f.ExposureS))
		sum += b
	}
	return sum
}

// signal returns the variance of a frame without noise, and the expected part of it that is left about the mean over the frames.
func (m mixture) signal() (variance, aboutMean float64) {
	n := float64(len(m.frames.TimesS))
	for i, w := range m.weight {
		c0 := chain.BlurFactor(m.frames.ExposureS / m.relaxation[i])
		mean := (n*c0 + 2*m.averaged(i)*pairSum(m.frames, 1/m.relaxation[i])) / (n * n)
		variance += w * c0
		aboutMean += w * math.Max(0, c0-mean)
	}
	return variance, aboutMean
}

// varianceShapes returns how many independent values have a variance as well known as this mixture's: (ΣC₀)²/ΣΣC² over the frames,
// noise included in C₀. At least 1, at most the number of frames.
func (m mixture) varianceShapes() float64 {
	n := float64(len(m.frames.TimesS))
	c0, _ := m.signal()
	c0 += m.noise
	total := 0.0
	for _, w := range m.weight {
		total += w
	}
	pairs := 0.0
	for i, wi := range m.weight {
		if wi < 0.01*total {
			continue
		}
		for j, wj := range m.weight {
			if wj < 0.01*total {
				continue
			}
			ai := m.averaged(i)
			aj := m.averaged(j)
			pairs += wi * wj * ai * aj * pairSum(m.frames, 1/m.relaxation[i]+1/m.relaxation[j])
		}
	}
	if !(c0 > 0) {
		return n
	}
	return math.Min(n, math.Max(1, n*n*c0*c0/(n*c0*c0+2*pairs)))
}

// averaged returns ((1-exp(-α))/α)², the covariance of two exposures of component i without dead time between them.
func (m mixture) averaged(i int) float64 {
	alpha := m.frames.ExposureS / m.relaxation[i]
	if alpha < 1e-12 {
		return 1
	}
	a := -math.Expm1(-alpha) / alpha
	return a * a
}
