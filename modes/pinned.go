package modes

import (
	"math"

	"wend/modes/chain"
)

// A free filament moves everywhere by its bending at least, whatever else it does. pinnedShare is the share of that
// below which a place counts as stuck.
const (
	pinnedShare    = 0.3
	pinnedStations = 15
)

// pinnedAt looks for a place along the filament that stays where it is. It compares the variance over the frames of the position of each place,
// across the line, with what the bending modes alone would give it; drift, diffusion and noise only add. It returns the smallest
// ratio and where along the length it was found, between 0 and 1. The modes must have gone through some shapes for the ratio to mean anything.
func (a amplitudes) pinnedAt(t theory) (ratio, where float64) {
	ratio = math.Inf(1)
	n := len(a.curves)
	for j := range pinnedStations {
		x := 0.04 + 0.92*float64(j)/(pinnedStations-1)
		var px, py, tx, ty []float64
		for i, c := range a.curves {
			u, v, du, dv := a.chords[i].place(c, x)
			px, py, tx, ty = append(px, u), append(py, v), append(tx, du), append(ty, dv)
		}
		mx, my := mean(px), mean(py)
		moved := 0.0
		for i := range px {
			across := (py[i]-my)*tx[i] - (px[i]-mx)*ty[i]
			moved += across * across / float64(n-1)
		}
		bending := 0.0
		for m := 1; m <= a.resolved; m++ {
			p := a.process(a.k[m-1], t)
			_, about := mixture{frames: a.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}}.signal()
			psi := chain.BeamMode(m, x)
			bending += about * psi * psi / a.lengthUm
		}
		if r := moved / bending; r < ratio {
			ratio, where = r, x
		}
	}
	return ratio, where
}

// place returns the point of c at the share x of the chords' length, and the unit tangent there.
func (ch chords) place(c Curve, x float64) (px, py, tx, ty float64) {
	s := x * ch.total
	i := 0
	for i < len(ch.start)-1 && ch.start[i+1] <= s {
		i++
	}
	f := (s - ch.start[i]) / ch.length[i]
	dx, dy := c.XUm[i+1]-c.XUm[i], c.YUm[i+1]-c.YUm[i]
	return c.XUm[i] + f*dx, c.YUm[i] + f*dy, dx / ch.length[i], dy / ch.length[i]
}
