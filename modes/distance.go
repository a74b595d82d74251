package modes

import (
	"math"

	"wend/modes/chain"
)

// distanceFit is the persistence length from the mean-square distance between the ends, µm, with its interval.
type distanceFit struct {
	lpUm, low, high float64
}

// noiseTrust is the standard deviation of the logarithm of the noise beyond what the fitted scale says, for corrections that rest on
// modes finer than those fitted.
const noiseTrust = 0.1

// widen adds, in quadrature in the logarithm, to the interval low to high of value what the corrections may be wrong by: estimate is asked again
// with relaxation times one fitted standard deviation, ratioSD, up and down and with the noise up and down. An answer that is NaN opens
// the interval.
func widen(value, low, high float64, t theory, ratioSD float64, estimate func(theory) float64) (float64, float64) {
	if math.IsNaN(value) || math.IsNaN(low) {
		return low, high
	}
	const z = 1.959964
	up, down := math.Pow(math.Log(high/value), 2), math.Pow(math.Log(low/value), 2)
	ratioSD = math.Min(ratioSD, 3)
	for _, change := range [][2]float64{{ratioSD, 0}, {0, noiseTrust}} {
		most, least := 0.0, 0.0
		for _, sign := range []float64{-1, 1} {
			c := t
			c.dragPaS, c.noiseScale = t.dragPaS*math.Exp(sign*change[0]), t.noiseScale*math.Exp(sign*change[1])
			v := estimate(c)
			if math.IsNaN(v) {
				v = math.Inf(1)
			}
			most, least = math.Max(most, z*math.Log(v/value)), math.Min(least, z*math.Log(v/value))
		}
		up, down = up+most*most, down+least*least
	}
	return value * math.Exp(-math.Sqrt(down)), value * math.Exp(math.Sqrt(up))
}

// mostHidden is the share of the contraction that may be hidden by exposure and optics: beyond it the ends would tell the
// correction rather than the stiffness.
const mostHidden = 0.5

// fitDistance compares the mean-square distance between the ends with the fixed contour length in the plane,
// ⟨R²⟩ = 4LpL[1-(2Lp/L)(1-e^(-L/2Lp))].
//
// Corrected are: the errors of the ends in R², along the line (lengthSEUm is the standard error of one frame's length) and across;
// the length of the undulations that exposure and optics hide. An intrinsic bend counts as
// flexibility. The interval has the shapes of the modes behind R and the error of the fixed length, taken as the scatter of the lengths,
// lengthSDUm, over the root of the frames. NaN where the ends are not nearer than the contour is long, or most of the contraction is hidden.
func fitDistance(a amplitudes, t theory, lengthSDUm, lengthSEUm float64) distanceFit {
	fit := distanceFit{math.NaN(), math.NaN(), math.NaN()}
	l, frames := a.lengthUm, float64(len(a.curves))
	r2 := 0.0
	for _, c := range a.curves {
		n := len(c.XUm) - 1
		dx, dy := c.XUm[n]-c.XUm[0], c.YUm[n]-c.YUm[0]
		r2 += (dx*dx + dy*dy) / frames
	}
	if lengthSEUm > 0 {
		r2 -= lengthSEUm * lengthSEUm
	}
	// Across the line the two ends err by P/L·(1+3) from the rigid modes and 4/L from each bending mode.
	noiseUm3 := t.noiseScale * mean(a.noiseUm3)
	endVariance := 4 * noiseUm3 / l
	for m := range a.held {
		endVariance += 4 * noiseUm3 * a.noiseGain(m+1) / l
	}
	r2 -= 2 * endVariance
	length := func(lpUm float64) float64 {
		missing := a.missingLength(theory{lpUm: lpUm, dragPaS: t.dragPaS, noiseScale: t.noiseScale, tubeRatio: t.tubeRatio})
		return a.measuredUm + missing
	}
	missing := func(x float64) float64 { // falls with Lp where it crosses zero
		lp := math.Exp(x)
		return r2 - chain.MeanSquareEndToEnd2D(lp, length(lp))
	}
	const ceiling, step = 16.0, 0.05
	x := ceiling
	if missing(x) > 0 {
		return fit
	}
	for ; x > math.Log(l)-6; x -= step {
		if missing(x) > 0 {
			break
		}
	}
	lo, hi := x, x+step
	if missing(lo) <= 0 {
		return fit
	}
	for range 60 {
		mid := (lo + hi) / 2
		if missing(mid) > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	fit.lpUm = math.Exp((lo + hi) / 2)
	// Error of the contraction L-R, to first order Σ b²·½[∫ψ′²-(ψ(L)-ψ(0))²/L].
	variance := lengthSDUm * lengthSDUm / frames
	if !(variance >= 0) {
		variance = 0
	}
	for m, s := range a.turnSpreads(t) {
		e := contractionGain(m+1, l)
		variance += s * e * e
	}
	contraction := length(fit.lpUm) - math.Sqrt(math.Max(0, r2))
	hidden := length(fit.lpUm) - a.measuredUm
	if hidden > mostHidden*contraction {
		return distanceFit{math.NaN(), math.NaN(), math.NaN()}
	}
	// The hidden length is known to first order; its square over the length stands for the rest.
	variance += math.Pow(hidden*hidden/l, 2)
	if contraction > 0 && variance > 0 {
		low, high := scaledInterval(1, variance/(contraction*contraction))
		fit.low, fit.high = fit.lpUm/high, fit.lpUm/low
	}
	return fit
}

// missingLength returns how much longer, µm, the contour is than the contours show: by the undulations that exposure and optics
// hide.
func (a amplitudes) missingLength(t theory) float64 {
	sum := 0.0
	count := max(a.held, theoryModes)
	for m := 1; m <= count; m++ {
		k := BeamWavenumber(m, a.lengthUm)
		shown := 0.0
		if m <= a.held {
			shown = chain.BlurFactor(a.frames.ExposureS / a.relaxation(k, t))
		}
		sum += slopeSquare(m) / (2 * a.lengthUm * a.lengthUm) * (1 - shown) * a.process(k, t).Variance
	}
	// The finer modes, with ∫ψ′² → k² and k → (m+½)π/L.
	return sum + a.lengthUm*a.lengthUm/(2*math.Pi*math.Pi*t.lpUm*float64(count+1))
}

// contractionGain returns what a unit of b_m² takes from the distance between the ends, 1/µm²: ½[∫ψ′² − (ψ(L)−ψ(0))²/L].
func contractionGain(m int, lengthUm float64) float64 {
	g := slopeSquare(m) / (2 * lengthUm * lengthUm)
	if m%2 == 0 { // even modes: ψ(L) = -ψ(0) = ∓2/√L
		g -= 8 / (lengthUm * lengthUm)
	}
	return g
}

// slopeSquare returns ∫ψ_m′² over a filament of unit length: σk(σk+6) with σ = tanh(k/2) for odd m and coth(k/2) for even.
func slopeSquare(m int) float64 {
	k := chain.BeamRoot(m)
	sigma := math.Tanh(k / 2)
	if m%2 == 0 {
		sigma = 1 / sigma
	}
	return sigma * k * (sigma*k + 6)
}
