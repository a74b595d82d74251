package likelihood

import (
	"math"
	"sort"
)

// Profile is the log-likelihood of one parameter, maximised over the others, at places around its
// maximum. X ascends, in natural logarithms of the parameter's unit; Drop is how far the log-likelihood lies below
// its maximum, 0 or more, and Slope its derivative. FlatLow and FlatHigh say that Drop no longer grows at that end
// within the range searched.
type Profile struct {
	X, Drop, Slope    []float64
	FlatLow, FlatHigh bool
}

// at returns the drop at x by cubic Hermite interpolation, outside the places by their last values.
func (p Profile) at(x float64) float64 {
	n := len(p.X)
	if n == 0 {
		return math.NaN()
	}
	i := sort.SearchFloat64s(p.X, x)
	if i == 0 {
		return p.Drop[0]
	}
	if i == n {
		return p.Drop[n-1]
	}
	w := p.X[i] - p.X[i-1]
	t := (x - p.X[i-1]) / w
	a, b := p.Drop[i-1], p.Drop[i]
	if w > 2 {
		return a + t*(b-a)
	}
	u := 1 - t
	return a*(1+2*t)*u*u + b*(1+2*u)*t*t + w*t*u*(u*p.Slope[i-1]-t*p.Slope[i])
}

// crossing returns where the drop passes level on the way from the maximum at peak to lower (side -1) or higher (side
// +1) values, or ±Inf where it does not.
func (p Profile) crossing(peak, level float64, side int) float64 {
	n := len(p.X)
	i := sort.SearchFloat64s(p.X, peak)
	inside := peak
	if side > 0 {
		for ; i < n; i++ {
			if p.Drop[i] > level {
				break
			}
			inside = math.Max(peak, p.X[i])
		}
		if i == n {
			return math.Inf(1)
		}
	} else {
		if i == n || p.X[i] > peak {
			i--
		}
		for ; i >= 0; i-- {
			if p.Drop[i] > level {
				break
			}
			inside = math.Min(peak, p.X[i])
		}
		if i < 0 {
			return math.Inf(-1)
		}
	}
	outside := p.X[i]
	for range 60 {
		mid := (inside + outside) / 2
		if p.at(mid) > level {
			outside = mid
		} else {
			inside = mid
		}
	}
	return inside
}

// moments returns mean and standard deviation of the parameter's logarithm under the profile taken as a density.
func (p Profile) moments() (mean, sd float64) {
	n := len(p.X)
	if n < 3 {
		return math.NaN(), math.NaN()
	}
	var w, wx, wxx float64
	const cells = 12
	x0 := p.X[n/2]
	for i := 1; i < n; i++ {
		for c := range cells {
			h := (p.X[i] - p.X[i-1]) / cells
			x := p.X[i-1] + (float64(c)+0.5)*h
			m := math.Exp(-p.at(x)) * h
			w += m
			wx += m * (x - x0)
			wxx += m * (x - x0) * (x - x0)
		}
	}
	mean = wx / w
	return x0 + mean, math.Sqrt(math.Max(0, wxx/w-mean*mean))
}

// profileDepth is how far down, in log-likelihood, a profile is followed.
const profileDepth = 9

// profile follows the maximum of f over the other parameters as parameter which moves away from best, where f is top.
func profile(f func(vector) float64, best vector, top float64, which int, width float64, b bounds) Profile {
	free := [params]bool{true, true, true}
	free[which] = false
	if !(width > 1e-3) {
		width = 1e-3
	}
	width = math.Min(width, 0.5)
	slope := func(at vector) float64 {
		up, down := at, at
		up[which] += diffStep
		down[which] -= diffStep
		return -(f(up) - f(down)) / (2 * diffStep)
	}
	follow := func(side float64) (x, drop, slopes []float64, flat bool) {
		at, last := best, 0.0
		step := 0.6 * width
		for range 60 {
			end := b.high[which]
			if side < 0 {
				end = b.low[which]
			}
			if (end-at[which])*side <= 1e-9 {
				return x, drop, slopes, true
			}
			next := at
			next[which] += side * step
			if (end-next[which])*side < 0 {
				next[which] = end
			}
			next, v := maximise(f, next, free, b)
			d := top - v
			x, drop, slopes = append(x, next[which]), append(drop, d), append(slopes, slope(next))
			at = next
			if d > profileDepth {
				return x, drop, slopes, false
			}
			switch grown := d - last; {
			case grown < 0.3:
				step *= 1.7
			case grown > 1.5:
				step *= 0.7
			}
			last = d
		}
		return x, drop, slopes, true
	}
	var p Profile
	x, d, s, flat := follow(-1)
	p.FlatLow = flat
	for i := len(x) - 1; i >= 0; i-- {
		p.X, p.Drop, p.Slope = append(p.X, x[i]), append(p.Drop, d[i]), append(p.Slope, s[i])
	}
	p.X, p.Drop, p.Slope = append(p.X, best[which]), append(p.Drop, 0), append(p.Slope, 0)
	x, d, s, flat = follow(1)
	p.FlatHigh = flat
	p.X, p.Drop, p.Slope = append(p.X, x...), append(p.Drop, d...), append(p.Slope, s...)
	// A better place found on the way becomes the zero.
	low := 0.0
	for _, d := range p.Drop {
		low = math.Min(low, d)
	}
	for i := range p.Drop {
		p.Drop[i] -= low
	}
	return p
}
