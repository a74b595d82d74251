package trace

import (
	"math"

	"wend/imaging"
)

// pixel is one pixel of the band around the line.
type pixel struct {
	x, y            float64
	value           float64 // counts above the frame's background
	below           float64 // the frame's background, counts
	first, last     int32   // nodes within reach
	nearest         int32
	model, residual float64 // of the last iteration; model is counts above below
	robust          float64
	low, high       int32 // parameters it depends on
}

// basis4 and basis2 are the basis functions that are not zero at a node: the number of the first, their
// values, and the indices of their coefficients among the parameters.
type basis4 struct {
	first int
	w     [4]float64
	index [4]int32
}

type basis2 struct {
	first int
	w     [2]float64
	index [2]int32
}

// prepare lays the nodes, the bases, the parameters and the band of pixels along path. The first pass, which only has to come
// close, has fewer knots and pixels.
func (f *fitter) prepare(frame, background imaging.Frame, excluded func(pixel int) bool, path []xy, ends [2]float64, first bool) error {
	step := nodeSpacing * f.width
	margin := reach * f.width
	span := ends[1] - ends[0]
	if !(span > 2*f.width) {
		return errTooBig
	}
	inner := max(2, int(math.Round(span/step)))
	step = span / float64(inner)
	outer := int(math.Ceil(margin / step))
	count := inner + 1 + 2*outer
	from := ends[0] - float64(outer)*step
	f.nodes = resample(path, from, step, count)
	f.ends = ends
	f.at = resize(f.at, count)
	f.normals = resize(f.normals, count)
	f.now = append(f.now[:0], f.nodes...)
	f.weight = resize(f.weight, count)
	for j := range f.nodes {
		f.at[j] = from + float64(j)*step
		a, b := f.nodes[max(j-1, 0)], f.nodes[min(j+1, count-1)]
		t := b.minus(a).unit()
		f.normals[j] = xy{-t.y, t.x}
	}
	far := int(math.Ceil(2 * f.width / step))
	for k, j := range [2]int{outer, outer + inner} {
		direction := 1 - 2*k
		f.endCurvature[k] = f.bendAt(j, direction)
		f.endShear[k] = (f.bendAt(j+direction*far, direction) - f.endCurvature[k]) / (float64(direction*far) * step)
	}
	f.layBases(first)
	return f.layPixels(frame, background, excluded, first)
}

// bendAt is the curvature of the reference path at node j, along the normal, from the two line widths
// that follow in the given direction.
func (f *fitter) bendAt(j, direction int) float64 {
	step := f.at[1] - f.at[0]
	far := min(max(j+direction*int(math.Ceil(2*f.width/step)), 0), len(f.nodes)-1)
	span := f.at[far] - f.at[j]
	if span == 0 {
		return 0
	}
	a, b := f.normals[j], f.normals[far]
	// The tangent turns as the normals do; towards the normal is positive.
	return math.Atan2(a.x*b.y-a.y*b.x, a.dot(b)) / span
}

func (f *fitter) layBases(first bool) {
	e0, e1 := f.ends[0], f.ends[1]
	knots := f.knots
	if first {
		knots = max(knots, firstKnots)
	}
	f.shape = cubicOver(e0, e1, knots*f.width)
	f.light = hatsOver(e0, e1, brightnessKnots*f.width)
	f.smear = hatsOver(e0, e1, smearKnots*f.width)
	f.under = hatsOver(e0, e1, backgroundKnots*f.width)
	// Parameters in the order of their place along the line make the normal equations banded.
	type place struct {
		at   float64
		slot *int
	}
	f.shapeIdx = resize(f.shapeIdx, f.shape.size())
	f.lightIdx = resize(f.lightIdx, f.light.size())
	f.smearIdx = resize(f.smearIdx, f.smear.size())
	f.underIdx = resize(f.underIdx, f.under.size())
	f.size = f.shape.size() + f.light.size() + f.smear.size() + f.under.size() + 2
	places := make([]place, 0, f.size)
	places = append(places, place{e0, &f.endsIdx[0]}, place{e1, &f.endsIdx[1]})
	for k := range f.shapeIdx {
		places = append(places, place{f.shape.centre(k), &f.shapeIdx[k]})
	}
	for k := range f.lightIdx {
		places = append(places, place{f.light.centre(k), &f.lightIdx[k]})
	}
	for k := range f.smearIdx {
		places = append(places, place{f.smear.centre(k), &f.smearIdx[k]})
	}
	for k := range f.underIdx {
		places = append(places, place{f.under.centre(k), &f.underIdx[k]})
	}
	for i := 1; i < len(places); i++ { // nearly sorted already
		for j := i; j > 0 && places[j].at < places[j-1].at; j-- {
			places[j], places[j-1] = places[j-1], places[j]
		}
	}
	for i, p := range places {
		*p.slot = i
	}
	n := len(f.at)
	f.shapeBasis, f.lightBasis = resize(f.shapeBasis, n), resize(f.lightBasis, n)
	f.smearBasis, f.underBasis = resize(f.smearBasis, n), resize(f.underBasis, n)
	for j, s := range f.at {
		b := &f.shapeBasis[j]
		b.first, b.w = f.shape.weights(s)
		l := &f.lightBasis[j]
		l.first, l.w = f.light.weights(s)
		m := &f.smearBasis[j]
		m.first, m.w = f.smear.weights(s)
		u := &f.underBasis[j]
		u.first, u.w = f.under.weights(s)
		for k := range b.index {
			b.index[k] = int32(f.shapeIdx[b.first+k])
		}
		for k := range l.index {
			l.index[k] = int32(f.lightIdx[l.first+k])
			m.index[k] = int32(f.smearIdx[m.first+k])
			u.index[k] = int32(f.underIdx[u.first+k])
		}
	}
	f.parameters = resize(f.parameters, f.size)
	clear(f.parameters)
	f.parameters[f.endsIdx[0]], f.parameters[f.endsIdx[1]] = e0, e1
}

