package modes

import (
	"math"
	"math/cmplx"

	"wend/modes/chain"
)

// contraction is the distribution of how much nearer the ends of a nearly straight filament are than its contour is long: half the sum of squares of the
// cosine modes of the tangent angle, which are normal (Wilhelm and Frey, Phys. Rev. Lett. 77:2581 (1996), who sum the same series for
// a chain without noise and exposure), with a normal error.
type contraction struct {
	variance, mean []float64 // of the modes, µm and µm^½
	errorVariance  float64   // µm²
}

// moments returns mean and variance, µm and µm².
func (c contraction) moments() (mean, variance float64) {
	variance = c.errorVariance
	for m, v := range c.variance {
		a2 := c.mean[m] * c.mean[m]
		mean += (v + a2) / 2
		variance += v*v/2 + v*a2
	}
	return mean, variance
}

// characteristic returns the mean of exp(i·t·x) for the contraction x.
func (c contraction) characteristic(t float64) complex128 {
	log := complex(-c.errorVariance*t*t/2, 0)
	for m, v := range c.variance {
		d := 1 - complex(0, t*v)
		log += -cmplx.Log(d)/2 + complex(0, t*c.mean[m]*c.mean[m]/2)/d
	}
	return cmplx.Exp(log)
}

// density returns the probability density at the places x, µm: the integral of the characteristic function by equal steps, fine enough for the
// distribution and its images not to overlap.
func (c contraction) density(x []float64) []float64 {
	mean, variance := c.moments()
	sd := math.Sqrt(variance)
	far := mean + 12*sd
	for _, v := range x {
		far = math.Max(far, math.Abs(v)+12*sd)
	}
	step := math.Pi / far
	out := make([]float64, len(x))
	const most, negligible = 20000, 1e-6
	turn, wave := make([]complex128, len(x)), make([]complex128, len(x))
	for j, v := range x {
		turn[j], wave[j] = cmplx.Exp(complex(0, -step*v)), 1
	}
	for i := range most {
		phi := c.characteristic(step * float64(i))
		if i > 0 && cmplx.Abs(phi) < negligible {
			break
		}
		w := step / math.Pi
		if i == 0 {
			w /= 2
		}
		for j := range x {
			out[j] += w * real(phi*wave[j])
			wave[j] *= turn[j]
		}
	}
	return out
}

// contractionOf is the distribution that the theory t gives for the contours of a. What the exposure makes of the beam modes goes
// over to the cosine modes, whose small correlations it leaves out.
func (a amplitudes) contractionOf(t theory, errorVariance float64) contraction {
	c := contraction{errorVariance: errorVariance}
	var beam, shape []float64
	for m := 1; m <= max(a.held, 1); m++ {
		p := a.process(BeamWavenumber(m, a.lengthUm), t)
		shown, _ := mixture{frames: a.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}}.signal()
		beam = append(beam, shown)
		b := 0.0
		if m <= a.resolved {
			_, ofMean, _ := a.modeSpread(m, t)
			b = mean(a.b[m-1])
			b = math.Copysign(math.Sqrt(math.Max(0, b*b-ofMean)), b)
		}
		shape = append(shape, b)
	}
	for n := range beam {
		v, s := 0.0, 0.0
		for m := range beam {
			w := chain.CosineMixture(n+1, m+1) / a.lengthUm
			v, s = v+w*w*beam[m], s+w*shape[m]
		}
		c.variance, c.mean = append(c.variance, v), append(c.mean, s)
	}
	return c
}

// fitContraction finds the persistence length, µm, whose distribution of the contraction makes those of the frames most likely. Frames are counted as what
// they are worth for the mean contraction, since they are correlated. The exposure is in the distribution, with the drag of t; an intrinsic
// bend enters as the mean shape. lengthSEUm is the standard error of one frame's length. NaN where the light or the frames do not suffice.
func fitContraction(a amplitudes, t theory, lengthSEUm float64) distanceFit {
	nan := math.NaN()
	fit := distanceFit{nan, nan, nan}
	var seen []float64
	for _, c := range a.curves {
		n := len(c.XUm) - 1
		seen = append(seen, a.measuredUm-math.Hypot(c.XUm[n]-c.XUm[0], c.YUm[n]-c.YUm[0]))
	}
	errorVariance := 0.0
	if lengthSEUm > 0 {
		errorVariance = lengthSEUm * lengthSEUm
	}
	// What the frames are worth: the variance of one contraction over that of their mean.
	worth := 0.0
	{
		_, one := a.contractionOf(t, errorVariance).moments()
		ofMean := errorVariance / float64(len(seen))
		for m, s := range a.turnSpreads(t) {
			g := contractionGain(m+1, a.lengthUm)
			ofMean += s * g * g
		}
		worth = math.Min(1, one/ofMean/float64(len(seen)))
	}
	logL := func(x float64) float64 {
		c := t
		c.lpUm = math.Exp(x)
		sum := 0.0
		for _, f := range a.contractionOf(c, errorVariance).densityOf(seen) {
			sum += math.Log(math.Max(f, 1e-12))
		}
		return worth * sum
	}
	const step, reach = 0.2, 8
	var xs, ys []float64
	best := 0
	for i := -reach; i <= reach; i++ {
		x := math.Log(t.lpUm) + step*float64(i)
		xs, ys = append(xs, x), append(ys, logL(x))
		if ys[len(ys)-1] > ys[best] {
			best = len(ys) - 1
		}
	}
	if best == 0 || best == len(xs)-1 {
		return fit
	}
	// The top by a parabola, the ends by straight lines between places.
	l, m, r := ys[best-1], ys[best], ys[best+1]
	curve := l - 2*m + r
	peak := xs[best] + step*(l-r)/(2*curve)
	top := m - (l-r)*(l-r)/(8*curve)
	const level = 3.841459 / 2
	cross := func(dir int) float64 {
		for i := best; i >= 0 && i < len(xs); i += dir {
			if ys[i] < top-level {
				j := i - dir
				f := (top - level - ys[j]) / (ys[i] - ys[j])
				if j == best {
					f = math.Sqrt(math.Max(0, (top-level-ys[j])/(ys[i]-ys[j])))
				}
				return xs[j] + f*(xs[i]-xs[j])
			}
		}
		return math.Copysign(math.Inf(1), float64(dir))
	}
	fit.lpUm, fit.low, fit.high = math.Exp(peak), math.Exp(cross(-1)), math.Exp(cross(1))
	if math.IsInf(fit.high, 1) || fit.low == 0 {
		return distanceFit{nan, nan, nan}
	}
	return fit
}

// densityOf is density at many places, from a grid between the first and the last of them.
func (c contraction) densityOf(x []float64) []float64 {
	const cells = 80
	low, high := x[0], x[0]
	for _, v := range x {
		low, high = math.Min(low, v), math.Max(high, v)
	}
	if len(x) <= cells || !(high > low) {
		return c.density(x)
	}
	grid := make([]float64, cells+1)
	for i := range grid {
		grid[i] = low + (high-low)*float64(i)/cells
	}
	f := c.density(grid)
	out := make([]float64, len(x))
	for j, v := range x {
		u := (v - low) / (high - low) * cells
		i := min(int(u), cells-1)
		out[j] = f[i] + (u-float64(i))*(f[i+1]-f[i])
	}
	return out
}
