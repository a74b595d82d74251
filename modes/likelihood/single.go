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
	// HeldLpUm is this mode's persistence length with the common drag, and LpSD the standard deviation of its logarithm; +Inf where the
	// mode does not tell it.
	HeldLpUm, LpSD float64
	// DragGain is twice what the log-likelihood gains when this mode may leave the common drag by more than dragLaw, its Lp being its own
	// in both cases. DragSD is the standard deviation of ln ζ in that fit, +Inf where its range ends it.
	DragGain, DragSD float64
}

// dragLaw is by how much ln ζ may differ between thermal modes: the logarithm in the drag of a rod.
const dragLaw = 0.25

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
	p := m.process(m.d.Tracks[i].WavenumberPerUm, at)
	t := TrackFit{
		LpUm: math.Exp(at[paramLp]), DragPaS: math.Exp(at[paramDrag]),
		RelaxationS: p.RelaxationS, RelaxationSD: contrastSD(h, both),
		DragSD: widths(h, both)[paramDrag], Gain: math.Max(0, 2*(top-held)), LpSD: math.Inf(1),
	}
	if b.atDragLimit(at[paramDrag]) {
		t.DragSD = math.Inf(1)
	}
	lpOnly := [params]bool{paramLp: true}
	near := at
	near[paramDrag] = math.Min(math.Max(at[paramDrag], common[paramDrag]-dragLaw), common[paramDrag]+dragLaw)
	_, lawful := maximise(f, near, lpOnly, b)
	t.DragGain = math.Max(0, 2*(top-lawful))
	own, ownTop := maximise(f, common, lpOnly, b)
	_, h = slopes(f, own, ownTop, lpOnly)
	t.HeldLpUm = math.Exp(own[paramLp])
	if c := -h[paramLp][paramLp]; c > 0 {
		t.LpSD = 1 / math.Sqrt(c)
	}
	return t
}
