package trace

import (
	"errors"

	"gonum.org/v1/gonum/blas/blas64"

	"wend/imaging"
)

const (
	// brightnessKnots and backgroundKnots are the distances between the knots of the line's
	// brightness and of the background beside it, in line widths.
	brightnessKnots = 8
	backgroundKnots = 16
	// nodeSpacing is the distance between the points whose Gaussians add up to the line, in
	// line widths. The trapezoid sum of Gaussians h apart has a ripple of 2·exp(-2π²s²/h²): 2e-6 here.
	nodeSpacing = 1.2
	// pointSpacing is the distance between the points of the resulting centreline, in line widths.
	pointSpacing = 0.75
	// smearKnots is the distance between the knots of the profile's extra variance, in line widths. A
	// filament moves during the exposure, here more and there less, and its free ends twice as far as
	// the rest.
	smearKnots = 6
	// smearSD and endSmearSD are how much that variance is expected to vary, in squared line widths.
	smearSD, endSmearSD = 0.4, 1.0
	// endReach is how far an end may move in one pass, in line widths.
	endReach = 2.5
	// widest is the largest width of the profile, in line widths.
	widest = 2.2
	// endCurvatureSD and endShearSD are how far from straight a free end is taken to be, in radians per line
	// width and per squared line width. It carries neither a bending moment nor a shear force: no bending mode has
	// a curvature there, nor a change of it.
	endCurvatureSD, endShearSD = 0.06, 0.03
	// curvatureSD is how far from its smooth path a line may bend, in radians per line width: so much more than any
	// filament that it only keeps a wide stretch, which moved, from being taken for a zigzag.
	curvatureSD = 2
	// firstKnots is the least distance between the knots of the first pass, in line widths.
	firstKnots = 3
	// reach is how far from the line pixels are used, in line widths.
	reach = 2.7
)

var (
	errFaint  = errors.New("trace: too few pixels along the line")
	errFit    = errors.New("trace: centreline fit did not converge")
	errTooBig = errors.New("trace: centreline fit lost the line")
)

// fitted is a centreline in pixels with what the pixels say about it.
type fitted struct {
	points []xy      // about pointSpacing line widths apart, from end to end
	se     []float64 // standard error across the line at each point
	// length is free of the lengthening by noise; lengthSE and endsSE are standard errors.
	length, lengthSE float64
	lengthening      float64 // that, as a share of the length
	endsSE           [2]float64
	brightness       float64 // counts per pixel of length, the mean
	background       float64 // counts per pixel, the mean beside the line
	noise            float64 // noise density, pixel³
	width            float64 // line width used for the fit, pixel included
	meanWidth        float64 // of the profile with its smear, the root of the mean square along the line
	widthStep        float64 // change of width that the pixels ask for
	widthSE          float64
	chi2PerPixel     float64
	pixels           int
}

// fitter holds the memory of a fit, to be used again. Not for concurrent use.
type fitter struct {
	camera imaging.Camera
	width  float64 // standard deviation of the line's profile, pixel included
	knots  float64 // distance between the knots of the centreline, line widths

	nodes, normals []xy
	at             []float64  // arc length of each node
	now            []xy       // the nodes' present positions
	weight         []float64  // share of each node's piece that lies between the ends
	ends           [2]float64 // of the reference path
	endCurvature   [2]float64 // of the reference path at its ends, along the normal
	endShear       [2]float64 // change of that along the line
	endPoint       [2]xy      // where the ends are now
	endLight       [2]float64 // brightness there
	endVariance    [2]float64 // of the profile there

	shape     cubic
	light     hats
	smear     hats
	under     hats
	shapeIdx  []int // index of each parameter in the normal equations, ordered along the line
	lightIdx  []int
	underIdx  []int
	endsIdx   [2]int
	smearIdx  []int // extra variance of the profile, pixels²
	size      int
	bandwidth int

	shapeBasis []basis4
	lightBasis []basis2
	smearBasis []basis2
	underBasis []basis2

	parameters     []float64
	normal         []float64 // upper band, row-major, bandwidth+1 wide
	gradient       []float64
	chi2           float64
	pixels         []pixel
	nearest        []int32   // per image pixel, index into pixels + 1, for the current band
	variance       []float64 // of the profile at each node, pixels²
	slopes         []float64 // of the pixel in hand, by parameter
	alongX, alongY []float64 // Gaussians of the nodes, span long each
	drawn          []drawn
	span           int
	lightNow       []float64
	trial, before  []float64
	triangle       blas64.TriangularBand // the normal equations' factor
}

// fit fits a centreline that starts from path. pixels (by index) that excluded names are left out;
// excluded may be nil.
func (f *fitter) fit(frame, background imaging.Frame, excluded func(pixel int) bool, path []xy) (fitted, error) {
	const passes = 3
	path = extent(frame, background, excluded, path, f.width)
	// The path begins as pixels, in steps that are shorter than the knots are apart: no displacement could take them
	// out again. Its points are half a pixel apart; what is left are waves that the knots hold.
	path = smooth(path, max(f.knots, firstKnots)*f.width)
	length := arcLengths(path)[len(path)-1]
	ends := [2]float64{0, length}
	var light, smear, under []float64
	for pass := 0; ; pass++ {
		if err := f.prepare(frame, background, excluded, path, ends, pass == 0); err != nil {
			return fitted{}, err
		}
		f.startFrom(light, smear, under)
		moved, err := f.iterate(pass)
		if err != nil {
			return fitted{}, err
		}
		light, smear, under = f.pick(f.lightIdx), f.pick(f.smearIdx), f.pick(f.underIdx)
		path = f.centreline()
		ends = [2]float64{0, arcLengths(path)[len(path)-1]}
		if pass > 0 && moved < 0.6*f.width || pass == passes-1 {
			break
		}
	}
	return f.result(path)
}

func sq(x float64) float64 { return x * x }

// resize gives s the length n, in the same memory where it suffices. New memory is zero, old is not.
func resize[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n)
	}
	return s[:n]
}
