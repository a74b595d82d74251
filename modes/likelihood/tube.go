package likelihood

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Tube is what the modes say about a harmonic tube around the filament.
type Tube struct {
	// Gain is twice what the log-likelihood gains by a tube. For a free filament it is 0 half of the times and
	// chi-squared with one degree of freedom the other half.
	Gain float64
	// Ratio is γ/(κk₁⁴), the tube's stiffness over that of the first mode: the free variance of mode n is divided by 1 + Ratio·(k₁/k_n)⁴.
	// Low is 0 where no tube is as likely.
	Ratio Interval
}

// Confinement compares the free filament, as [Fit] found it, with one in a harmonic tube. The modes of a rod with free ends
// stay those of the free rod, with κk⁴ + γ in the place of κk⁴.
func Confinement(d Data, o Options, free Result) (Tube, error) {
	if err := d.check(); err != nil {
		return Tube{}, err
	}
	o.Confined = true
	m, b, mask := newModel(d, o), o.bounds(), o.free(d)
	best, top := intoTube(m, free.peak, free.LogLikelihood, mask, b)
	_, h := slopes(m.value, best, top, mask)
	p := profile(m.value, best, top, paramTube, mask, widths(h, mask)[paramTube], b)
	// At the edge of what is possible the gain is halved, and so is the tail.
	level := distuv.ChiSquared{K: 1}.Quantile(2*o.Confidence-1) / 2
	i := interval(p, best[paramTube], level)
	t := Tube{Gain: math.Max(0, 2*(top-free.LogLikelihood)), Ratio: Interval{i.Value - 1, i.Low - 1, i.High - 1}}
	t.Ratio.Low = math.Max(0, t.Ratio.Low)
	return t, nil
}

// intoTube climbs from the best free filament with a tube added, from weak and from strong ones.
func intoTube(m *model, at vector, top float64, free [params]bool, b bounds) (vector, float64) {
	best := at
	for _, x := range []float64{0, 0.5, 5, 50} {
		start := at
		start[paramTube] = math.Log1p(x)
		if p, v := maximise(m.value, start, free, b); v > top {
			best, top = p, v
		}
	}
	return best, top
}
