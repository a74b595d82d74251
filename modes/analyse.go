package modes

import (
	"fmt"
	"math"

	"wend/modes/chain"
	"wend/modes/likelihood"
)

// Analyse says what the contours of one free filament tell about its stiffness. It never panics on what s holds: frames that can't be
// used are left out, and what can't be estimated is NaN with a flag that says why. s is left as it was.
func Analyse(s Series, o Options) Result {
	nan := math.NaN()
	r := Result{LpUm: nan, LpLowUm: nan, LpHighUm: nan, Shapes: nan, Thermal: ThermalUnclear, Confinement: ConfinementUnclear,
		TangentFitLpUm: nan, TangentFitIntercept: nan, Tube: noTube()}
	if !s.FreeEnds {
		r.flag(FlagEnds)
	}
	a := measure(s, o)
	if len(a.frames.TimesS) < 2 {
		r.flag(FlagFewFrames)
		return r
	}
	if a.frames.ExposureS == 0 {
		r.flag(FlagNoBlur)
	}
	if a.fitted == 0 {
		r.flag(FlagShort)
		return r
	}
	if a.fitted < 3 {
		r.flag(FlagShort)
	}
	data := a.data(0, len(a.frames.TimesS))
	fit, err := likelihood.Fit(data, o.Likelihood)
	if err != nil {
		r.flag(FlagFit)
		return r
	}
	bound := openAbove(&fit)
	if !bound {
		fit = r.confine(data, fit, o)
		bound = openAbove(&fit)
	}
	whole := fit
	a.motionNoise = fit.MotionNoise
	t := theory{lpUm: fit.PeakLpUm, dragPaS: fit.DragPaS.Value, noiseScale: fit.NoiseScale, tubeRatio: fit.TubeRatio}
	if bound {
		// The shortest that the data allow has the slowest modes and so the fewest shapes.
		t.lpUnresolved = true
		if fit.LpUm.Low > 0 {
			t.lpUm = fit.LpUm.Low
		}
		r.flag(FlagLowerBound)
	} else {
		t.lpUm = fit.LpUm.Value
		t = a.rescale(&fit, t)
	}
	r.recommend(fit, bound)
	if fit.AtDragLimit {
		r.flag(FlagDragLimit)
	}
	r.Shapes = IndependentShapes(a.frames.TimesS, a.relaxation(a.k[0], t))
	if !(r.Shapes >= o.MinShapes) {
		r.flag(FlagFewShapes)
	}
	r.dynamics(a, fit, bound)
	r.medium(a, s, o)
	r.classic(a, fit, t, s, o)
	if len(s.Curves) >= minScatter && s.LengthSEUm > 0 && s.LengthSDUm > lengthScatter*s.LengthSEUm {
		r.flag(FlagLength)
	}
	if a.bend() > largeBend {
		r.flag(FlagLargeBends)
	}
	if s.Processed {
		r.flag(FlagProcessed)
	}
	if h := s.ChamberUm; h > 0 && ProjectionFactor(h, a.lengthUm) < leastProjection {
		r.flag(FlagProjection)
	}
	if disagree(a, whole, o) {
		r.flag(FlagChanging)
	}
	r.judge(a, fit, t, bound, s, o)
	r.rejected(s)
	return r
}

// A filament keeps its length: one whose measured length scatters by more than lengthScatter of its
// standard errors, over minScatter frames or more, is traced wrongly in some of them.
const (
	lengthScatter = 2.0
	minScatter    = 10
)

// largeBend is the root mean square turn, rad, beyond which the small-angle dynamics hold less well.
const largeBend = 0.6

// openAbove says whether there is no upper limit, and takes away one that rests on the range allowed for the drag
// in an interval too wide to be of use.
func openAbove(fit *likelihood.Result) bool {
	const useless = 10
	if (fit.AtDragLimit || fit.PeakAtDragLimit) && !(fit.LpUm.High < useless*fit.LpUm.Low) {
		fit.LpUm.Value, fit.LpUm.High = math.NaN(), math.Inf(1)
	}
	return math.IsInf(fit.LpUm.High, 1)
}

func (r *Result) flag(code string) {
	for _, f := range r.Flags {
		if f == code {
			return
		}
	}
	r.Flags = append(r.Flags, code)
}

func (r *Result) add(quantity, method string, value, low, high float64, note string) {
	r.Estimates = append(r.Estimates, Estimate{quantity, method, value, low, high, note})
}

// recommend enters the likelihood's persistence length and the rigidity that follows.
func (r *Result) recommend(fit likelihood.Result, bound bool) {
	r.LpUm, r.LpLowUm, r.LpHighUm, r.LpFrom = fit.LpUm.Value, fit.LpUm.Low, fit.LpUm.High, FromLikelihood
	note := fmt.Sprintf("all resolved bending modes together; drag fitted; noise %.2f times the predicted", fit.NoiseScale)
	if fit.TubeRatio > 0 {
		note += fmt.Sprintf("; with a tube %.2g times as stiff as the first mode", fit.TubeRatio)
	}
	if bound {
		r.LpFrom = FromBound
		note += "; no upper limit"
		if !(fit.LpUm.Low > 0) {
			r.LpLowUm, r.LpHighUm, r.LpFrom = math.NaN(), math.NaN(), ""
		}
	}
	r.add(QuantityLp, MethodLikelihood, r.LpUm, r.LpLowUm, r.LpHighUm, note)
}

