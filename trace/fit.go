package trace

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"

	"wend/imaging"
)

const (
	// knotsPerWidth is the distance between the knots of the centreline in line widths.
	knotsPerWidth = 4.0
	// ResolvedWidths is the shortest wavelength that a contour carries unchanged, in line widths
	// (the standard deviation of the profile): a little over two knots.
	ResolvedWidths = 2.3 * knotsPerWidth
	// brightnessKnots and backgroundKnots are the distances between the knots of the line's
	// brightness and of the background beside it, in line widths.
	brightnessKnots = 8
	backgroundKnots = 16
	// nodeSpacing is the distance between the points whose Gaussians add up to the line, in
	// line widths. The trapezoid sum of Gaussians h apart has a ripple of 2·exp(-2π²s²/h²): 1e-15 here.
	nodeSpacing = 0.75
	// smearReach is how far an end's own smear reaches along the line, in line widths. A free end
	// moves twice as far as the interior during an exposure (exactly four times the mean square).
	smearReach = 6.0
	// widest is the largest width of the profile at an end, in line widths.
	widest = 2.2
	// reach is how far from the line pixels are used and how far a Gaussian is drawn, in line widths.
	reach = 4.0
)

var (
	errFaint  = errors.New("trace: too few pixels along the line")
	errFit    = errors.New("trace: centreline fit did not converge")
	errTooBig = errors.New("trace: centreline fit lost the line")
)

// fitted is a centreline in pixels with what the pixels say about it.
type fitted struct {
	points []xy      // about nodeSpacing line widths apart, from end to end
	se     []float64 // standard error across the line at each point
	// length is free of the lengthening by noise; lengthSE and endsSE are standard errors.
	length, lengthSE float64
	endsSE           [2]float64
	brightness       float64 // counts per pixel of length, the mean
	background       float64 // counts per pixel, the mean beside the line
	noise            float64 // noise density, pixel³
	width            float64 // line width used for the fit, pixel included
	widthStep        float64 // change of width that the pixels ask for
	widthSE          float64
	chi2PerPixel     float64
	pixels           int
}

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

// fitter holds the memory of a fit, to be used again. Not for concurrent use.
type fitter struct {
	camera imaging.Camera
	width  float64 // standard deviation of the line's profile, pixel included

	nodes, normals []xy
	at             []float64  // arc length of each node
	now            []xy       // the nodes' present positions
	weight         []float64  // share of each node's piece that lies between the ends
	ends           [2]float64 // of the reference path
	endPoint       [2]xy      // where the ends are now
	endLight       [2]float64 // brightness there
	endVariance    [2]float64 // of the profile there

	shape     cubic
	light     cubic
	under     hats
	shapeIdx  []int // index of each parameter in the normal equations, ordered along the line
	lightIdx  []int
	underIdx  []int
	endsIdx   [2]int
	smearIdx  [2]int // extra variance of the profile at the ends
	size      int
	bandwidth int

	shapeBasis []basis4
	lightBasis []basis4
	underBasis []basis2

	parameters     []float64
	normal         []float64 // upper band, row-major, bandwidth+1 wide
	gradient       []float64
	widthColumn    []float64
	widthSum       float64
	widthGradient  float64
	chi2           float64
	pixels         []pixel
	nearest        []int32      // per image pixel, index into pixels + 1, for the current band
	variance       []float64    // of the profile at each node, pixels²
	smear          [][2]float64 // share of each end's extra variance there
	slopes         []float64    // of the pixel in hand, by parameter
	alongX, alongY []float64    // Gaussians of the nodes, span long each
	corner         [][2]float64
	span           int
	lightNow       []float64
	trial          []float64
}

type basis4 struct {
	first int
	w     [4]float64
}

type basis2 struct {
	first int
	w     [2]float64
}

// fit fits a centreline that starts from path. pixels (by index) that excluded names are left out;
// excluded may be nil.
func (f *fitter) fit(frame, background imaging.Frame, excluded func(pixel int) bool, path []xy) (fitted, error) {
	const passes = 3
	path = extent(frame, background, excluded, path, f.width)
	length := arcLengths(path)[len(path)-1]
	ends := [2]float64{0, length}
	var light, under []float64
	var smear [2]float64
	for pass := 0; ; pass++ {
		if err := f.prepare(frame, background, excluded, path, ends); err != nil {
			return fitted{}, err
		}
		f.startFrom(light, under)
		f.parameters[f.smearIdx[0]], f.parameters[f.smearIdx[1]] = smear[0], smear[1]
		moved, err := f.iterate(pass)
		if err != nil {
			return fitted{}, err
		}
		light, under = f.pick(f.lightIdx), f.pick(f.underIdx)
		smear = [2]float64(f.pick(f.smearIdx[:]))
		path = f.centreline()
		ends = [2]float64{0, arcLengths(path)[len(path)-1]}
		if pass > 0 && moved < 0.3*f.width || pass == passes-1 {
			break
		}
	}
	return f.result(path)
}

