package likelihood

import "math"

// Process is a stationary Ornstein-Uhlenbeck process: Variance in the amplitude's unit squared,
// RelaxationS in s.
type Process struct {
	Variance, RelaxationS float64
}

// exposure holds what an exposure of T/τ = α does to a process of unit variance that starts it at x0:
// x at its end is decay·x0 + w1 and the mean over it averaged·x0 + w2.
type exposure struct {
	decay    float64 // exp(-α)
	averaged float64 // A = (1-exp(-α))/α
	varEnd   float64 // var w1 = 1-exp(-2α)
	cov      float64 // cov(w1, w2) = α·A²
	varMean  float64 // var w2 = S(α)-A²
}

// newExposure covers α = 0, an instantaneous frame, to any length. For small α the differences
// cancel and series take over.
func newExposure(alpha float64) exposure {
	if alpha <= 0 {
		return exposure{decay: 1, averaged: 1}
	}
	e := math.Exp(-alpha)
	x := exposure{decay: e, averaged: -math.Expm1(-alpha) / alpha, varEnd: -math.Expm1(-2 * alpha)}
	x.cov = alpha * x.averaged * x.averaged
	if alpha < 2e-2 {
		// (2α-3+4e-e²)/α² expanded: the terms are (-1)^j (4-2^j)/j! α^(j-2), j ≥ 3.
		x.varMean = alpha * (2./3 - alpha*(1./2-alpha*(7./30-alpha*(1./12-alpha*31./1260))))
	} else {
		x.varMean = (2*alpha - 3 + 4*e - e*e) / (alpha * alpha)
	}
	return x
}

// Covariance returns the covariance of the frame means of p, noise excluded, for two frames whose
// exposures of exposureS start lagS apart. lagS is 0 or at least exposureS.
func Covariance(p Process, exposureS, lagS float64) float64 {
	x := newExposure(exposureS / p.RelaxationS)
	if lagS == 0 {
		return p.Variance * (x.varMean + x.averaged*x.averaged)
	}
	dead := math.Max(0, math.Abs(lagS)-exposureS)
	return p.Variance * math.Exp(-dead/p.RelaxationS) * x.averaged * x.averaged
}

// Hidden returns how much of the variance of p the mean over an exposure does not show.
func Hidden(p Process, exposureS float64) float64 {
	return p.Variance - Covariance(p, exposureS, 0)
}

// Frames is when and how long the camera looked: the start of every frame's exposure, s, ascending, and the
// exposure of each, s, which may be 0 and should not exceed any difference of times.
type Frames struct {
	TimesS    []float64
	ExposureS float64
}

// LogLikelihood returns the log density of the amplitudes y, one per frame, for the process p
// about the known mean, with independent noise of variance noise[i] in frame i. It panics where the lengths
// of y, noise and f.TimesS differ.
func LogLikelihood(p Process, f Frames, y, noise []float64, mean float64) float64 {
	s := filter(p, f, y, noise)
	return s.known(mean)
}

// Restricted returns the restricted log-likelihood of y: the log density of what is left when the unknown
// mean is taken out by generalised least squares, up to a constant free of p. Fewer than two frames give 0.
// It panics where the lengths differ.
func Restricted(p Process, f Frames, y, noise []float64) float64 {
	if len(y) < 2 {
		return 0
	}
	return filter(p, f, y, noise).restricted()
}

// sums are what the filter gathers: n frames, Σ ln of the innovation variances, and the quadratic
// forms of y and of the vector of ones in the inverse covariance.
type sums struct {
	n                   int
	logDet, yy, y1, one float64
}

func (s sums) known(mean float64) float64 {
	q := s.yy - 2*mean*s.y1 + mean*mean*s.one
	return -0.5 * (float64(s.n)*math.Log(2*math.Pi) + s.logDet + q)
}

func (s sums) restricted() float64 {
	q := s.yy - s.y1*s.y1/s.one
	return -0.5 * (float64(s.n-1)*math.Log(2*math.Pi) + s.logDet + math.Log(s.one) + q)
}

// mostColumns is how many columns a likelihood may be about.
const mostColumns = 4

