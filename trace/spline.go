package trace

import "math"

// cubic is a uniform cubic B-spline basis on [start, start+cells*step]. Outside, it goes on
// straight with the value and the slope of the nearer end.
type cubic struct {
	start, step float64
	cells       int
}

// cubicOver makes a basis on [from, to] with knots at most step apart.
func cubicOver(from, to, step float64) cubic {
	cells := max(1, int(math.Ceil((to-from)/step)))
	return cubic{start: from, step: (to - from) / float64(cells), cells: cells}
}

func (b cubic) size() int { return b.cells + 3 }

// centre is where basis function k peaks.
func (b cubic) centre(k int) float64 { return b.start + float64(k-1)*b.step }

// weights returns the four basis functions that are not zero at s; the first has the number first.
func (b cubic) weights(s float64) (first int, w [4]float64) {
	x := (s - b.start) / b.step
	end := float64(b.cells)
	inside := min(max(x, 0), end)
	first = min(int(inside), b.cells-1)
	t := inside - float64(first)
	w = cubicValue(t)
	if beyond := x - inside; beyond != 0 {
		d := cubicSlope(t)
		for i := range w {
			w[i] += beyond * d[i]
		}
	}
	return first, w
}

// slopes returns the derivatives with respect to s of the same four functions.
func (b cubic) slopes(s float64) (first int, w [4]float64) {
	x := min(max((s-b.start)/b.step, 0), float64(b.cells))
	first = min(int(x), b.cells-1)
	w = cubicSlope(x - float64(first))
	for i := range w {
		w[i] /= b.step
	}
	return first, w
}

func cubicValue(t float64) [4]float64 {
	r := 1 - t
	return [4]float64{
		r * r * r / 6,
		(4 + t*t*(3*t-6)) / 6,
		(4 + r*r*(3*r-6)) / 6,
		t * t * t / 6,
	}
}

func cubicSlope(t float64) [4]float64 {
	r := 1 - t
	return [4]float64{-r * r / 2, t * (3*t - 4) / 2, -r * (3*r - 4) / 2, t * t / 2}
}

// hats is a basis of straight pieces on [start, start+cells*step], constant outside.
type hats struct {
	start, step float64
	cells       int
}

func hatsOver(from, to, step float64) hats {
	b := cubicOver(from, to, step)
	return hats(b)
}

func (b hats) size() int { return b.cells + 1 }

func (b hats) centre(k int) float64 { return b.start + float64(k)*b.step }

func (b hats) weights(s float64) (first int, w [2]float64) {
	x := min(max((s-b.start)/b.step, 0), float64(b.cells))
	first = min(int(x), b.cells-1)
	t := x - float64(first)
	return first, [2]float64{1 - t, t}
}