// prepare lays the nodes, the bases, the parameters and the band of pixels along path.
func (f *fitter) prepare(frame, background imaging.Frame, excluded func(pixel int) bool, path []xy, ends [2]float64) error {
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
	f.normals = resizeXY(f.normals, count)
	f.now = append(f.now[:0], f.nodes...)
	f.weight = resize(f.weight, count)
	for j := range f.nodes {
		f.at[j] = from + float64(j)*step
		a, b := f.nodes[max(j-1, 0)], f.nodes[min(j+1, count-1)]
		t := b.minus(a).unit()
		f.normals[j] = xy{-t.y, t.x}
	}
	f.layBases()
	return f.layPixels(frame, background, excluded)
}

func (f *fitter) layBases() {
	e0, e1 := f.ends[0], f.ends[1]
	f.shape = cubicOver(e0, e1, knotsPerWidth*f.width)
	f.light = cubicOver(e0, e1, brightnessKnots*f.width)
	f.under = hatsOver(e0, e1, backgroundKnots*f.width)
	// Parameters in the order of their place along the line make the normal equations banded.
	type place struct {
		at   float64
		slot *int
	}
	f.shapeIdx = resizeInt(f.shapeIdx, f.shape.size())
	f.lightIdx = resizeInt(f.lightIdx, f.light.size())
	f.underIdx = resizeInt(f.underIdx, f.under.size())
	f.size = f.shape.size() + f.light.size() + f.under.size() + 4
	places := make([]place, 0, f.size)
	places = append(places, place{e0, &f.endsIdx[0]}, place{e0, &f.smearIdx[0]},
		place{e1, &f.endsIdx[1]}, place{e1, &f.smearIdx[1]})
	for k := range f.shapeIdx {
		places = append(places, place{f.shape.centre(k), &f.shapeIdx[k]})
	}
	for k := range f.lightIdx {
		places = append(places, place{f.light.centre(k), &f.lightIdx[k]})
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
	if cap(f.shapeBasis) < n {
		f.shapeBasis, f.lightBasis, f.underBasis = make([]basis4, n), make([]basis4, n), make([]basis2, n)
	}
	f.shapeBasis, f.lightBasis, f.underBasis = f.shapeBasis[:n], f.lightBasis[:n], f.underBasis[:n]
	for j, s := range f.at {
		b := &f.shapeBasis[j]
		b.first, b.w = f.shape.weights(s)
		l := &f.lightBasis[j]
		l.first, l.w = f.light.weights(min(max(s, e0), e1))
		u := &f.underBasis[j]
		u.first, u.w = f.under.weights(s)
	}
	f.parameters = resize(f.parameters, f.size)
	clear(f.parameters)
	f.parameters[f.endsIdx[0]], f.parameters[f.endsIdx[1]] = e0, e1
}

// layPixels gathers the pixels within reach of the nodes and the nodes within reach of each.
func (f *fitter) layPixels(frame, background imaging.Frame, excluded func(pixel int) bool) error {
	r := reach * f.width
	w, h := frame.Width, frame.Height
	f.nearest = resizeInt32(f.nearest, w*h)
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
				if excluded != nil && excluded(i) {
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
		// A pixel beside a fold sees two distant stretches of the line; it belongs to the nearer.
		limit := int32(math.Ceil(3*reach/nodeSpacing)) + 1
		p.first, p.last = max(p.first, p.nearest-limit), min(p.last, p.nearest+limit)
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
	defer func() {
		for k, e := range f.ends {
			if f.at[first] < e+smearReach*f.width && f.at[last] > e-smearReach*f.width {
				lo, hi = min(lo, f.smearIdx[k]), max(hi, f.smearIdx[k])
			}
		}
	}()
	lo = min(f.shapeIdx[f.shapeBasis[first].first], f.lightIdx[f.lightBasis[first].first], f.underIdx[under])
	hi = max(f.shapeIdx[f.shapeBasis[last].first+3], f.lightIdx[f.lightBasis[last].first+3], f.underIdx[under+1])
	return lo, hi
}

// pick returns the parameters at the given indices.
func (f *fitter) pick(index []int) []float64 {
	out := make([]float64, len(index))
	for k, i := range index {
		out[k] = f.parameters[i]
	}
	return out
}

// startFrom takes the light and the background of the pass before, if they have the same knots.
func (f *fitter) startFrom(light, under []float64) {
	if len(light) != len(f.lightIdx) || len(under) != len(f.underIdx) {
		f.startLight()
		return
	}
	for k, i := range f.lightIdx {
		f.parameters[i] = light[k]
	}
	for k, i := range f.underIdx {
		f.parameters[i] = under[k]
	}
}

// startLight sets the brightness parameters from the pixels, as if the line lay where the path is.
func (f *fitter) startLight() {
	// A strip across a line of brightness λ holds λ counts per pixel of length.
	var sum, model float64
	norm := 1 / (math.Sqrt(2*math.Pi) * f.width)
	for i := range f.pixels {
		p := &f.pixels[i]
		if s := f.at[p.nearest]; s < f.ends[0] || s > f.ends[1] {
			continue
		}
		n := f.nodes[p.nearest]
		g := norm * math.Exp(-(sq(p.x-n.x)+sq(p.y-n.y))/(2*f.width*f.width))
		sum += p.value * g
		model += g * g
	}
	start := 1e-3
	if model > 0 && sum > 0 {
		start = sum / model
	}
	for _, i := range f.lightIdx {
		f.parameters[i] = start
	}
}

// iterate runs damped Gauss-Newton steps until nothing moves, and returns the largest
// displacement from the path.
func (f *fitter) iterate(pass int) (moved float64, err error) {
	const steps = 12
	// The first pass only has to bring the path close enough for its normals to be right.
	settled := 0.03 * f.width
	if pass == 0 {
		settled = 0.15 * f.width
	}
	f.place()
	f.accumulate(pass > 0)
	last := f.chi2
	f.trial = resize(f.trial, f.size)
	for step := 0; step < steps; step++ {
		f.prior()
		delta := append(f.trial[:0], f.gradient[:f.size]...)
		if !f.solve(delta) {
			return 0, errFit
		}
		// No step may throw the line off its light.
		move := f.largest(delta)
		scale := min(1, f.width/move)
		before := append([]float64(nil), f.parameters...)
		for halving := 0; ; halving++ {
			for i := range delta {
				f.parameters[i] = before[i] + scale*delta[i]
			}
			f.place()
			f.accumulate(step >= 1 || pass > 0)
			if math.IsNaN(f.chi2) {
				return 0, errFit
			}
			if f.chi2 <= last*1.02 || pass == 0 && step < 2 || halving == 4 {
				break
			}
			scale /= 2
		}
		last = f.chi2
		if scale*move < settled {
			break
		}
	}
	if !(f.parameters[f.endsIdx[1]]-f.parameters[f.endsIdx[0]] > 3*f.width) {
		return 0, errTooBig
	}
	return f.largest(f.parameters), nil
}

// largest is the largest displacement of the line between its ends, in pixels, for shape parameters p.
func (f *fitter) largest(p []float64) float64 {
	most := 0.0
	for j := range f.at {
		if f.weight[j] == 0 {
			continue
		}
		u := 0.0
		b := &f.shapeBasis[j]
		for k, w := range b.w {
			u += w * p[f.shapeIdx[b.first+k]]
		}
		most = max(most, math.Abs(u))
	}
	return most
}

// place puts the nodes where the parameters say.
func (f *fitter) place() {
	e0, e1 := f.parameters[f.endsIdx[0]], f.parameters[f.endsIdx[1]]
	step := f.at[1] - f.at[0]
	f.lightNow, f.variance = resize(f.lightNow, len(f.at)), resize(f.variance, len(f.at))
	if cap(f.smear) < len(f.at) {
		f.smear = make([][2]float64, len(f.at))
	}
	f.smear = f.smear[:len(f.at)]
	for j, s := range f.at {
		u := 0.0
		b := &f.shapeBasis[j]
		for i, w := range b.w {
			u += w * f.parameters[f.shapeIdx[b.first+i]]
		}
		f.now[j] = f.nodes[j].plus(f.normals[j].times(u))
		l := 0.0
		c := &f.lightBasis[j]
		for i, w := range c.w {
			l += w * f.parameters[f.lightIdx[c.first+i]]
		}
		f.lightNow[j] = l
		left := min(max((s-e0)/step+0.5, 0), 1)
		right := min(max((e1-s)/step+0.5, 0), 1)
		f.weight[j] = left * right
		f.variance[j] = f.width * f.width
		for k, e := range f.ends {
			f.smear[j][k] = 0
			if d := math.Abs(s - e); d < smearReach*f.width {
				f.smear[j][k] = sq(1 - sq(d/(smearReach*f.width)))
				f.variance[j] += f.smear[j][k] * f.parameters[f.smearIdx[k]]
			}
		}
		f.variance[j] = min(max(f.variance[j], sq(0.8*f.width)), sq(widest*f.width))
	}
	for k, s := range [2]float64{e0, e1} {
		f.endPoint[k] = f.curve(s)
		x := int(math.Round((s - f.at[0]) / step))
		x = min(max(x, 0), len(f.lightNow)-1)
		f.endLight[k], f.endVariance[k] = max(f.lightNow[x], 0), f.variance[x]
	}
}

// accumulate builds the normal equations and chi² at the present parameters. robust gives pixels
// more than five standard deviations off less weight.
func (f *fitter) accumulate(robust bool) {
	n, stride := f.size, f.bandwidth+1
	f.normal = resize(f.normal, n*stride)
	f.gradient = resize(f.gradient, n)
	f.widthColumn = resize(f.widthColumn, n)
	f.slopes = resize(f.slopes, n)
	clear(f.normal)
	clear(f.gradient)
	clear(f.widthColumn)
	clear(f.slopes)
	f.widthSum, f.widthGradient, f.chi2 = 0, 0, 0
	f.tabulate()
	cut := sq(reach * f.width * 1.2)
	slopes := f.slopes
	for i := range f.pixels {
		p := &f.pixels[i]
		lo, hi := int(p.low), int(p.high)
		model, widthSlope := f.pixelSlopes(p)
		for k, c := range f.endPoint {
			// Moving an end adds or takes away a piece of line there.
			if d2 := sq(p.x-c.x) + sq(p.y-c.y); d2 < cut {
				at := f.endsIdx[k]
				slopes[at] = float64(2*k-1) * f.endLight[k] / (2 * math.Pi * f.endVariance[k]) * math.Exp(-d2/(2*f.endVariance[k]))
				lo, hi = min(lo, at), max(hi, at)
			}
		}
		ub := &f.underBasis[p.nearest]
		u0, u1 := f.underIdx[ub.first], f.underIdx[ub.first+1]
		slopes[u0], slopes[u1] = ub.w[0], ub.w[1]
		under := ub.w[0]*f.parameters[u0] + ub.w[1]*f.parameters[u1]
		residual := p.value - under - model
		weight := 1 / f.camera.Variance(p.below+under+max(model, 0))
		p.robust = 1
		if robust {
			if z := math.Abs(residual) * math.Sqrt(weight); z > 5 {
				p.robust = sq(5 / z)
			}
		}
		weight *= p.robust
		p.model, p.residual = under+model, residual
		f.chi2 += weight * residual * residual
		f.widthSum += weight * widthSlope * widthSlope
		f.widthGradient += weight * widthSlope * residual

		for a := lo; a <= hi; a++ {
			v := slopes[a]
			if v == 0 {
				continue
			}
			v *= weight
			f.gradient[a] += v * residual
			f.widthColumn[a] += v * widthSlope
			right := slopes[a:min(hi+1, a+stride)]
			row := f.normal[a*stride:][:len(right)]
			for b, w := range right {
				row[b] += v * w
			}
		}
		clear(slopes[lo : hi+1])
	}
}

// tabulate writes each node's Gaussian along x and along y, with the node's share of the line in
// the first.
func (f *fitter) tabulate() {
	f.span = 2*int(math.Ceil(reach*f.width*1.2)) + 2
	need := len(f.now) * f.span
	f.alongX, f.alongY = resize(f.alongX, need), resize(f.alongY, need)
	if cap(f.corner) < len(f.now) {
		f.corner = make([][2]float64, len(f.now))
	}
	f.corner = f.corner[:len(f.now)]
	norm := (f.at[1] - f.at[0]) / (2 * math.Pi)
	half := float64(f.span)/2 - 1
	for j, c := range f.now {
		x0, y0 := math.Floor(c.x)-half, math.Floor(c.y)-half
		f.corner[j] = [2]float64{x0, y0}
		s2 := f.variance[j]
		share := norm / s2 * f.weight[j]
		ex, ey := f.alongX[j*f.span:(j+1)*f.span], f.alongY[j*f.span:(j+1)*f.span]
		if share == 0 {
			clear(ex)
			continue
		}
		gaussians(ex, x0-c.x, s2, share)
		gaussians(ey, y0-c.y, s2, 1)
	}
}

// gaussians fills out with scale·exp(-(from+i)²/(2·s2)), by the recurrence of the ratio of neighbours.
func gaussians(out []float64, from, s2, scale float64) {
	value := scale * math.Exp(-from*from/(2*s2))
	ratio := math.Exp(-(2*from + 1) / (2 * s2))
	decay := math.Exp(-1 / s2)
	for i := range out {
		out[i] = value
		value *= ratio
		ratio *= decay
	}
}

// pixelSlopes adds up what the nodes within reach of p send there, and leaves the derivatives with
// respect to shape and light in slopes.
func (f *fitter) pixelSlopes(p *pixel) (model, widthSlope float64) {
	slopes := f.slopes
	for j := int(p.first); j <= int(p.last); j++ {
		c := &f.corner[j]
		ix, iy := int(p.x-c[0]), int(p.y-c[1])
		if uint(ix) >= uint(f.span) || uint(iy) >= uint(f.span) || f.weight[j] == 0 {
			continue
		}
		g := f.alongX[j*f.span+ix] * f.alongY[j*f.span+iy]
		lb := &f.lightBasis[j]
		for k, w := range lb.w {
			slopes[f.lightIdx[lb.first+k]] += g * w
		}
		g *= f.lightNow[j]
		dx, dy := p.x-f.now[j].x, p.y-f.now[j].y
		model += g
		s2 := 1 / f.variance[j]
		wider := g * ((dx*dx+dy*dy)*s2 - 2) * s2
		widthSlope += wider
		if m := f.smear[j]; m[0] != 0 || m[1] != 0 {
			slopes[f.smearIdx[0]] += wider / 2 * m[0]
			slopes[f.smearIdx[1]] += wider / 2 * m[1]
		}
		t := g * (dx*f.normals[j].x + dy*f.normals[j].y) * s2
		sb := &f.shapeBasis[j]
		for k, w := range sb.w {
			slopes[f.shapeIdx[sb.first+k]] += t * w
		}
	}
	return model, widthSlope * f.width
}

// prior adds information so weak that it only decides what the pixels leave open (a dark gap,
// an end without light): shape within 3 widths, brightness within a quarter of its mean.
func (f *fitter) prior() {
	bw := f.bandwidth
	add := func(i int, sd, value float64) {
		f.normal[i*(bw+1)] += 1 / (sd * sd)
		f.gradient[i] -= value / (sd * sd)
	}
	mean := 0.0
	for _, i := range f.lightIdx {
		mean += f.parameters[i]
	}
	mean = max(math.Abs(mean)/float64(len(f.lightIdx)), 1e-6)
	for _, i := range f.shapeIdx {
		add(i, 3*f.width, f.parameters[i])
	}
	for _, i := range f.lightIdx {
		add(i, 0.25*mean, f.parameters[i]-mean)
	}
	for _, i := range f.underIdx {
		add(i, 10*mean/f.width, f.parameters[i])
	}
	for k, i := range f.endsIdx {
		add(i, 3*f.width, f.parameters[i]-f.ends[k])
	}
	for _, i := range f.smearIdx {
		add(i, sq(f.width), f.parameters[i])
	}
}

// factor replaces the normal equations by their Cholesky factor.
func (f *fitter) factor() (blas64.TriangularBand, bool) {
	return lapack64.Pbtrf(blas64.SymmetricBand{Uplo: blas.Upper, N: f.size, K: f.bandwidth,
		Stride: f.bandwidth + 1, Data: f.normal[:f.size*(f.bandwidth+1)]})
}

// solve solves the normal equations for right-hand side b, in place; they are factored in place.
func (f *fitter) solve(b []float64) bool {
	t, ok := f.factor()
	if !ok {
		return false
	}
	lapack64.Pbtrs(t, blas64.General{Rows: f.size, Cols: 1, Stride: 1, Data: b})
	for _, v := range b {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}

func sq(x float64) float64 { return x * x }

func resize(s []float64, n int) []float64 {
	if cap(s) < n {
		return make([]float64, n)
	}
	return s[:n]
}

func resizeInt(s []int, n int) []int {
	if cap(s) < n {
		return make([]int, n)
	}
	return s[:n]
}

func resizeInt32(s []int32, n int) []int32 {
	if cap(s) < n {
		return make([]int32, n)
	}
	return s[:n]
}

func resizeXY(s []xy, n int) []xy {
	if cap(s) < n {
		return make([]xy, n)
	}
	return s[:n]
}