// dynamics enters rigidity, drag and the slowest relaxation time.
func (r *Result) dynamics(a amplitudes, fit likelihood.Result, bound bool) {
	kt := chain.KT(a.temperatureK) * 1e-6 // J·m per µm of Lp
	r.add(QuantityRigidity, MethodLikelihood, r.LpUm*kt, r.LpLowUm*kt, r.LpHighUm*kt, "persistence length times kT")
	drag, slowest := fit.DragPaS, math.NaN()
	low, high := math.NaN(), math.NaN()
	if bound {
		drag.Value = math.NaN()
	} else {
		slowest = likelihood.ModeProcess(a.k[0], fit.PeakLpUm*(1+fit.TubeRatio), fit.DragPaS.Value, a.temperatureK).RelaxationS
		w := math.Exp(1.959964 * fit.RatioSD)
		low, high = slowest/w, slowest*w
	}
	r.add(QuantityDrag, MethodLikelihood, drag.Value, drag.Low, drag.High, "transverse drag per length, fitted as one number for all modes")
	r.add(QuantitySlowest, MethodLikelihood, slowest, low, high, "relaxation time of the first bending mode")
}

// classic enters the cosine modes, the tangent correlation and the end-to-end distance with their estimates.
func (r *Result) classic(a amplitudes, fit likelihood.Result, t theory, s Series, o Options) {
	rows := cosineModes(a, t, o)
	const knownTo = 0.7 // standard deviation of ln τ up to which a relaxation time is shown
	for i := range rows {
		if i < len(fit.Tracks) && fit.Tracks[i].RelaxationSD < knownTo {
			rows[i].RelaxationS = fit.Tracks[i].RelaxationS
		}
		r.Modes = append(r.Modes, rows[i].Mode)
	}
	value, low, high, used := combineModes(rows, fit.DragPaS.Value, a.frames.ExposureS)
	// The blur is as uncertain as the drag: the interval spans those at both ends of the drag's.
	for _, drag := range []float64{fit.DragPaS.Low, fit.DragPaS.High} {
		drag = math.Min(math.Max(drag, o.Likelihood.DragLowPaS), o.Likelihood.DragHighPaS)
		if _, l, h, n := combineModes(rows, drag, a.frames.ExposureS); n > 0 {
			low, high = math.Min(low, l), math.Max(high, h)
		}
	}
	note := fmt.Sprintf("%d cosine modes, corrected for noise, exposure (fitted drag) and the subtracted mean shape", used)
	if used == 0 {
		note = "no mode could be used"
	}
	if math.IsInf(high, 1) {
		value = math.NaN()
	}
	r.add(QuantityLp, MethodModes, value, low, high, note)

	tangent, _ := tangentCorrelation(a, t)
	line := fitTangent(a, tangent, t, o)
	for _, row := range tangent {
		r.Tangent = append(r.Tangent, row.Separation)
	}
	note = "too few separations for a line"
	if !math.IsNaN(line.fromUm) {
		note = fmt.Sprintf("line from %.2g to %.2g µm with free intercept, slope corrected for exposure and noise; includes any intrinsic bend",
			line.fromUm, line.toUm)
		if line.slopePerUm > 0 {
			r.TangentFitLpUm, r.TangentFitIntercept = 1/(2*line.slopePerUm), line.intercept
		}
	}
	line.low, line.high = widen(line.lpUm, line.low, line.high, t, fit.RatioSD, func(c theory) float64 {
		return fitTangent(a, tangent, c, o).lpUm
	})
	distance := fitDistance(a, t, s.LengthSDUm, s.LengthSEUm)
	distance.low, distance.high = widen(distance.lpUm, distance.low, distance.high, t, fit.RatioSD, func(c theory) float64 {
		return fitDistance(a, c, s.LengthSDUm, s.LengthSEUm).lpUm
	})
	// Without an upper limit there is no value either.
	if math.IsInf(line.high, 1) {
		line.lpUm = math.NaN()
	}
	if math.IsInf(distance.high, 1) {
		distance.lpUm = math.NaN()
	}
	if t.tubeRatio > 0 {
		r.classicConfined()
		return
	}
	if t.lpUnresolved {
		// Neither can be corrected for blur, nor its shapes counted, without a stiffness.
		line.lpUm, line.low, line.high = math.NaN(), math.NaN(), math.NaN()
		distance = distanceFit{math.NaN(), math.NaN(), math.NaN()}
		note = "fluctuations not resolved"
	}
	r.add(QuantityLp, MethodTangent, line.lpUm, line.low, line.high, note)
	note = "fixed contour length, corrected for noise and for undulations hidden by exposure and optics; includes any intrinsic bend; a small error of the length weighs much"
	switch {
	case t.lpUnresolved:
		note = "fluctuations not resolved"
	case math.IsInf(distance.high, 1):
		note = "no upper limit: the corrections for noise and exposure are as large as the contraction"
	case math.IsNaN(distance.lpUm):
		note = "the ends are as far apart as the contour is long within the noise, or the exposure hides most of the contraction"
	}
	r.add(QuantityLp, MethodDistance, distance.lpUm, distance.low, distance.high, note)
	r.distribution(a, fit, t, s)
	r.compare()
}

