package chain

import (
	"math"
	"math/rand/v2"
)

// relaxer moves one coordinate: an Ornstein–Uhlenbeck process of the given stationary
// variance and rate, free diffusion where the variance is +Inf, rest where it is 0.
type relaxer struct {
	variance, rate float64
	diffusion      float64 // variance × rate, kept for the free case
}

func newRelaxer(variance, diffusion float64) relaxer {
	return relaxer{variance: variance, rate: diffusion / variance, diffusion: diffusion}
}

// draw returns a stationary value, 0 for a free coordinate.
func (r relaxer) draw(rng *rand.Rand) float64 {
	if math.IsInf(r.variance, 1) {
		return 0
	}
	return math.Sqrt(r.variance) * rng.NormFloat64()
}

// transition is the exact joint law of a coordinate's end value and its mean over a step:
// end = e·x + p·g₁ and mean = a·x + q·g₁ + r·g₂ with g standard normal.
type transition struct{ e, a, p, q, r float64 }

// over returns r's transition over a step of dt (s). With α = dt·rate, e = e^{−α} and
// A = (1−e)/α the noises have variances v(1−e²) and v(S−A²) and covariance vαA².
func (r relaxer) over(dt float64) transition {
	if dt == 0 || r.variance == 0 {
		return transition{e: 1, a: 1}
	}
	if math.IsInf(r.variance, 1) {
		d := r.diffusion * dt
		return cholesky(1, 1, 2*d, d, 2*d/3)
	}
	alpha := dt * r.rate
	e, a := math.Exp(-alpha), -math.Expm1(-alpha)/alpha
	v := r.variance
	return cholesky(e, a, -v*math.Expm1(-2*alpha), v*alpha*a*a, v*meanNoise(alpha))
}

func cholesky(e, a, endVar, cov, meanVar float64) transition {
	p := math.Sqrt(endVar)
	q := cov / p
	return transition{e: e, a: a, p: p, q: q, r: math.Sqrt(math.Max(0, meanVar-q*q))}
}

// meanNoise returns S − A² = (2α−3+4e^{−α}−e^{−2α})/α² without its cancellation at small α.
func meanNoise(alpha float64) float64 {
	if alpha < 0.5 { // Σ_{j≥3} (4−2^j)(−1)^j α^{j−2}/j!
		sum, power, two, factorial := 0.0, -alpha, 8.0, 6.0
		for j := 3; j < 24; j++ {
			sum += (4 - two) * power / factorial
			power *= -alpha
			two *= 2
			factorial *= float64(j + 1)
		}
		return sum
	}
	e := math.Exp(-alpha)
	return (2*alpha - 3 + 4*e - e*e) / (alpha * alpha)
}

// rigid returns the relaxers of motion along and across the axis and of the orientation.
// A straight rod of drag ζ per length across and ζ/2 along has D⊥ = kT/(ζL), D∥ = 2D⊥ and
// D_r = 12kT/(ζL³).
func (c *Chain) rigid() (along, across, turn relaxer) {
	l := c.opts.LengthUm
	d := c.mobility / l
	wander, turnVar := c.opts.WanderUm*c.opts.WanderUm, c.opts.TurnRad*c.opts.TurnRad
	acrossVar := wander
	if c.tube > 0 {
		acrossVar, turnVar = 1/(c.tube*l), 12/(c.tube*l*l*l)
	}
	return newRelaxer(wander, 2*d), newRelaxer(acrossVar, d), newRelaxer(turnVar, 12*d/(l*l))
}

// Stepper advances states of one chain by one fixed time. It is not altered by use.
type Stepper struct {
	chain               *Chain
	modes               []transition
	along, across, turn transition
}

// Stepper returns a stepper of dt (s), 0 or more.
func (c *Chain) Stepper(dt float64) *Stepper {
	st := &Stepper{chain: c, modes: make([]transition, len(c.rate))}
	for i := range c.rate {
		st.modes[i] = relaxer{variance: c.variance[i], rate: c.rate[i]}.over(dt)
	}
	along, across, turn := c.rigid()
	st.along, st.across, st.turn = along.over(dt), across.over(dt), turn.over(dt)
	return st
}

// Step advances s by the stepper's time and, where mean is not nil, writes the mean of the
// state over that time to it, both from their exact joint law. The orientation's change
// within the step does not turn the directions of translation: keep steps well below the
// time in which the filament turns by a radian.
func (st *Stepper) Step(s, mean *State, rng *rand.Rand) {
	if mean != nil && len(mean.B) != len(s.B) {
		mean.B = make([]float64, len(s.B))
	}
	for i, tr := range st.modes {
		end, avg := tr.draw(s.B[i], rng)
		s.B[i] = end
		if mean != nil {
			mean.B[i] = avg
		}
	}
	home := st.chain.opts.Home
	axis := s.AngleRad
	if st.chain.tube > 0 {
		axis = home.AngleRad
	}
	sin, cos := math.Sincos(axis)
	dx, dy := s.XUm-home.XUm, s.YUm-home.YUm
	uEnd, uMean := st.along.draw(dx*cos+dy*sin, rng)
	wEnd, wMean := st.across.draw(dy*cos-dx*sin, rng)
	aEnd, aMean := st.turn.draw(s.AngleRad-home.AngleRad, rng)
	place := func(u, w, a float64) Pose {
		return Pose{home.XUm + u*cos - w*sin, home.YUm + u*sin + w*cos, home.AngleRad + a}
	}
	s.Pose = place(uEnd, wEnd, aEnd)
	if mean != nil {
		mean.Pose = place(uMean, wMean, aMean)
	}
}

// draw returns the value at the end of the step and the mean over it, from the value x at
// its start. It always takes two numbers from rng.
func (tr transition) draw(x float64, rng *rand.Rand) (end, mean float64) {
	g1, g2 := rng.NormFloat64(), rng.NormFloat64()
	return tr.e*x + tr.p*g1, tr.a*x + tr.q*g1 + tr.r*g2
}
