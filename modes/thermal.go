package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/likelihood"
)

// Thresholds of the judgement. Those that start with p are probabilities under the thermal theory.
const (
	pChanging    = 1e-3 // halves of the movie disagree
	pDoubtful    = 0.01 // modes agree too little for a yes
	pUnequal     = 1e-3 // modes disagree: flagged, and the interval is widened by as much
	pNotThermal  = 1e-9 // modes disagree beyond doubt: called not thermal, if they also scatter by more than
	notThermal   = 0.7  // this standard deviation of ln Lp between modes, a factor of two, or
	notLocalDrag = 1.0  // this one of ln ζ: relaxation times that do not follow a drag
	mostExcess   = 1.5  // variance over the thermal one that must be excluded in every mode for a yes
	dragTooLow   = 0.5  // times the drag that theory expects, which the interval must reach
	dragTooHigh  = 100  // times that drag, beyond which the drag is flagged
	resolvedTo   = 0.5  // standard deviation of ln Lp up to which the fluctuation counts as resolved
	tubeGain     = 7.7  // twice the log-likelihood gained by a tube, exceeded by three free filaments in a thousand
	tubeDoubt    = 2.71 // the same, by one in twenty
	freeTo       = 0.5  // tube's stiffness over the first mode's that must be excluded for a filament to be called free: a length of four deflection lengths
	noiseFar     = 3    // standard deviations of the noise's prediction by which the fitted scale may differ from 1
	minHalf      = 10   // frames in each half of the movie
)

// confine asks whether a tube explains the modes better. It flags a filament that is confined in a setting where it should be free, and returns
// the fit to go on with: that of tube and stiffness together where there is one, and with the interval of both where it is in doubt.
func (r *Result) confine(d likelihood.Data, free likelihood.Result, o Options) likelihood.Result {
	tube, err := likelihood.Confinement(d, o.Likelihood, free)
	if err != nil {
		return free
	}
	if tube.Gain <= tubeDoubt {
		if tube.Ratio.High < freeTo {
			r.Confinement = ConfinementFree
		}
		return free
	}
	lo := o.Likelihood
	lo.Confined = true
	fit, err := likelihood.Fit(d, lo)
	if err != nil {
		return free
	}
	if tube.Gain <= tubeGain {
		// Free or not, the interval covers both.
		free.LpUm.Low, free.LpUm.High = math.Min(free.LpUm.Low, fit.LpUm.Low), math.Max(free.LpUm.High, fit.LpUm.High)
		return free
	}
	r.Confinement = ConfinementTube
	r.flag(FlagConfined)
	return fit
}

// judge fills Thermal and the flags behind it. "yes" is earned: modes that agree on one persistence length and one drag, well enough to
// exclude an excess of half the thermal variance in any of them, a drag of an aqueous medium or a more viscous one, and no flag that speaks
// against it. "no" needs modes that disagree beyond doubt, and takes the persistence length away, as does a stuck filament.
func (r *Result) judge(a amplitudes, fit likelihood.Result, t theory, bound bool, s Series, o Options) {
	expected, _ := a.expectedDrag(s, o)
	plausible := math.IsNaN(expected) || fit.DragPaS.High >= dragTooLow*expected
	if !plausible || fit.DragPaS.Low > dragTooHigh*expected {
		r.flag(FlagDrag)
	}
	if math.Abs(math.Log(fit.NoiseScale)) > noiseFar*o.Likelihood.NoiseScaleSD {
		r.flag(FlagNoise)
	}
	if bound || t.lpUnresolved {
		return
	}
	if r.Shapes >= o.MinShapes {
		if ratio, _ := a.pinnedAt(t); ratio < pinnedShare {
			r.flag(FlagPinned)
			r.Confinement = ConfinementPinned
			r.withhold("the filament is stuck")
			return
		}
	}
	if a.rolls(t, r.Shapes) {
		r.flag(FlagRolling)
	}
	g := agree(fit)
	if g.impossible() {
		r.Thermal = ThermalNo
		r.flag(FlagNotThermal)
		r.withhold("the bending is not thermal")
		return
	}
	if g.p < pUnequal {
		r.flag(FlagModesDisagree)
		r.widen(math.Sqrt(math.Max(1, g.gain/float64(g.modes-1))))
	}
	agreed := g.modes >= 3 && g.p >= pDoubtful && g.dragP >= pDoubtful && g.excess <= mostExcess
	if agreed && plausible && fit.LpSD < resolvedTo && !r.doubted() && !a.irreversible(t) {
		r.Thermal = ThermalYes
	}
}

