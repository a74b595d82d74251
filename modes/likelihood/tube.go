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

// TubePerUm3 returns γ/kT, 1/µm³, of the harmonic tube in which an infinite filament of persistence length lpUm, µm, has the rms displacement rmsUm, µm, in
// each transverse direction: ⟨y²⟩ = kT/(2√2 κ^¼ γ^¾).
func TubePerUm3(rmsUm, lpUm float64) float64 {
	return math.Pow(2*math.Sqrt2*math.Sqrt(math.Sqrt(lpUm))*rmsUm*rmsUm, -4.0/3)
}

// searchTube climbs from the best places of a coarse grid of stiffness, drag and tube.
func searchTube(f func(vector) float64, free [params]bool, b bounds) (vector, float64) {
	var at vector
	top := math.Inf(-1)
	for z := math.Log(1.5e-3); z < math.Log(2); z += 2.2 {
		best, value := vector{}, math.Inf(-1)
		for x := math.Log(0.5); x < math.Log(500); x += 1.4 {
			for y := math.Log(0.01); y < math.Log(20); y += 0.9 {
				place := b.clamp(vector{paramLp: x, paramDrag: z, paramTube: y})
				if v := f(place); v > value {
					best, value = place, v
				}
			}
		}
		if p, v := maximise(f, best, free, b); v > top {
			at, top = p, v
		}
	}
	return at, top
}

// polynomials are powers of time, one column a degree from 0 on, scaled to −1 to 1 over the movie.
func polynomials(timesS []float64, degree int) [][]float64 {
	first, last := timesS[0], timesS[len(timesS)-1]
	out := make([][]float64, degree+1)
	for _, t := range timesS {
		x, p := 2*(t-first)/(last-first)-1, 1.0
		for j := range out {
			out[j] = append(out[j], p)
			p *= x
		}
	}
	return out
}

// FreeGain returns twice by how much the tube of a fit in a network is more likely than none.
func FreeGain(r Result) float64 {
	n := len(r.TubeProfile.Drop)
	if n == 0 || !(r.TubeProfile.X[n-1] > math.Log(mostRmsUm)-0.01) {
		// The profile ended far down before it came to no tube.
		return 2 * profileDepth
	}
	return 2 * r.TubeProfile.Drop[n-1]
}

// intoTube climbs from the best free filament with a tube added, from weak and from strong ones.
func intoTube(m *model, at vector, top float64, free [params]bool, b bounds) (vector, float64) {
	best := at
	for _, x := range []float64{0.3, 8} {
		start := at
		start[paramTube] = math.Log1p(x)
		if p, v := maximise(m.value, start, free, b); v > top {
			best, top = p, v
		}
	}
	return best, top
}
