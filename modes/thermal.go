package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/chain"
	"wend/modes/likelihood"
)

// Thresholds of the judgement. The first two are probabilities under the thermal theory.
const (
	pChanging   = 1e-3 // halves of the movie disagree
	pUnequal    = 1e-3 // modes disagree: not called thermal
	pNotThermal = 1e-9 // modes disagree beyond doubt: called not thermal, if they also scatter by more than
	notThermal  = 0.7  // this standard deviation of ln Lp between modes, a factor of two
	dragTooLow  = 0.5  // times the drag in water, which the interval must reach to pass as an aqueous medium
	dragTooHigh = 100  // times the drag in water, beyond which the drag is flagged
	resolvedTo  = 0.5  // standard deviation of ln Lp up to which the fluctuation counts as resolved
	minHalf     = 10   // frames in each half of the movie
)

// homogeneity tests whether all modes that tell a persistence length tell the same one. Each mode's drag is its own,
// since drag depends a little on wavelength. It returns the probability of a worse agreement under the theory, the standard deviation of ln
// Lp between the modes beyond their errors, and how many modes took part. One mode gives p = 1.
func homogeneity(fit likelihood.Result) (p, scatter float64, modes int) {
	const tells = 0.7 // standard deviation of a mode's ln Lp up to which it takes part
	gain, sw, sx, sxx, errors := 0.0, 0.0, 0.0, 0.0, 0.0
	for _, t := range fit.Tracks {
		if !(t.LpSD < tells) {
			continue
		}
		modes++
		gain += t.Gain
		x := math.Log(t.LpUm / fit.PeakLpUm)
		sw++
		sx += x
		sxx += x * x
		errors += t.LpSD * t.LpSD
	}
	if modes < 2 {
		return 1, 0, modes
	}
	v := (sxx-sx*sx/sw)/(sw-1) - errors/sw
	return distuv.ChiSquared{K: float64(modes - 1)}.Survival(gain), math.Sqrt(math.Max(0, v)), modes
}

// judge fills Thermal and Confinement. "yes" needs a resolved fluctuation, modes that agree on one persistence length and a drag of
// an aqueous medium or a more viscous one; "no" needs modes that disagree beyond doubt, and then takes the persistence length away.
func (r *Result) judge(a amplitudes, fit likelihood.Result, t theory, bound bool, o Options) {
	p, scatter, modes := homogeneity(fit)
	water := chain.DragUnbounded(chain.WaterViscosity(a.temperatureK), a.k[0], o.RadiusUm)
	plausible := math.IsNaN(water) || fit.DragPaS.High >= dragTooLow*water
	if !plausible || fit.DragPaS.Low > dragTooHigh*water {
		r.flag(FlagDrag)
	}
	// With an end unseen, or contours that run on or break off, agreement with theory is an accident.
	ends := false
	for _, f := range r.Flags {
		ends = ends || f == FlagEnds || f == FlagLength
	}
	switch {
	case bound || t.lpUnresolved || modes < 2:
	case p < pNotThermal && scatter > notThermal:
		r.Thermal = ThermalNo
		r.LpUm, r.LpLowUm, r.LpHighUm, r.LpFrom = math.NaN(), math.NaN(), math.NaN(), ""
		r.flag(FlagNotThermal)
	case p >= pUnequal && plausible:
		r.Confinement = ConfinementFree
		if !ends && fit.LpSD < resolvedTo {
			r.Thermal = ThermalYes
		}
	}
}

// disagree reports whether the first and the second half of the movie can't have one persistence length: twice the log-likelihood
// lost by giving them one, drag and noise scale each their own, beyond the χ² quantile.
func disagree(a amplitudes, o Options) bool {
	n := len(a.frames.TimesS)
	if n < 2*minHalf {
		return false
	}
	lo := o.Likelihood
	lo.LpOnly = true
	first, err1 := likelihood.Fit(a.data(0, n/2), lo)
	second, err2 := likelihood.Fit(a.data(n/2, n), lo)
	if err1 != nil || err2 != nil {
		return false
	}
	least := math.Inf(1)
	for x := math.Log(lo.LpLowUm); x <= math.Log(lo.LpHighUm); x += 0.005 {
		least = math.Min(least, first.LpProfile.At(x)+second.LpProfile.At(x))
	}
	return 2*least > distuv.ChiSquared{K: 1}.Quantile(1-pChanging)
}
