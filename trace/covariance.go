package trace

import (
	"math"

	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// curve is the present centreline at arc length s of the reference path: a cubic through that path's nodes, and
// the displacement as it was fitted.
func (f *fitter) curve(s float64) xy {
	n := len(f.nodes)
	x := min(max((s-f.at[0])/(f.at[1]-f.at[0]), 0), float64(n-1))
	k := min(int(x), n-2)
	t := x - float64(k)
	a, b := f.nodes[max(k-1, 0)], f.nodes[k]
	c, d := f.nodes[k+1], f.nodes[min(k+2, n-1)]
	p := func(a, b, c, d float64) float64 {
		return b + t*((c-a)/2+t*(a-2.5*b+2*c-d/2+t*((d-a)/2+1.5*(b-c))))
	}
	u := 0.0
	first, w := f.shape.weights(s)
	for i := range w {
		u += w[i] * f.parameters[f.shapeIdx[first+i]]
	}
	normal := f.normals[k].times(1 - t).plus(f.normals[k+1].times(t))
	return xy{p(a.x, b.x, c.x, d.x), p(a.y, b.y, c.y, d.y)}.plus(normal.times(u))
}

// stops are evenly spaced arc lengths of the reference path from end to end.
func (f *fitter) stops() []float64 {
	e0, e1 := f.parameters[f.endsIdx[0]], f.parameters[f.endsIdx[1]]
	count := max(2, int(math.Round((e1-e0)/(pointSpacing*f.width))))
	out := make([]float64, count+1)
	for i := range out {
		out[i] = e0 + (e1-e0)*float64(i)/float64(count)
	}
	return out
}

// centreline is the present line from end to end.
func (f *fitter) centreline() []xy {
	at := f.stops()
	out := make([]xy, len(at))
	for i, s := range at {
		out[i] = f.curve(s)
	}
	return out
}

// result reads the errors off the factor of the normal equations, which were made within a few hundredths of
// a line width of the fitted parameters.
func (f *fitter) result(points []xy) (fitted, error) {
	shapes := len(f.shapeIdx)
	columns := shapes + 3 // shape, two ends, width
	f.prior(false)
	x := make([]float64, f.size*columns)
	for k, i := range f.shapeIdx {
		x[i*columns+k] = 1
	}
	for k, i := range f.endsIdx {
		x[i*columns+shapes+k] = 1
	}
	// A wider line is one whose smear is larger everywhere, by 2·width per unit of width: pixels tell the two apart
	// only as far as the smear's prior keeps it small. What is left of the width's information is therefore made
	// of that prior; taking the pixels' share from their total would leave only its rounding.
	wider := 2 * f.width
	for k, i := range f.smearIdx {
		x[i*columns+shapes+2] = wider / sq(f.smearPrior(k))
	}
	lapack64.Pbtrs(f.triangle, blas64.General{Rows: f.size, Cols: columns, Stride: columns, Data: x})
	shapeCov := func(a, b int) float64 { return x[f.shapeIdx[a]*columns+b] }

	r := fitted{points: points, width: f.width, pixels: len(f.pixels)}
	r.chi2PerPixel = f.chi2 / float64(max(1, len(f.pixels)-f.size))
	at := f.stops()
	r.se = make([]float64, len(at))
	quadratic := func(first int, w [4]float64) float64 {
		v := 0.0
		for a := range w {
			for b := range w {
				v += w[a] * w[b] * shapeCov(first+a, first+b)
			}
		}
		return v
	}
	for i, s := range at {
		r.se[i] = math.Sqrt(max(quadratic(f.shape.weights(s)), 0))
	}
	lengthening, lengtheningVar := f.lengthening(at, shapeCov)
	r.length = arcLengths(points)[len(points)-1] - lengthening
	r.lengthening = lengthening / r.length

	for k, i := range f.endsIdx {
		r.endsSE[k] = math.Sqrt(max(x[i*columns+shapes+k], 0))
	}
	// A length follows the ends, and a bent line that is shifted to the side of its bend is shorter.
	along := append(f.shortening(at), -1, 1)
	lengthVar := lengtheningVar
	for a, i := range append(f.shapeIdx[:shapes:shapes], f.endsIdx[:]...) {
		for b, w := range along {
			lengthVar += along[a] * w * x[i*columns+b]
		}
	}
	r.lengthSE = math.Sqrt(max(lengthVar, 0))

	remaining, step := 0.0, 0.0
	for k, i := range f.smearIdx {
		held := wider / sq(f.smearPrior(k))
		remaining += held * (wider - x[i*columns+shapes+2])
		step += held * f.parameters[i]
	}
	for i, g := range f.gradient[:f.size] {
		step += x[i*columns+shapes+2] * g
	}
	if remaining > 0 {
		r.widthStep, r.widthSE = step/remaining, 1/math.Sqrt(remaining)
	}
	r.noise = f.noiseDensity(at, shapeCov)

	weight := 0.0
	for j, w := range f.weight {
		r.brightness += w * f.lightNow[j]
		r.meanWidth += w * f.variance[j]
		weight += w
	}
	r.brightness /= weight
	r.meanWidth = math.Sqrt(r.meanWidth / weight)
	for i := range f.pixels {
		p := &f.pixels[i]
		b := &f.underBasis[p.nearest]
		r.background += p.below + b.w[0]*f.parameters[f.underIdx[b.first]] + b.w[1]*f.parameters[f.underIdx[b.first+1]]
	}
	r.background /= float64(len(f.pixels))
	return r, nil
}

// lengthening is by how much the noise of the tangent makes the line longer, half its variance summed along it,
// with the variance of that: of a Gaussian's squares, ½∫∫cov(u′(s), u′(s′))² ds ds′.
func (f *fitter) lengthening(at []float64, cov func(a, b int) float64) (mean, variance float64) {
	step := (at[len(at)-1] - at[0]) / float64(len(at))
	far := int(math.Ceil(4 * f.shape.step / step))
	for i, s := range at {
		a, v := f.shape.slopes(s)
		for j := i; j < min(i+far, len(at)); j++ {
			b, w := f.shape.slopes(at[j])
			c := 0.0
			for k := range v {
				for l := range w {
					c += v[k] * w[l] * cov(a+k, b+l)
				}
			}
			if i == j {
				mean += c / 2 * step
				variance += c * c / 2 * step * step
				continue
			}
			variance += c * c * step * step
		}
	}
	return mean, variance
}

// shortening is the change of the line's length by each shape coefficient, for the bends of the reference path.
func (f *fitter) shortening(at []float64) []float64 {
	out := make([]float64, len(f.shapeIdx), len(f.shapeIdx)+2)
	for j := 1; j+1 < len(f.at); j++ {
		if f.at[j] < at[0] || f.at[j] > at[len(at)-1] {
			continue
		}
		a, b := f.normals[j-1], f.normals[j+1]
		turn := math.Atan2(a.x*b.y-a.y*b.x, a.dot(b)) / 2
		for k, w := range f.shapeBasis[j].w {
			out[f.shapeBasis[j].first+k] -= turn * w
		}
	}
	return out
}

// noiseDensity projects the covariance on long waves: a wave of wavenumber q, normalised to
// ∫ψ² = 1, has the variance P·exp(q²s²).
func (f *fitter) noiseDensity(at []float64, cov func(a, b int) float64) float64 {
	span := at[len(at)-1] - at[0]
	step := at[1] - at[0]
	shapes := len(f.shapeIdx)
	sum, count := 0.0, 0
	v := make([]float64, shapes)
	for wave := 1; wave <= 4; wave++ {
		q := 2 * math.Pi * float64(wave) / span
		if wave > 1 && q*f.width > 0.6 {
			break
		}
		for _, phase := range []float64{0, math.Pi / 2} {
			clear(v)
			for i, s := range at {
				part := step
				if i == 0 || i == len(at)-1 {
					part /= 2
				}
				amplitude := math.Sqrt(2/span) * math.Cos(q*(s-at[0])+phase) * part
				first, w := f.shape.weights(s)
				for k := range w {
					v[first+k] += amplitude * w[k]
				}
			}
			p := 0.0
			for a := range v {
				for b := range v {
					p += v[a] * v[b] * cov(a, b)
				}
			}
			sum += p * math.Exp(-sq(q*f.width))
			count++
		}
	}
	return sum / float64(count)
}
