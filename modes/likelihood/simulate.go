package likelihood

import (
	"math"
	"math/rand/v2"
)

// Simulate draws the frame means of p, one per frame of f, without noise and about mean 0. The draw is exact for any
// exposure and any gap.
func Simulate(p Process, f Frames, rng *rand.Rand) []float64 {
	ex := newExposure(f.ExposureS / p.RelaxationS)
	sd := math.Sqrt(p.Variance)
	// Cholesky factor of the covariance of (w1, w2).
	l11 := math.Sqrt(ex.varEnd)
	l21, l22 := 0.0, 0.0
	if l11 > 0 {
		l21 = ex.cov / l11
		l22 = math.Sqrt(math.Max(0, ex.varMean-l21*l21))
	}
	y := make([]float64, len(f.TimesS))
	x := rng.NormFloat64()
	for i := range y {
		if i > 0 {
			dead := math.Max(0, f.TimesS[i]-f.TimesS[i-1]-f.ExposureS)
			c := math.Exp(-dead / p.RelaxationS)
			x = c*x + math.Sqrt(-math.Expm1(-2*dead/p.RelaxationS))*rng.NormFloat64()
		}
		z1, z2 := rng.NormFloat64(), rng.NormFloat64()
		y[i] = sd * (ex.averaged*x + l21*z1 + l22*z2)
		x = ex.decay*x + l11*z1
	}
	return y
}
