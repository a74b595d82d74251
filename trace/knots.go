package trace

import "math"

const (
	// finestKnots and coarsestKnots bound the distance between the knots of a centreline, in line widths. Waves
	// of less than 5.7 line widths, the shortest that the finest carry, are seen with less than 0.55 of their
	// amplitude, and to see them as they are costs more than three times the noise.
	finestKnots, coarsestKnots = 2.2, 8
	// largestError is how far off a centreline may be by its noise, in line widths, before short waves are given up for it: at 600 photons per µm a
	// contour is good to some 12 nm and shows waves from 1.3 µm on, at 2000 from 0.8 µm on. (Up to a quarter of the width the errors would still
	// be those of the normal equations: a fit finds out about a line's place from where its profile is steep.)
	largestError = 0.075
	// mostLengthening is the share by which the noise of its tangent may lengthen a line: half a tangent's variance, which
	// is then 0.3 rad.
	mostLengthening = 0.045
)

// chooseKnots returns the least distance between knots, in line widths, at which a centreline of noise density p, in
// cubed line widths, is off by no more than largestError. What a wave's noise is does not depend on the shape,
// so that neither do the knots: contours of straight and of bent lines carry the same waves.
func chooseKnots(p float64) float64 {
	if !(p > 0) {
		return firstKnots
	}
	// Knots h apart carry waves up to the wavenumber π/h, each with the noise p·exp(q²): the variance of a point
	// is the integral of that over q, over π.
	const step = 0.005
	variance, q := 0.0, 0.0
	for q < math.Pi/finestKnots {
		variance += p / math.Pi * math.Exp(sq(q+step/2)) * step
		if q += step; variance > sq(largestError) {
			break
		}
	}
	return min(max(math.Pi/q, finestKnots), coarsestKnots)
}

// knotNoise is the noise density for [chooseKnots]: the predicted one, and more for a line that is wider than others
// because it moved. Its profile is no Gaussian, and its errors are larger than predicted by about the square of how
// much its variance is larger.
func (r fitted) knotNoise() float64 {
	return r.noise / math.Pow(r.width, 3) * max(1, math.Pow(r.meanWidth/r.width, 4))
}
