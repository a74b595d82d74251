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
	at                []vector // all parameters at each place
}

// At returns the drop at x by cubic Hermite interpolation, outside the places by their last values.
func (p Profile) At(x float64) float64 {
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

// mean is the mean of x with the likelihood as its density, which lies between the peaks where there are two.
func (p Profile) mean() float64 {
	n := len(p.X)
	if n < 2 {
		return p.X[0]
	}
	const steps = 400
	sum, first := 0.0, 0.0
	for i := range steps {
		x := p.X[0] + (p.X[n-1]-p.X[0])*(float64(i)+0.5)/steps
		w := math.Exp(-p.At(x))
		sum, first = sum+w, first+w*x
	}
	return first / sum
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
		if p.At(mid) > level {
			outside = mid
		} else {
			inside = mid
		}
	}
	return inside
}

// profileDepth is how far down, in log-likelihood, a profile is followed.
const profileDepth = 9

// profile follows the maximum of f over the other free parameters as parameter which moves away from best, where f is top.
func profile(f func(vector) float64, best vector, top float64, which int, free [params]bool, width float64, b bounds) Profile {
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
	follow := func(side float64) (places []vector, drop, slopes []float64, flat bool) {
		at, last := best, 0.0
		step := 0.6 * width
		for range 60 {
			end := b.high[which]
			if side < 0 {
				end = b.low[which]
			}
			if (end-at[which])*side <= 1e-9 {
				return places, drop, slopes, true
			}
			next := at
			next[which] += side * step
			if (end-next[which])*side < 0 {
				next[which] = end
			}
			next, v := maximise(f, next, free, b)
			d := top - v
			places, drop, slopes = append(places, next), append(drop, d), append(slopes, slope(next))
			at = next
			if d > profileDepth {
				return places, drop, slopes, false
			}
			switch grown := d - last; {
			case grown < 0.3:
				step *= 1.7
			case grown > 1.5:
				step *= 0.7
			}
			last = d
		}
		return places, drop, slopes, true
	}
	var p Profile
	add := func(at vector, drop, slope float64) {
		p.X, p.Drop, p.Slope = append(p.X, at[which]), append(p.Drop, drop), append(p.Slope, slope)
		p.at = append(p.at, at)
	}
	var places []vector
	var drops, slopesAt []float64
	places, drops, slopesAt, p.FlatLow = follow(-1)
	for i := len(places) - 1; i >= 0; i-- {
		add(places[i], drops[i], slopesAt[i])
	}
	add(best, 0, 0)
	places, drops, slopesAt, p.FlatHigh = follow(1)
	for i := range places {
		add(places[i], drops[i], slopesAt[i])
	}
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

// place returns the parameters at the place nearest to x.
func (p Profile) place(x float64) vector {
	i := sort.SearchFloat64s(p.X, x)
	if i == len(p.X) || i > 0 && x-p.X[i-1] < p.X[i]-x {
		i--
	}
	return p.at[i]
}

// LpNear returns the persistence length, µm, at the place nearest to x.
func (p Profile) LpNear(x float64) float64 { return math.Exp(p.place(x)[paramLp]) }
