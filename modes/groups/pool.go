package groups

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/stat/distuv"
)

// Population is what the members of a condition say together.
type Population struct {
	// Preparations that can be told apart, 0 where no member names one; Filaments measured; LowerBounds; Excluded: refused.
	Preparations, Filaments, LowerBounds, Excluded int
	// Mean is the geometric mean of the population with its 95 % interval, NaN where it can't be told.
	Mean, Low, High float64
	// SpreadFilaments and SpreadPreparations are standard deviations of the logarithm; NaN where it can't be told.
	SpreadFilaments, SpreadPreparations float64
}

// Pool estimates the population. With preparations named for some members only, the others are one preparation each. The order of the members does not matter.
func Pool(members []Member) Population {
	nan := math.NaN()
	p := Population{Mean: nan, Low: nan, High: nan, SpreadFilaments: nan, SpreadPreparations: nan}
	units := map[string][]Member{}
	var names []string
	named := false
	for _, m := range members {
		switch m.Status {
		case Measured:
			p.Filaments++
		case Bound:
			p.LowerBounds++
		default:
			p.Excluded++
			continue
		}
		named = named || m.Preparation != ""
	}
	alone := 0
	for _, m := range sorted(members) {
		if m.Status == Refused {
			continue
		}
		name := m.Preparation
		if name == "" {
			alone++
			name = "\x00" + string(rune(alone))
		}
		if units[name] == nil {
			names = append(names, name)
		}
		units[name] = append(units[name], m)
	}
	if named {
		p.Preparations = len(names)
	}
	if p.Filaments == 0 {
		return p
	}
	slices.Sort(names)
	f := &fit{}
	for _, n := range names {
		f.units = append(f.units, units[n])
	}
	f.frame()
	nested := named && p.Filaments+p.LowerBounds > len(names)
	filaments, preparations := f.spreads(nested)
	mu, se := f.mean(filaments, preparations)
	p.Mean = math.Exp(mu)
	if nested {
		p.SpreadPreparations = preparations
	}
	if len(f.units) < 2 {
		if len(f.units[0]) > 1 {
			p.SpreadFilaments = filaments
		}
		return p
	}
	p.SpreadFilaments = filaments
	se = math.Max(se, f.knappHartung(mu, filaments, preparations))
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(len(f.units) - 1)}.Quantile(0.975)
	p.Low, p.High = math.Exp(mu-t*se), math.Exp(mu+t*se)
	return p
}

// sorted puts members into an order of their own, so that sums do not depend on the caller's.
func sorted(members []Member) []Member {
	out := slices.Clone(members)
	slices.SortStableFunc(out, func(a, b Member) int {
		for _, d := range []float64{float64(a.Status - b.Status), a.Low - b.Low, a.Value - b.Value} {
			if d < 0 {
				return -1
			}
			if d > 0 {
				return 1
			}
		}
		return 0
	})
	return out
}

// fit holds the units, preparations or single filaments, and a grid of the logarithm on which all integrals are sums.
type fit struct {
	units [][]Member
	grid  []float64
	step  float64
	dct   *fourier.DCT
	// The units' sums over their members for the spread between filaments that was asked for last.
	sums   [][]float64
	sumsAt float64
}

// frame lays the grid: fine against the sharpest likelihood, wide enough for a spread of a few times what is seen.
func (f *fit) frame() {
	low, high, sharp := math.Inf(1), math.Inf(-1), math.Inf(1)
	for _, u := range f.units {
		for _, m := range u {
			x := math.Log(m.Low)
			if m.Status == Measured {
				x = math.Log(m.Value)
			}
			low, high = math.Min(low, x-5*m.width()), math.Max(high, x+5*m.width())
			sharp = math.Min(sharp, m.width())
		}
	}
	margin := math.Max(1.5, high-low)
	low, high = low-margin, high+margin
	const most = 600
	f.step = math.Max(sharp/3, (high-low)/most)
	for x := low; x <= high; x += f.step {
		f.grid = append(f.grid, x)
	}
}

// member returns ln ∫ L(θ) N(θ; c, sd²) dθ, up to a constant, on the grid of c: a member's likelihood under a spread between filaments.
func (f *fit) member(m Member, sd float64) []float64 {
	out := make([]float64, len(f.grid))
	for i, c := range f.grid {
		out[i] = m.spread(c, sd)
	}
	return out
}

// blurred is a function on the grid averaged under a normal of standard deviation sd; at the ends of the grid it is mirrored.
func (f *fit) blurred(l []float64, sd float64) []float64 {
	n := len(l)
	if f.dct == nil {
		f.dct = fourier.NewDCT(n)
	}
	c := f.dct.Transform(nil, l)
	for k := range c {
		w := math.Pi * float64(k) / (float64(n-1) * f.step) * sd
		c[k] *= math.Exp(-w*w/2) / (2 * float64(n-1))
	}
	return f.dct.Transform(nil, c)
}

func logs(l []float64) []float64 {
	out := make([]float64, len(l))
	for i, v := range l {
		out[i] = math.Log(math.Max(v, 1e-300))
	}
	return out
}