// layPixels gathers the pixels within reach of the nodes and the nodes within reach of each.
func (f *fitter) layPixels(frame, background imaging.Frame, excluded func(pixel int) bool, half bool) error {
	r := reach * f.width
	w, h := frame.Width, frame.Height
	f.nearest = resize(f.nearest, w*h)
	f.pixels = f.pixels[:0]
	for j, c := range f.nodes {
		x0, x1 := max(0, int(math.Ceil(c.x-r))), min(w-1, int(math.Floor(c.x+r)))
		y0, y1 := max(0, int(math.Ceil(c.y-r))), min(h-1, int(math.Floor(c.y+r)))
		for y := y0; y <= y1; y++ {
			dy := float64(y) - c.y
			for x := x0; x <= x1; x++ {
				dx := float64(x) - c.x
				d2 := dx*dx + dy*dy
				if d2 > r*r {
					continue
				}
				i := y*w + x
				if k := f.nearest[i]; k > 0 {
					p := &f.pixels[k-1]
					p.last = int32(j)
					if n := f.nodes[p.nearest]; d2 < sq(p.x-n.x)+sq(p.y-n.y) {
						p.nearest = int32(j)
					}
					continue
				}
				if half && (x+y)%2 != 0 || excluded != nil && excluded(i) {
					continue
				}
				below := float64(background.Pix[i])
				f.pixels = append(f.pixels, pixel{x: float64(x), y: float64(y),
					value: float64(frame.Pix[i]) - below, below: below,
					first: int32(j), last: int32(j), nearest: int32(j), robust: 1})
				f.nearest[i] = int32(len(f.pixels))
			}
		}
	}
	for i := range f.pixels {
		p := &f.pixels[i]
		f.nearest[int(p.y)*w+int(p.x)] = 0
	}
	if len(f.pixels) < 2*f.size {
		return errFaint
	}
	f.bandwidth = 0
	for i := range f.pixels {
		p := &f.pixels[i]
		// A node further than reach still counts by its place along the line: without it the blur along the line, and so
		// every short wave, would be taken for less. A pixel beside a fold sees two distant stretches of the line; it
		// belongs to the nearer.
		limit := int32(math.Ceil(3*reach/nodeSpacing)) + 1
		p.first, p.last = max(p.first-1, p.nearest-limit, 0), min(p.last+1, p.nearest+limit, int32(len(f.nodes)-1))
		lo, hi := f.touched(int(p.first), int(p.last), int(p.nearest))
		p.low, p.high = int32(lo), int32(hi)
		f.bandwidth = max(f.bandwidth, hi-lo)
	}
	// Neighbouring shape coefficients are tied by the covariance along the line.
	for k := range f.shapeIdx {
		if k+3 < len(f.shapeIdx) {
			f.bandwidth = max(f.bandwidth, f.shapeIdx[k+3]-f.shapeIdx[k])
		}
	}
	f.bandwidth = min(f.bandwidth, f.size-1)
	return nil
}

// touched returns the lowest and highest parameter that a pixel near the nodes first to last depends
// on; nearest is the node whose background it has.
func (f *fitter) touched(first, last, nearest int) (lo, hi int) {
	under := f.underBasis[nearest].first
	lo = min(f.shapeIdx[f.shapeBasis[first].first], f.lightIdx[f.lightBasis[first].first],
		f.smearIdx[f.smearBasis[first].first], f.underIdx[under])
	hi = max(f.shapeIdx[f.shapeBasis[last].first+3], f.lightIdx[f.lightBasis[last].first+1],
		f.smearIdx[f.smearBasis[last].first+1], f.underIdx[under+1])
	return lo, hi
}
