package likelihood

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Options of [Fit].
type Options struct {
	// NoiseScaleSD is the standard deviation of ln c, c being what the predicted noise variances are multiplied by:
	// how well the prediction is known. Where the modes themselves tell c, the prior hardly matters.
	NoiseScaleSD float64
	// MotionNoiseSD is the same for the share of the hidden variance that a frame shows as noise, [Data.MotionNoise]; 0 takes it as exact.
	MotionNoiseSD float64
	// Confined fits the stiffness of a harmonic tube too.
	Confined bool
	// Network fits the tube by its bulk rms, which every filament in it has; the tracks hold the two rigid modes too.
	Network bool
	// KnownLpUm is a persistence length known from elsewhere, µm, and KnownLpSD the standard deviation of its logarithm, 0 where it is taken as exact; KnownLpUm 0
	// where nothing is known.
	KnownLpUm, KnownLpSD float64
	// DragLowPaS and DragHighPaS bound the search for the drag per length, Pa·s.
	DragLowPaS, DragHighPaS float64
	// LpLowUm and LpHighUm bound the search for the persistence length, µm.
	LpLowUm, LpHighUm float64
	// Confidence is that of the intervals.
	Confidence float64
	// From, if not nil, is a result of similar data to climb from, in the place of a search.
	From *Result
	// LpOnly leaves out the profile of the drag and the single tracks, for a quicker answer.
	LpOnly bool
}

// DefaultOptions: noise predicted to a factor 1.3 and that of motion to a factor 2; a free filament; a drag from a quarter of what water at 40 °C lays on the
// thinnest rod to that of a paste; any persistence length; 95 % intervals.
func DefaultOptions() Options {
	return Options{NoiseScaleSD: math.Log(1.3), MotionNoiseSD: math.Log(2), DragLowPaS: 3e-4, DragHighPaS: 30, LpLowUm: 1e-3, LpHighUm: 1e7, Confidence: 0.95}
}

// Interval is an estimate with its interval, in the quantity's own unit. High may be +Inf and Low 0.
type Interval struct {
	Value, Low, High float64
}

// Result of [Fit].
type Result struct {
	// LpUm is the persistence length, µm. Value is the peak less the bias of a logarithm of a variance from few shapes,
	// half the variance of ln Lp with all else known; it is NaN where the interval is open above.
	LpUm Interval
	// PeakLpUm is where the likelihood is highest, µm.
	PeakLpUm float64
	// DragPaS is the transverse drag per length, Pa·s; open ends stand where the range searched was not left.
	DragPaS Interval
	// NoiseScale is the fitted factor on the predicted noise variances, NoiseScaleSD the width of its logarithm.
	NoiseScale, NoiseScaleSD float64
	// MotionNoise is the fitted share of the hidden variance that a frame shows as noise.
	MotionNoise float64
	// TubeRatio is γ/(κk₁⁴), the tube's stiffness over that of the first mode, at the peak; 0 for a free filament.
	TubeRatio float64
	// LogLikelihood at the peak, the priors included.
	LogLikelihood float64
	// LpSD is the standard deviation of ln Lp from the curvature at the peak, drag and noise scale unknown.
	LpSD float64
	// RatioSD is that of ln(drag/Lp), the logarithm of any mode's relaxation time.
	RatioSD float64
	// Tracks are the single bending modes, in the order of the data's.
	Tracks []TrackFit
	// LpProfile and DragProfile are in ln µm and ln Pa·s.
	LpProfile, DragProfile Profile
	// TubeRmsUm is the tube's bulk rms, µm, in a network: the mean of its logarithm over the likelihood, which may have two peaks, a stiff
	// filament in a narrow tube and a soft one in a wide. TubeProfile is its profile in ln µm, PeakTubeUm where it is highest.
	TubeRmsUm   Interval
	PeakTubeUm  float64
	TubeProfile Profile
	// AtDragLimit says that an end of the interval of Lp stands where the drag met the end of its range: the data alone do
	// not give that end; PeakAtDragLimit that the peak stands there, where it means nothing.
	AtDragLimit, PeakAtDragLimit bool

	peak vector
}