// unitLogs returns for each unit the logarithm of its likelihood as a function of μ on the grid.
func (f *fit) unitLogs(filaments, preparations float64) [][]float64 {
	if f.sums == nil || f.sumsAt != filaments {
		f.sums, f.sumsAt = nil, filaments
		for _, u := range f.units {
			sum := make([]float64, len(f.grid))
			for _, m := range u {
				for i, v := range f.member(m, filaments) {
					sum[i] += v
				}
			}
			f.sums = append(f.sums, sum)
		}
	}
	var out [][]float64
	for _, sum := range f.sums {
		if preparations > 0 {
			top := slices.Max(sum)
			l := make([]float64, len(sum))
			for i, v := range sum {
				l[i] = math.Exp(v - top)
			}
			sum = logs(f.blurred(l, preparations))
			for i := range sum {
				sum[i] += top
			}
		}
		out = append(out, sum)
	}
	return out
}

// total is the log-likelihood of μ on the grid.
func (f *fit) total(filaments, preparations float64) []float64 {
	sum := make([]float64, len(f.grid))
	for _, u := range f.unitLogs(filaments, preparations) {
		for i, v := range u {
			sum[i] += v
		}
	}
	return sum
}

// restricted is the log-likelihood of the spreads with μ integrated out.
func (f *fit) restricted(filaments, preparations float64) float64 {
	t := f.total(filaments, preparations)
	top := slices.Max(t)
	s := 0.0
	for _, v := range t {
		s += math.Exp(v - top)
	}
	return top + math.Log(s*f.step)
}

// spreads are where the restricted likelihood is highest; without nesting all spread is one between filaments.
func (f *fit) spreads(nested bool) (filaments, preparations float64) {
	if len(f.units) == 1 && len(f.units[0]) == 1 {
		return 0, 0
	}
	if !nested {
		return f.climb(func(s float64) float64 { return f.restricted(s, 0) }), 0
	}
	if len(f.units) == 1 {
		return f.climb(func(s float64) float64 { return f.restricted(s, 0) }), 0
	}
	// One after the other, a few times round.
	preparations = 0.1
	for range 3 {
		filaments = f.climb(func(s float64) float64 { return f.restricted(s, preparations) })
		preparations = f.climb(func(s float64) float64 { return f.restricted(filaments, s) })
	}
	return filaments, preparations
}

// climb finds the maximum of g over 0 to 3 on a coarse grid of the square root, then by golden section.
func (f *fit) climb(g func(float64) float64) float64 {
	places := []float64{0, 0.03, 0.06, 0.1, 0.15, 0.22, 0.32, 0.45, 0.65, 0.9, 1.3, 2, 3}
	best, top := 0, math.Inf(-1)
	for i, s := range places {
		if v := g(s); v > top {
			best, top = i, v
		}
	}
	low, high := places[max(0, best-1)], places[min(len(places)-1, best+1)]
	const ratio = 0.6180339887498949
	a, b := high-ratio*(high-low), low+ratio*(high-low)
	ga, gb := g(a), g(b)
	for range 11 {
		if ga >= gb {
			high, b, gb = b, a, ga
			a = high - ratio*(high-low)
			ga = g(a)
		} else {
			low, a, ga = a, b, gb
			b = low + ratio*(high-low)
			gb = g(b)
		}
	}
	if s := (low + high) / 2; g(s) > g(0) {
		return s
	}
	return 0
}

// mean returns where the likelihood of μ is highest, and its standard error from the curvature there.
func (f *fit) mean(filaments, preparations float64) (mu, se float64) {
	return f.top(f.total(filaments, preparations))
}

// top returns the maximum of a log-likelihood on the grid, by a parabola, and the standard error that its curvature gives; a plateau has an infinite one.
func (f *fit) top(t []float64) (x, se float64) {
	i := 0
	for j, v := range t {
		if v > t[i] {
			i = j
		}
	}
	// The parabola through points a likelihood's width apart is less touched by the grid.
	h := 1
	for h < len(t)/4 && i-h > 0 && i+h < len(t)-1 && t[i]-math.Min(t[i-h], t[i+h]) < 0.1 {
		h++
	}
	if i-h < 0 || i+h > len(t)-1 {
		return f.grid[i], math.Inf(1)
	}
	l, m, r := t[i-h], t[i], t[i+h]
	curve := 2*m - l - r
	if !(curve > 0) {
		return f.grid[i], math.Inf(1)
	}
	d := float64(h) * f.step
	return f.grid[i] + d*(r-l)/(2*curve), d / math.Sqrt(curve)
}

// knappHartung is the standard error of the mean from how far the units lie apart: √(Σw(y−μ)²/((k−1)Σw)), each unit at the top of its own likelihood with the weight of its
// width and the spread. Units that only bound the mean from below have no place and no weight.
func (f *fit) knappHartung(mu, filaments, preparations float64) float64 {
	sw, q, k := 0.0, 0.0, 0
	for _, u := range f.unitLogs(filaments, preparations) {
		y, se := f.top(u)
		if math.IsInf(se, 1) {
			continue
		}
		w := 1 / (se * se)
		sw, q, k = sw+w, q+w*(y-mu)*(y-mu), k+1
	}
	if k < 2 {
		return 0
	}
	return math.Sqrt(q / (float64(k-1) * sw))
}