// distribution enters the persistence length from the distribution of the distance between the ends.
func (r *Result) distribution(a amplitudes, fit likelihood.Result, t theory, s Series) {
	const longest = 1 // persistence lengths, up to which the theory of a nearly straight chain holds
	e := Estimate{QuantityLp, MethodDistribution, math.NaN(), math.NaN(), math.NaN(), ""}
	switch {
	case t.lpUnresolved:
		e.Note = "fluctuations not resolved"
	case a.lengthUm > longest*t.lpUm:
		e.Note = "not given: the filament is longer than its persistence length"
	default:
		d := fitContraction(a, t, s.LengthSEUm)
		d.low, d.high = widen(d.lpUm, d.low, d.high, t, fit.RatioSD, func(c theory) float64 { return fitContraction(a, c, s.LengthSEUm).lpUm })
		e.Note = "most likely distribution of the distance between the ends, with exposure, noise and mean shape"
		switch {
		case math.IsNaN(d.lpUm):
			e.Note = "not given: the light, the frames or the resolution do not suffice"
		case math.IsInf(d.high, 1):
			d.lpUm, e.Note = math.NaN(), "no upper limit: the corrections for noise and exposure are as large as the contraction"
		}
		e.Value, e.Low, e.High = d.lpUm, d.low, d.high
	}
	r.Estimates = append(r.Estimates, e)
}

// compare flags classic estimates whose interval excludes the recommended one's.
func (r *Result) compare() {
	for _, e := range r.Estimates {
		if e.Quantity == QuantityLp && e.Method != MethodLikelihood && (e.Low > r.LpHighUm || e.High < r.LpLowUm) {
			r.flag(FlagMethodsDisagree)
		}
	}
}

// classicConfined takes away what the classic methods say of a filament in a tube: they are for free ones.
func (r *Result) classicConfined() {
	nan := math.NaN()
	for i := range r.Estimates {
		if e := &r.Estimates[i]; e.Method == MethodModes {
			*e = Estimate{e.Quantity, e.Method, nan, nan, nan, forFree}
		}
	}
	for i := range r.Modes {
		m := &r.Modes[i]
		m.LpUm, m.LpLowUm, m.LpHighUm, m.Used, m.Reason = nan, nan, nan, false, ReasonConfined
	}
	for i := range r.Tangent {
		r.Tangent[i].Used = false
	}
	r.TangentFitLpUm, r.TangentFitIntercept = nan, nan
	r.add(QuantityLp, MethodTangent, nan, nan, nan, forFree)
	r.add(QuantityLp, MethodDistance, nan, nan, nan, forFree)
	r.add(QuantityLp, MethodDistribution, nan, nan, nan, forFree)
}

const forFree = "not given: the filament is confined, and this method is for free ones"

// rescale lengthens the contour by what the contours do not show, and with it the fit: for lengths that grow by a factor a at unchanged times
// the same amplitudes, as angles, mean a persistence length a times larger and a drag a³ times smaller. It alters a
// and fit and returns t for them.
func (a *amplitudes) rescale(fit *likelihood.Result, t theory) theory {
	const most = 1.2 // beyond it the theory of small hidden undulations is no guide
	scaled := t
	factor := 1.0
	for range 4 {
		factor = math.Min(most, math.Max(1/most, 1+a.missingLength(scaled)/a.measuredUm))
		scaled.lpUm, scaled.dragPaS = t.lpUm*factor, t.dragPaS/(factor*factor*factor)
	}
	a.lengthUm *= factor
	for m := range a.k {
		a.k[m] /= factor
		for i := range a.b[m] {
			a.b[m][i] *= math.Pow(factor, 1.5)
		}
	}
	scale := func(i *likelihood.Interval, by float64) { i.Value, i.Low, i.High = i.Value*by, i.Low*by, i.High*by }
	drag := 1 / (factor * factor * factor)
	scale(&fit.LpUm, factor)
	scale(&fit.DragPaS, drag)
	fit.PeakLpUm *= factor
	for i := range fit.Tracks {
		fit.Tracks[i].LpUm *= factor
		fit.Tracks[i].HeldLpUm *= factor
		fit.Tracks[i].DragPaS *= drag
	}
	return scaled
}

// bend returns the root mean square over frames of the angle, rad, by which the tangent departs from its mean along the contour.
func (a amplitudes) bend() float64 {
	sum := 0.0
	for _, ch := range a.chords {
		m, m2 := mean(ch.angle), 0.0
		for _, x := range ch.angle {
			m2 += (x - m) * (x - m)
		}
		sum += m2 / float64(len(ch.angle))
	}
	return math.Sqrt(sum / float64(len(a.chords)))
}