// Fit finds persistence length, drag and noise that make all tracks most likely together, with
// profile-likelihood intervals. d is left as it was. The error says which number is missing or not usable.
func Fit(d Data, o Options) (Result, error) {
	if err := d.check(); err != nil {
		return Result{}, err
	}
	for _, t := range d.Tracks {
		if t.WavenumberPerUm == 0 && !o.Network {
			return Result{}, errors.New("likelihood: a rigid mode, wavenumber 0, of a filament that no tube holds")
		}
	}
	m, b, free := newModel(d, o), o.bounds(), o.free(d)
	var best vector
	var top float64
	if o.From != nil {
		best, top = maximise(m.value, o.From.peak, free, b)
	} else if o.Network {
		best, top = searchTube(m.value, free, b)
	} else {
		best, top = search(m.value, free, b)
	}
	if o.Confined {
		// A tube hides from the grid: its ridge runs along from the free filament.
		best, top = intoTube(m, best, top, free, b)
	}
	_, h := slopes(m.value, best, top, free)
	w := widths(h, free)
	r := Result{
		PeakLpUm:      math.Exp(best[paramLp]),
		NoiseScale:    math.Exp(best[paramNoise]),
		NoiseScaleSD:  math.Min(w[paramNoise], o.NoiseScaleSD),
		MotionNoise:   d.MotionNoise * math.Exp(best[paramMotion]),
		LogLikelihood: top,
		LpSD:          w[paramLp],
		RatioSD:       contrastSD(h, free),
		DragPaS:       Interval{math.Exp(best[paramDrag]), math.NaN(), math.NaN()},
		peak:          best,
	}
	if o.Network {
		r.PeakTubeUm = math.Exp(best[paramTube])
	} else {
		r.TubeRatio = math.Expm1(best[paramTube])
	}
	if free[paramLp] {
		r.LpProfile = profile(m.value, best, top, paramLp, free, w[paramLp], b)
	} else {
		r.LpProfile = Profile{X: []float64{best[paramLp]}, Drop: []float64{0}, Slope: []float64{0}, at: []vector{best}}
	}
	level := distuv.ChiSquared{K: 1}.Quantile(o.Confidence) / 2
	if !o.LpOnly {
		r.DragProfile = profile(m.value, best, top, paramDrag, free, w[paramDrag], b)
		r.DragPaS = interval(r.DragProfile, best[paramDrag], level)
		for i, t := range d.Tracks {
			if t.WavenumberPerUm > 0 {
				r.Tracks = append(r.Tracks, m.single(i, best, b))
			}
		}
	}
	if o.Network {
		r.TubeProfile = profile(m.value, best, top, paramTube, free, w[paramTube], b)
		r.TubeRmsUm = interval(r.TubeProfile, best[paramTube], level)
		r.TubeRmsUm.Value = math.Exp(r.TubeProfile.mean())
	}
	r.LpUm = interval(r.LpProfile, best[paramLp], level)
	if curvature := -h[paramLp][paramLp]; curvature > 0 {
		r.LpUm.Value *= math.Exp(-0.5 / curvature)
	}
	// Stiff with little drag or soft with much: where the likelihood has two peaks or a long shoulder, its mean lies between them.
	if i := r.LpUm; i.Low > 0 && i.High > wideInterval*i.Low && !math.IsInf(i.High, 1) {
		r.LpUm.Value = math.Exp(r.LpProfile.mean())
	}
	r.LpUm.Value = math.Max(r.LpUm.Value, r.LpUm.Low)
	if math.IsInf(r.LpUm.High, 1) {
		r.LpUm.Value = math.NaN()
	}
	for _, end := range []float64{r.LpUm.Low, r.LpUm.High} {
		if end > 0 && !math.IsInf(end, 1) {
			r.AtDragLimit = r.AtDragLimit || b.atDragLimit(r.LpProfile.place(math.Log(end))[paramDrag])
		}
	}
	r.PeakAtDragLimit = b.atDragLimit(best[paramDrag])
	return r, nil
}

// wideInterval is the ratio of an interval's ends from which its peak alone is a poor value.
const wideInterval = 3

// bounds are how far each parameter may go.
func (o Options) bounds() bounds {
	b := bounds{
		low:  vector{math.Log(o.LpLowUm), math.Log(o.DragLowPaS), -8 * o.NoiseScaleSD, -4 * o.MotionNoiseSD, 0},
		high: vector{math.Log(o.LpHighUm), math.Log(o.DragHighPaS), 8 * o.NoiseScaleSD, 4 * o.MotionNoiseSD, mostTube},
	}
	if o.KnownLpUm > 0 && o.KnownLpSD == 0 {
		b.low[paramLp] = math.Log(o.KnownLpUm)
		b.high[paramLp] = b.low[paramLp]
	}
	if o.Network {
		b.low[paramTube], b.high[paramTube] = math.Log(leastRmsUm), math.Log(mostRmsUm)
	}
	return b
}

// mostTube bounds ln(1 + x) of the tube: a million times as stiff as the first mode.
const mostTube = 14

// The tube's rms, µm: from nothing that a microscope sees to no tube at all.
const leastRmsUm, mostRmsUm = 1e-3, 30

// free says which parameters d can tell anything about.
func (o Options) free(d Data) [params]bool {
	return [params]bool{paramLp: !(o.KnownLpUm > 0 && o.KnownLpSD == 0), paramDrag: true, paramNoise: true,
		paramMotion: d.MotionNoise > 0 && d.ExposureS > 0 && o.MotionNoiseSD > 0, paramTube: o.Confined || o.Network}
}

// search climbs from the best place of a coarse grid, and from the best one at a drag well away from that, since blur and
// slowness can each explain a weak fluctuation and the likelihood may have two peaks.
func search(f func(vector) float64, free [params]bool, b bounds) (vector, float64) {
	type place struct {
		at    vector
		value float64
	}
	var starts []place
	for z := math.Log(1e-3); z < math.Log(2); z += 1.5 {
		best := place{value: math.Inf(-1)}
		for x := math.Log(0.03); x < math.Log(5e4); x += 1.1 {
			at := b.clamp(vector{paramLp: x, paramDrag: z})
			if v := f(at); v > best.value {
				best = place{at, v}
			}
		}
		starts = append(starts, best)
	}
	top := starts[0]
	for _, s := range starts {
		if s.value > top.value {
			top = s
		}
	}
	other := place{value: math.Inf(-1)}
	for _, s := range starts {
		if s.value > other.value && math.Abs(s.at[paramDrag]-top.at[paramDrag]) > 2 {
			other = s
		}
	}
	free[paramTube] = false
	at, value := maximise(f, top.at, free, b)
	if !math.IsInf(other.value, -1) {
		if p, v := maximise(f, other.at, free, b); v > value+1e-6 {
			at, value = p, v
		}
	}
	return at, value
}

// interval turns a profile into an interval at the given drop.
func interval(p Profile, peak, level float64) Interval {
	return Interval{
		Value: math.Exp(peak),
		Low:   math.Exp(p.crossing(peak, level, -1)),
		High:  math.Exp(p.crossing(peak, level, 1)),
	}
}
