package chain

import "math"

// MeanCurve returns the centreline that an exposure over curves shows, as long as they
// differ by less than the width of their image. All have equally many points, those of one
// index the same place of the filament.
//
// Points of one index are averaged first. The filament's motion along itself would shift
// that average where it goes with a change of slope, though the image of the line does not
// show it; so each point then moves along its normal to the mean of where curves cross it.
func MeanCurve(curves []Curve) Curve {
	n := len(curves[0].X)
	mean := Curve{X: make([]float64, n), Y: make([]float64, n)}
	weight := 1 / float64(len(curves))
	for _, c := range curves {
		for i := range n {
			mean.X[i] += c.X[i] * weight
			mean.Y[i] += c.Y[i] * weight
		}
	}
	if len(curves) == 1 || n < 3 {
		return mean
	}
	out := Curve{X: make([]float64, n), Y: make([]float64, n)}
	for i := range n {
		tx, ty := mean.tangent(i)
		offset := 0.0
		for _, c := range curves {
			offset += c.crossing(mean.X[i], mean.Y[i], tx, ty, i) * weight
		}
		out.X[i] = mean.X[i] - offset*ty
		out.Y[i] = mean.Y[i] + offset*tx
	}
	return out
}

// tangent returns the direction of c near point i, (0, 0) where it has none.
func (c Curve) tangent(i int) (tx, ty float64) {
	const reach = 4 // points to each side
	low, high := max(0, i-reach), min(len(c.X)-1, i+reach)
	tx, ty = c.X[high]-c.X[low], c.Y[high]-c.Y[low]
	if norm := math.Hypot(tx, ty); norm > 0 {
		return tx / norm, ty / norm
	}
	return 0, 0
}

// crossing returns how far along the normal (−ty, tx) at (x, y) c crosses it, from point i
// on in the direction in which it comes nearer. Where c ends before, it is prolonged
// straight on, so that the mean of several has no step where one of them ends.
func (c Curve) crossing(x, y, tx, ty float64, i int) (offset float64) {
	along := func(k int) float64 { return (c.X[k]-x)*tx + (c.Y[k]-y)*ty }
	across := func(k int) float64 { return (c.Y[k]-y)*tx - (c.X[k]-x)*ty }
	u := along(i)
	if u == 0 {
		return across(i)
	}
	step := 1
	if u > 0 {
		step = -1
	}
	k := i + step
	for ; k >= 0 && k < len(c.X); k += step {
		next := along(k)
		if (next >= 0) != (u >= 0) {
			f := u / (u - next)
			w := across(k - step)
			return w + f*(across(k)-w)
		}
		u = next
	}
	end := k - step
	ex, ey := c.tangent(end)
	forward := ex*tx + ey*ty
	if !(forward > 0.2) { // across the normal: nothing to prolong
		return across(end)
	}
	return across(end) - along(end)*(ey*tx-ex*ty)/forward
}