// restrictedAbout is the restricted log-likelihood of y about an unknown combination of columns, one value per frame each: the log density of what is left
// when they are taken out by generalised least squares, up to a constant free of p.
func restrictedAbout(p Process, f Frames, y, noise []float64, columns [][]float64) float64 {
	m := len(columns)
	var (
		ex     = newExposure(f.ExposureS / p.RelaxationS)
		a      = ex.averaged
		x, e   [mostColumns + 1]float64 // state estimates and innovations for y, then for every column
		cross  [mostColumns + 1][mostColumns + 1]float64
		px     = p.Variance
		logDet = 0.0

		lastDead, carry = math.NaN(), 0.0
	)
	for i, yi := range y {
		if i > 0 {
			dead := math.Max(0, f.TimesS[i]-f.TimesS[i-1]-f.ExposureS)
			if !(math.Abs(dead-lastDead) <= 1e-9*lastDead) {
				lastDead, carry = dead, math.Exp(-dead/p.RelaxationS)
			}
			for j := range m + 1 {
				x[j] *= carry
			}
			px = p.Variance + carry*carry*(px-p.Variance)
		}
		innovation := a*a*px + p.Variance*ex.varMean + noise[i]
		c := a*ex.decay*px + p.Variance*ex.cov
		gain := c / innovation
		e[0] = yi - a*x[0]
		for j := range columns {
			e[j+1] = columns[j][i] - a*x[j+1]
		}
		inv := 1 / innovation
		for j := range m + 1 {
			x[j] = ex.decay*x[j] + gain*e[j]
			ej := e[j] * inv
			for k := range j + 1 {
				cross[j][k] += ej * e[k]
			}
		}
		px = ex.decay*ex.decay*px + p.Variance*ex.varEnd - gain*c
		logDet += math.Log(innovation)
	}
	// Cholesky of the columns' cross products; y's forward solution gives what they explain.
	q := cross[0][0]
	var l [mostColumns][mostColumns]float64
	var z [mostColumns]float64
	for j := range m {
		z[j] = cross[j+1][0]
		for k := range j + 1 {
			s := cross[j+1][k+1]
			for i := range k {
				s -= l[j][i] * l[k][i]
			}
			if k < j {
				l[j][k] = s / l[k][k]
				z[j] -= l[j][k] * z[k]
				continue
			}
			l[j][j] = math.Sqrt(math.Max(s, 1e-300))
			logDet += 2 * math.Log(l[j][j])
		}
		z[j] /= l[j][j]
		q -= z[j] * z[j]
	}
	return -0.5 * (float64(len(y)-m)*math.Log(2*math.Pi) + logDet + q)
}

// filter runs the exact filter over y and, alongside, over ones. The state is x at the end of an exposure;
// the mean over the exposure enters only the measurement, so one number and its variance are carried on.
func filter(p Process, f Frames, y, noise []float64) sums {
	if len(y) != len(f.TimesS) || len(noise) != len(y) {
		panic("likelihood: amplitudes, noise and times differ in length")
	}
	var (
		ex       = newExposure(f.ExposureS / p.RelaxationS)
		v        = p.Variance
		a, dec   = ex.averaged, ex.decay
		a2, d2   = a * a, dec * dec
		ad       = a * dec
		vEnd     = v * ex.varEnd
		vCov     = v * ex.cov
		vMean    = v * ex.varMean
		s        = sums{n: len(y)}
		x, u     float64 // state estimates for y and for ones
		px       = v
		product  = 1.0
		lastDead = math.NaN()
		carry    float64
	)
	for i, yi := range y {
		if i > 0 {
			dead := f.TimesS[i] - f.TimesS[i-1] - f.ExposureS
			if dead < 0 {
				dead = 0
			}
			// Times are sums of roundings: equal gaps differ in their last digits, and exp is dear.
			if !(math.Abs(dead-lastDead) <= 1e-9*lastDead) {
				lastDead, carry = dead, math.Exp(-dead/p.RelaxationS)
			}
			x *= carry
			u *= carry
			px = v + carry*carry*(px-v)
		}
		innovation := a2*px + vMean + noise[i]
		cross := ad*px + vCov
		inv := 1 / innovation
		ey, e1 := yi-a*x, 1-a*u
		gain := cross * inv
		x = dec*x + gain*ey
		u = dec*u + gain*e1
		px = d2*px + vEnd - gain*cross
		s.yy += ey * ey * inv
		s.y1 += ey * e1 * inv
		s.one += e1 * e1 * inv
		product *= innovation
		if product < 1e-200 || product > 1e200 {
			s.logDet += math.Log(product)
			product = 1
		}
	}
	s.logDet += math.Log(product)
	return s
}