// doubted says whether a flag stands that makes agreement with theory an accident.
func (r *Result) doubted() bool {
	for _, f := range r.Flags {
		switch f {
		case FlagEnds, FlagLength, FlagChanging, FlagNoise, FlagFewShapes, FlagDragLimit, FlagDrag, FlagProcessed, FlagRolling:
			return true
		}
	}
	return false
}

// leastUsed is the share of the frames that must be usable: what is left of a filament that is mostly lost is often a piece of it, whose length and bending are not
// the filament's.
const leastUsed = 1. / 3

// rejected takes the persistence length and the tube away where most frames were rejected.
func (r *Result) rejected(s Series) {
	if s.Frames == 0 || float64(len(s.Curves)) >= leastUsed*float64(s.Frames) {
		return
	}
	r.flag(FlagMostRejected)
	if r.Thermal == ThermalYes {
		r.Thermal = ThermalUnclear
	}
	r.withhold("most frames were rejected")
}

// withhold takes away every persistence length and rigidity, for the reason given.
func (r *Result) withhold(why string) {
	nan := math.NaN()
	r.LpUm, r.LpLowUm, r.LpHighUm, r.LpFrom = nan, nan, nan, ""
	r.TangentFitLpUm, r.TangentFitIntercept = nan, nan
	t := noTube()
	r.Tube.RmsUm, r.Tube.RmsLowUm, r.Tube.RmsHighUm = t.RmsUm, t.RmsLowUm, t.RmsHighUm
	r.Tube.MeshUm, r.Tube.MeshLowUm, r.Tube.MeshHighUm, r.Tube.MeshFrom = t.MeshUm, t.MeshLowUm, t.MeshHighUm, ""
	for i := range r.Estimates {
		if e := &r.Estimates[i]; e.Method != MethodKnown && (e.Quantity == QuantityLp || e.Quantity == QuantityRigidity || e.Quantity == QuantityModulus ||
			e.Quantity == QuantityTubeRms || e.Quantity == QuantityTubeDiameter || e.Quantity == QuantityTubeStiffness || e.Quantity == QuantityDeflection ||
			e.Quantity == QuantityMesh && e.Method != MeshFromConcentration) {
			e.Value, e.Low, e.High, e.Note = nan, nan, nan, "not given: "+why
		}
	}
	for i := range r.Modes {
		m := &r.Modes[i]
		m.LpUm, m.LpLowUm, m.LpHighUm = nan, nan, nan
	}
}

// widen stretches the interval of the recommended estimate about its value, in the logarithm, by a factor.
func (r *Result) widen(factor float64) {
	low, high := math.Pow(r.LpLowUm/r.LpUm, factor), math.Pow(r.LpHighUm/r.LpUm, factor)
	r.LpLowUm, r.LpHighUm = r.LpUm*low, r.LpUm*high
	for i := range r.Estimates {
		if e := &r.Estimates[i]; e.Method == MethodLikelihood && (e.Quantity == QuantityLp || e.Quantity == QuantityRigidity || e.Quantity == QuantityModulus) {
			e.Low, e.High = e.Value*low, e.Value*high
			if e.Quantity == QuantityLp {
				e.Note += "; interval widened because the modes disagree"
			}
		}
	}
}

// disagree reports whether the first and the second half of the movie can't have one persistence length: twice the log-likelihood
// lost by giving them one, drag and noise scale each their own, beyond the χ² quantile.
func disagree(a amplitudes, whole likelihood.Result, o Options) bool {
	n := len(a.frames.TimesS)
	if n < 2*minHalf {
		return false
	}
	lo := o.Likelihood
	lo.LpOnly, lo.Confined, lo.From = true, whole.TubeRatio > 0, &whole
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
