package trace

import "math"

// xy is a position in pixels.
type xy struct{ x, y float64 }

func (a xy) minus(b xy) xy         { return xy{a.x - b.x, a.y - b.y} }
func (a xy) plus(b xy) xy          { return xy{a.x + b.x, a.y + b.y} }
func (a xy) times(f float64) xy    { return xy{a.x * f, a.y * f} }
func (a xy) dot(b xy) float64      { return a.x*b.x + a.y*b.y }
func (a xy) length() float64       { return math.Hypot(a.x, a.y) }
func (a xy) distance(b xy) float64 { return math.Hypot(a.x-b.x, a.y-b.y) }
func (a xy) unit() xy {
	l := a.length()
	if l == 0 {
		return xy{}
	}
	return xy{a.x / l, a.y / l}
}

// arcLengths returns the length along p up to each of its points.
func arcLengths(p []xy) []float64 {
	s := make([]float64, len(p))
	for i := 1; i < len(p); i++ {
		s[i] = s[i-1] + p[i].distance(p[i-1])
	}
	return s
}

// smooth returns p filtered along its index by a Gaussian of sigma points; the ends stay
// where they are because beyond them the line goes on as its own point reflection.
func smooth(p []xy, sigma float64) []xy {
	n := len(p)
	if n < 3 || sigma <= 0 {
		return append([]xy(nil), p...)
	}
	radius := int(math.Ceil(3 * sigma))
	kernel := make([]float64, radius+1)
	total := 0.0
	for i := range kernel {
		kernel[i] = math.Exp(-float64(i*i) / (2 * sigma * sigma))
		total += kernel[i]
		if i > 0 {
			total += kernel[i]
		}
	}
	at := func(i int) xy {
		switch {
		case i < 0:
			return p[0].times(2).minus(p[min(-i, n-1)])
		case i >= n:
			return p[n-1].times(2).minus(p[max(2*(n-1)-i, 0)])
		}
		return p[i]
	}
	out := make([]xy, n)
	for i := range p {
		sum := p[i].times(kernel[0])
		for d := 1; d <= radius; d++ {
			sum = sum.plus(at(i - d).plus(at(i + d)).times(kernel[d]))
		}
		out[i] = sum.times(1 / total)
	}
	return out
}

// resample returns points along p at the arc lengths from, from+step, …, of which there are
// count, on a curve that runs through the points of p with a continuous tangent. Beyond its
// ends p goes on straight.
func resample(p []xy, from, step float64, count int) []xy {
	s := arcLengths(p)
	n := len(p)
	tangent := func(i int) xy {
		a, b := max(i-1, 0), min(i+1, n-1)
		if s[b] == s[a] {
			return xy{}
		}
		return p[b].minus(p[a]).times(1 / (s[b] - s[a]))
	}
	out := make([]xy, count)
	k := 0
	for i := range out {
		at := from + float64(i)*step
		switch {
		case at <= 0:
			out[i] = p[0].plus(tangent(0).unit().times(at))
			continue
		case at >= s[n-1]:
			out[i] = p[n-1].plus(tangent(n - 1).unit().times(at - s[n-1]))
			continue
		}
		for s[k+1] < at {
			k++
		}
		h := s[k+1] - s[k]
		t := (at - s[k]) / h
		a, b := tangent(k), tangent(k+1)
		t2, t3 := t*t, t*t*t
		out[i] = p[k].times(2*t3 - 3*t2 + 1).plus(a.times(h * (t3 - 2*t2 + t))).
			plus(p[k+1].times(3*t2 - 2*t3)).plus(b.times(h * (t3 - t2)))
	}
	return out
}

// reversed returns p from its other end.
func reversed(p []xy) []xy {
	out := make([]xy, len(p))
	for i := range p {
		out[len(p)-1-i] = p[i]
	}
	return out
}
