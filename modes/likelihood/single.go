package likelihood

import "math"

// TrackFit is one mode on its own, the noise scale being that of all modes.
type TrackFit struct {
	// LpUm and DragPaS are where this mode's likelihood is highest. RelaxationS is the relaxation time there, and
	// RelaxationSD the standard deviation of its logarithm, +Inf where the mode does not tell it.
	LpUm, DragPaS, RelaxationS, RelaxationSD float64
	// Gain is twice what the log-likelihood gains when this mode may leave the common Lp, its drag being its own in both
	// cases: chi-squared with one degree of freedom where the common Lp holds and the mode tells it.
	Gain float64
	// LpSD is the standard deviation of ln Lp from this mode's curvature with the common drag; +Inf where it is flat.
	LpSD float64
}

// single fits track i with drag and Lp of its own.
func (m *model) single(i int, common vector, b bounds) TrackFit {
	f := func(at vector) float64 { return m.track(i, at) }
	dragOnly := [params]bool{paramDrag: true}
	both := [params]bool{paramLp: true, paramDrag: true}
	start, held := maximise(f, common, dragOnly, b)
	at, top := maximise(f, start, both, b)
	if p, v := maximise(f, common, both, b); v > top {
		at, top = p, v
	}
	_, h := slopes(f, at, top, both)
	p := ModeProcess(m.d.Tracks[i].WavenumberPerUm, math.Exp(at[paramLp]), math.Exp(at[paramDrag]), m.d.TemperatureK)
	t := TrackFit{
		LpUm: math.Exp(at[paramLp]), DragPaS: math.Exp(at[paramDrag]),
		RelaxationS: p.RelaxationS, RelaxationSD: contrastSD(h, both),
		Gain: math.Max(0, 2*(top-held)), LpSD: math.Inf(1),
	}
	lpOnly := [params]bool{paramLp: true}
	own, ownTop := maximise(f, common, lpOnly, b)
	_, h = slopes(f, own, ownTop, lpOnly)
	if c := -h[paramLp][paramLp]; c > 0 {
		t.LpSD = 1 / math.Sqrt(c)
	}
	return t
}
