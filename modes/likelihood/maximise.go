package likelihood

import "math"

// bounds of the parameters, in logarithms.
type bounds struct{ low, high vector }

func (b bounds) clamp(at vector) vector {
	for i := range at {
		at[i] = math.Min(math.Max(at[i], b.low[i]), b.high[i])
	}
	return at
}

// atDragLimit says whether a log drag stands at an end of its range.
func (b bounds) atDragLimit(drag float64) bool {
	const near = 1e-2
	return drag < b.low[paramDrag]+near || drag > b.high[paramDrag]-near
}

// step of the finite differences, in logarithms: small against every width met, large against rounding.
const diffStep = 2e-3

// slopes returns the gradient and the Hessian of f in the parameters that free marks, at a place where f is f0. The places
// tried may lie one step outside the bounds.
func slopes(f func(vector) float64, at vector, f0 float64, free [params]bool) (g vector, h [params][params]float64) {
	const e = diffStep
	for i := range params {
		if !free[i] {
			continue
		}
		up, down := at, at
		up[i] += e
		down[i] -= e
		fu, fd := f(up), f(down)
		g[i] = (fu - fd) / (2 * e)
		h[i][i] = (fu - 2*f0 + fd) / (e * e)
		for j := range i {
			if !free[j] {
				continue
			}
			a, b, c, d := up, up, down, down
			a[j] += e
			b[j] -= e
			c[j] += e
			d[j] -= e
			h[i][j] = (f(a) - f(b) - f(c) + f(d)) / (4 * e * e)
			h[j][i] = h[i][j]
		}
	}
	return g, h
}

// maximise climbs f from start by damped Newton steps in the parameters that free marks, inside b. It returns the place and the
// value; the value is never below that of start.
func maximise(f func(vector) float64, start vector, free [params]bool, b bounds) (vector, float64) {
	at := b.clamp(start)
	value := f(at)
	ridge := 0.0
	for range 60 {
		g, h := slopes(f, at, value, free)
		// A parameter at its bound that would leave it rests in this step.
		moving := free
		for i := range params {
			if free[i] && (at[i] <= b.low[i] && g[i] < 0 || at[i] >= b.high[i] && g[i] > 0) {
				moving[i] = false
			}
		}
		var next vector
		var nextValue, gain float64
		accepted := false
		for range 30 {
			step, ok := newton(g, h, moving, ridge)
			if ok {
				gain = 0
				for i := range params {
					// No step longer than a factor e.
					step[i] = math.Min(math.Max(step[i], -1), 1)
					next[i] = at[i] + step[i]
					gain += math.Abs(g[i] * step[i])
				}
				next = b.clamp(next)
				nextValue = f(next)
				if nextValue >= value {
					accepted = true
					break
				}
				if gain < 1e-9 {
					break
				}
			}
			ridge = math.Max(2*ridge, 1e-3*(1+scale(h, moving)))
			if ridge > 1e12 {
				break
			}
		}
		if !accepted {
			return at, value
		}
		at, value = next, nextValue
		ridge /= 8
		if ridge < 1e-6 {
			ridge = 0
		}
		if gain < 1e-6 {
			return at, value
		}
	}
	return at, value
}

func scale(h [params][params]float64, free [params]bool) float64 {
	s := 0.0
	for i := range params {
		if free[i] {
			s = math.Max(s, math.Abs(h[i][i]))
		}
	}
	return s
}

// newton solves (ridge·1 - h)·step = g over the free parameters; ok is false where that matrix is not positive definite.
func newton(g vector, h [params][params]float64, free [params]bool, ridge float64) (step vector, ok bool) {
	l, ok := cholesky(h, free, ridge)
	if !ok {
		return step, false
	}
	var y vector
	for i := range params {
		if !free[i] {
			continue
		}
		y[i] = g[i]
		for j := range i {
			y[i] -= l[i][j] * y[j]
		}
		y[i] /= l[i][i]
	}
	for i := params - 1; i >= 0; i-- {
		if !free[i] {
			continue
		}
		step[i] = y[i]
		for j := i + 1; j < params; j++ {
			step[i] -= l[j][i] * step[j]
		}
		step[i] /= l[i][i]
	}
	return step, true
}

// cholesky factors ridge·1 - h over the free parameters; rows of the others are those of the unit matrix.
func cholesky(h [params][params]float64, free [params]bool, ridge float64) (l [params][params]float64, ok bool) {
	for i := range params {
		if !free[i] {
			l[i][i] = 1
			continue
		}
		for j := range i + 1 {
			if !free[j] {
				continue
			}
			s := -h[i][j]
			if i == j {
				s += ridge
			}
			for k := range j {
				s -= l[i][k] * l[j][k]
			}
			if i == j {
				if !(s > 0) {
					return l, false
				}
				l[i][i] = math.Sqrt(s)
			} else {
				l[i][j] = s / l[j][j]
			}
		}
	}
	return l, true
}

// widths returns the standard deviations that the curvature of f gives the free parameters at a maximum, +Inf
// where f is flat or curves up.
func widths(h [params][params]float64, free [params]bool) vector {
	var w vector
	for i := range params {
		w[i] = math.Inf(1)
		if !free[i] {
			continue
		}
		var e vector
		e[i] = 1
		if column, ok := newton(e, h, free, 0); ok && column[i] > 0 {
			w[i] = math.Sqrt(column[i])
		}
	}
	return w
}

// contrastSD returns the standard deviation of the drag's parameter less that of Lp at a maximum, +Inf
// where f is flat or curves up.
func contrastSD(h [params][params]float64, free [params]bool) float64 {
	var e vector
	e[paramLp], e[paramDrag] = -1, 1
	c, ok := newton(e, h, free, 0)
	if v := c[paramDrag] - c[paramLp]; ok && v > 0 {
		return math.Sqrt(v)
	}
	return math.Inf(1)
}
