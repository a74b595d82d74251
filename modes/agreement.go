package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/likelihood"
)

// agreement says how well the modes of a filament tell the same, each with a persistence length and a drag of its own against the common ones.
type agreement struct {
	// modes tell a persistence length; p is the probability of a worse agreement on it under thermal theory, gain what chi-squared that
	// stands for, scatter the standard deviation of ln Lp between modes beyond their errors.
	modes         int
	p             float64
	gain, scatter float64
	// excess is the largest variance over the thermal one, as told by the other modes, that one of the longest waves may have: the upper end of a
	// one-sided 95 % interval, the largest of theirs. Flow, motors and sticking bend long waves first.
	excess float64
	// dragP is the probability of a worse agreement on the drag, dragScatter the standard deviation of ln ζ beyond errors. Modes that do not tell
	// their relaxation time take no part.
	dragP, dragScatter float64
}

const (
	tellsLp    = 0.7 // standard deviation of a mode's ln Lp up to which it takes part
	tellsDrag  = 0.5 // the same of ln ζ
	longWaves  = 4   // modes in which an excess is looked for
	oneSided95 = 1.644854
)

// agree compares the modes of a fit. Each mode's drag is its own where persistence lengths are compared, since drag depends a little on
// wavelength. With one mode nothing disagrees.
func agree(fit likelihood.Result) agreement {
	a := agreement{p: 1, dragP: 1, excess: math.Inf(1)}
	var lp, drag spread
	dragGain, long := 0.0, 0
	for i, t := range fit.Tracks {
		if t.LpSD < tellsLp {
			a.modes++
			a.gain += t.Gain
			lp.add(math.Log(t.HeldLpUm/fit.PeakLpUm), t.LpSD)
			if i < longWaves {
				long++
			}
		}
		if t.DragSD < tellsDrag {
			dragGain += t.DragGain
			drag.add(math.Log(t.DragPaS), t.DragSD)
		}
	}
	if a.modes >= 2 {
		a.p = distuv.ChiSquared{K: float64(a.modes - 1)}.Survival(a.gain)
		a.scatter = lp.beyond()
	}
	if long == min(longWaves, len(fit.Tracks)) && a.modes >= 2 {
		a.excess = 0
		for i, x := range lp.x[:long] {
			others, sd := lp.without(i)
			a.excess = math.Max(a.excess, math.Exp(others-x+oneSided95*math.Hypot(sd, lp.sd[i])))
		}
	}
	if len(drag.x) >= 2 {
		a.dragP = distuv.ChiSquared{K: float64(len(drag.x) - 1)}.Survival(dragGain)
		a.dragScatter = drag.beyond()
	}
	return a
}

// impossible says whether the modes disagree beyond doubt, on the persistence length or on the drag, and by much.
func (g agreement) impossible() bool {
	return g.modes >= 2 && (g.p < pNotThermal && g.scatter > notThermal || g.dragP < pNotThermal && g.dragScatter > notLocalDrag)
}

// spread gathers values with their standard deviations.
type spread struct{ x, sd []float64 }

func (s *spread) add(x, sd float64) { s.x, s.sd = append(s.x, x), append(s.sd, sd) }

// without returns the weighted mean of all but value i, and its standard deviation.
func (s spread) without(i int) (mean, sd float64) {
	sw, sx := 0.0, 0.0
	for j, x := range s.x {
		if j != i {
			w := 1 / (s.sd[j] * s.sd[j])
			sw, sx = sw+w, sx+w*x
		}
	}
	return sx / sw, 1 / math.Sqrt(sw)
}

// beyond is the standard deviation between values that their errors do not explain.
func (s spread) beyond() float64 {
	n := float64(len(s.x))
	if n < 2 {
		return 0
	}
	m, v := mean(s.x), 0.0
	for j, x := range s.x {
		v += (x-m)*(x-m)/(n-1) - s.sd[j]*s.sd[j]/n
	}
	return math.Sqrt(math.Max(0, v))
}
