package trace

import (
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// iterate runs damped Gauss-Newton steps until nothing moves, and returns the largest displacement
// from the path. The first pass starts far away: it sees half of the pixels and makes the normal
// equations anew at every other step. The later ones start close and keep them for four steps; their
// factor is what the errors are read off.
func (f *fitter) iterate(pass int) (moved float64, err error) {
	const steps = 12
	// The first pass only has to bring the path close enough for its normals to be right.
	settled, keep := 0.015*f.width, 4
	if pass == 0 {
		settled, keep = 0.1*f.width, 2
	}
	f.place()
	f.accumulate(pass > 0, true)
	last := f.chi2
	f.trial = resize(f.trial, f.size)
	for step := 0; step < steps; step++ {
		fresh := step%keep == 0
		if fresh && step > 0 {
			f.accumulate(true, true)
		}
		f.prior(fresh)
		if fresh && !f.factor() {
			return 0, errFit
		}
		delta := append(f.trial[:0], f.gradient[:f.size]...)
		if !f.solve(delta) {
			return 0, errFit
		}
		// No step may throw the line off its light.
		move, typical := f.displacement(delta)
		scale := min(1, f.width/move)
		f.before = append(f.before[:0], f.parameters...)
		for halving := 0; ; halving++ {
			for i := range delta {
				f.parameters[i] = f.before[i] + scale*delta[i]
			}
			for k, i := range f.endsIdx { // there are nodes and pixels only so far beyond the path
				f.parameters[i] = min(max(f.parameters[i], f.ends[k]-endReach*f.width), f.ends[k]+endReach*f.width)
			}
			f.place()
			f.accumulate(step >= 1 || pass > 0, false)
			if math.IsNaN(f.chi2) {
				return 0, errFit
			}
			if f.chi2 <= last*1.02 || pass == 0 && step < 2 || halving == 4 {
				break
			}
			scale /= 2
		}
		last = f.chi2
		if scale*typical < settled {
			break
		}
	}
	if !(f.parameters[f.endsIdx[1]]-f.parameters[f.endsIdx[0]] > 3*f.width) {
		return 0, errTooBig
	}
	moved, _ = f.displacement(f.parameters)
	return moved, nil
}

// Differences of the B-spline coefficients nearest to an end, over powers of the knot distance, are derivatives:
// the second at the end itself, the third in the cell that begins there.
var (
	secondDifference = [3]float64{1, -2, 1}
	thirdDifference  = [4]float64{-1, 3, -3, 1}
)

// tie adds the information that scale times the given difference of the shape coefficients, the first of them from
// coefficients away from end k, is want within sd.
func (f *fitter) tie(k, from int, difference []float64, scale, want, sd float64, normal bool) {
	if len(f.shapeIdx) < from+len(difference) {
		return
	}
	index := func(m int) int {
		m += from
		if k == 1 {
			m = len(f.shapeIdx) - 1 - m
		}
		return f.shapeIdx[m]
	}
	have := 0.0
	for m, d := range difference {
		have += scale * d * f.parameters[index(m)]
	}
	weight := 1 / (sd * sd)
	for m, d := range difference {
		i := index(m)
		f.gradient[i] += weight * scale * d * (want - have)
		if !normal {
			continue
		}
		for n, e := range difference {
			if j := index(n); j >= i {
				f.normal[i*(f.bandwidth+1)+j-i] += weight * scale * d * scale * e
			}
		}
	}
}

// prior adds information so weak that it only decides what the pixels leave open (a dark gap,
// an end without light): shape within 3 widths, brightness within a quarter of its mean. It is added to
// the gradient and, if normal says so, to the normal equations.
func (f *fitter) prior(normal bool) {
	bw := f.bandwidth
	add := func(i int, sd, value float64) {
		if normal {
			f.normal[i*(bw+1)] += 1 / (sd * sd)
		}
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
	// A free end carries no bending moment and no shear force.
	h := f.shape.step
	for k := range f.endCurvature {
		f.tie(k, 0, secondDifference[:], 1/(h*h), -f.endCurvature[k], endCurvatureSD/f.width, normal)
		f.tie(k, 0, thirdDifference[:], float64(1-2*k)/(h*h*h), -f.endShear[k], endShearSD/sq(f.width), normal)
	}
	for from := 1; from < len(f.shapeIdx)-3; from++ {
		f.tie(0, from, secondDifference[:], 1/(h*h), 0, curvatureSD/f.width, normal)
	}
	for k, i := range f.smearIdx {
		add(i, f.smearPrior(k), f.parameters[i])
	}
}

// smearPrior is the standard deviation that smear coefficient k is expected to have, pixels².
func (f *fitter) smearPrior(k int) float64 {
	if k == 0 || k == len(f.smearIdx)-1 {
		return endSmearSD * sq(f.width)
	}
	return smearSD * sq(f.width)
}

// factor replaces the normal equations by their Cholesky factor, and tells whether there is one.
func (f *fitter) factor() bool {
	var ok bool
	f.triangle, ok = lapack64.Pbtrf(blas64.SymmetricBand{Uplo: blas.Upper, N: f.size, K: f.bandwidth,
		Stride: f.bandwidth + 1, Data: f.normal[:f.size*(f.bandwidth+1)]})
	return ok
}

// solve solves the factored normal equations for the right-hand side b, in place.
func (f *fitter) solve(b []float64) bool {
	lapack64.Pbtrs(f.triangle, blas64.General{Rows: f.size, Cols: 1, Stride: 1, Data: b})
	for _, v := range b {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}
