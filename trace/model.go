package trace

import "math"

// pick returns the parameters at the given indices.
func (f *fitter) pick(index []int) []float64 {
	out := make([]float64, len(index))
	for k, i := range index {
		out[k] = f.parameters[i]
	}
	return out
}

// startFrom takes the light, the smear and the background of the pass before, whose ends may have moved
// a little; nil starts from the pixels.
func (f *fitter) startFrom(light, smear, under []float64) {
	if light == nil {
		f.startLight()
		return
	}
	f.put(f.lightIdx, light)
	f.put(f.smearIdx, smear)
	f.put(f.underIdx, under)
}

// put sets the parameters at the given indices to values, stretched to their number.
func (f *fitter) put(index []int, values []float64) {
	for k, i := range index {
		at := float64(k) * float64(len(values)-1) / float64(len(index)-1)
		low := min(int(at), len(values)-2)
		f.parameters[i] = values[low] + (at-float64(low))*(values[low+1]-values[low])
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

// displacement is how far the shape parameters p move the line between its ends, in pixels: at most, and
// as the root of the mean square.
func (f *fitter) displacement(p []float64) (most, typical float64) {
	count := 0
	for j := range f.at {
		if f.weight[j] == 0 {
			continue
		}
		u := 0.0
		b := &f.shapeBasis[j]
		for k, w := range b.w {
			u += w * p[b.index[k]]
		}
		most = max(most, math.Abs(u))
		typical += u * u
		count++
	}
	return most, math.Sqrt(typical / float64(max(1, count)))
}

// place puts the nodes where the parameters say.
func (f *fitter) place() {
	e0, e1 := f.parameters[f.endsIdx[0]], f.parameters[f.endsIdx[1]]
	step := f.at[1] - f.at[0]
	f.lightNow, f.variance = resize(f.lightNow, len(f.at)), resize(f.variance, len(f.at))
	for j, s := range f.at {
		u := 0.0
		b := &f.shapeBasis[j]
		for i, w := range b.w {
			u += w * f.parameters[b.index[i]]
		}
		f.now[j] = f.nodes[j].plus(f.normals[j].times(u))
		l := 0.0
		c := &f.lightBasis[j]
		for i, w := range c.w {
			l += w * f.parameters[c.index[i]]
		}
		f.lightNow[j] = l
		left := min(max((s-e0)/step+0.5, 0), 1)
		right := min(max((e1-s)/step+0.5, 0), 1)
		f.weight[j] = left * right
		f.variance[j] = f.width * f.width
		m := &f.smearBasis[j]
		for i, w := range m.w {
			f.variance[j] += w * f.parameters[m.index[i]]
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

// accumulate builds chi², its gradient and, if normal says so, the normal equations at the present
// parameters. robust gives pixels more than five standard deviations off less weight.
func (f *fitter) accumulate(robust, normal bool) {
	n, stride := f.size, f.bandwidth+1
	f.normal = resize(f.normal, n*stride)
	f.gradient = resize(f.gradient, n)
	f.slopes = resize(f.slopes, n)
	if normal {
		clear(f.normal)
	}
	clear(f.gradient)
	clear(f.slopes)
	f.chi2 = 0
	f.tabulate()
	cut := sq(reach * f.width * 1.2)
	slopes := f.slopes
	for i := range f.pixels {
		p := &f.pixels[i]
		lo, hi := int(p.low), int(p.high)
		model := f.pixelSlopes(p)
		for k, c := range f.endPoint {
			// Moving an end adds or takes away a piece of line there.
			if d2 := sq(p.x-c.x) + sq(p.y-c.y); d2 < cut {
				at := f.endsIdx[k]
				slopes[at] = float64(2*k-1) * f.endLight[k] / (2 * math.Pi * f.endVariance[k]) * math.Exp(-d2/(2*f.endVariance[k]))
				lo, hi = min(lo, at), max(hi, at)
			}
		}
		ub := &f.underBasis[p.nearest]
		u0, u1 := ub.index[0], ub.index[1]
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

		for a := lo; a <= hi; a++ {
			v := slopes[a]
			if v == 0 {
				continue
			}
			v *= weight
			f.gradient[a] += v * residual
			if !normal {
				continue
			}
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
	f.span = 2*int(math.Ceil(reach*f.width*1.4)) + 2
	need := len(f.now) * f.span
	f.alongX, f.alongY = resize(f.alongX, need), resize(f.alongY, need)
	f.drawn = resize(f.drawn, len(f.now))
	norm := (f.at[1] - f.at[0]) / (2 * math.Pi)
	half := float64(f.span)/2 - 1
	for j, c := range f.now {
		s2 := f.variance[j]
		n := drawn{x: c.x, y: c.y, nx: f.normals[j].x, ny: f.normals[j].y, light: f.lightNow[j], inverse: 1 / s2,
			x0: math.Floor(c.x) - half, y0: math.Floor(c.y) - half, dark: f.weight[j] == 0}
		f.drawn[j] = n
		if !n.dark {
			gaussians(f.alongX[j*f.span:(j+1)*f.span], n.x0-c.x, s2, norm/s2*f.weight[j])
			gaussians(f.alongY[j*f.span:(j+1)*f.span], n.y0-c.y, s2, 1)
		}
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

// drawn is a node as the pixels see it.
type drawn struct {
	x, y, nx, ny float64
	light        float64
	inverse      float64 // 1 / variance of the profile
	x0, y0       float64 // the first pixel of its tables
	dark         bool    // beyond an end
}

// pixelSlopes adds up what the nodes within reach of p send there, and leaves the derivatives with
// respect to shape, light and smear in slopes.
func (f *fitter) pixelSlopes(p *pixel) (model float64) {
	slopes, span := f.slopes, f.span
	for j := int(p.first); j <= int(p.last); j++ {
		n := &f.drawn[j]
		if n.dark {
			continue
		}
		ix, iy := int(p.x-n.x0), int(p.y-n.y0)
		if uint(ix) >= uint(span) || uint(iy) >= uint(span) {
			continue
		}
		g := f.alongX[j*span+ix] * f.alongY[j*span+iy]
		lb := &f.lightBasis[j]
		slopes[lb.index[0]] += g * lb.w[0]
		slopes[lb.index[1]] += g * lb.w[1]
		g *= n.light
		model += g
		dx, dy := p.x-n.x, p.y-n.y
		g *= n.inverse
		wider := g * ((dx*dx+dy*dy)*n.inverse - 2)
		wider /= 2
		mb := &f.smearBasis[j]
		slopes[mb.index[0]] += wider * mb.w[0]
		slopes[mb.index[1]] += wider * mb.w[1]
		t := g * (dx*n.nx + dy*n.ny)
		sb := &f.shapeBasis[j]
		slopes[sb.index[0]] += t * sb.w[0]
		slopes[sb.index[1]] += t * sb.w[1]
		slopes[sb.index[2]] += t * sb.w[2]
		slopes[sb.index[3]] += t * sb.w[3]
	}
	return model
}
