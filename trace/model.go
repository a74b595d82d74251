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

// startFrom takes the light, the smear and the background of the pass before, if they have the same knots.
func (f *fitter) startFrom(light, smear, under []float64) {
	if len(light) != len(f.lightIdx) || len(smear) != len(f.smearIdx) || len(under) != len(f.underIdx) {
		f.startLight()
		return
	}
	for k, i := range f.lightIdx {
		f.parameters[i] = light[k]
	}
	for k, i := range f.smearIdx {
		f.parameters[i] = smear[k]
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
		m := &f.smearBasis[j]
		for i, w := range m.w {
			f.variance[j] += w * f.parameters[f.smearIdx[m.first+i]]
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
	f.corner = resize(f.corner, len(f.now))
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
		mb := &f.smearBasis[j]
		for k, w := range mb.w {
			slopes[f.smearIdx[mb.first+k]] += wider / 2 * w
		}
		t := g * (dx*f.normals[j].x + dy*f.normals[j].y) * s2
		sb := &f.shapeBasis[j]
		for k, w := range sb.w {
			slopes[f.shapeIdx[sb.first+k]] += t * w
		}
	}
	return model, widthSlope * f.width
}
