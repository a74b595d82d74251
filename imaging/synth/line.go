package synth

import (
	"fmt"
	"math"
)

// Curve is a centreline: points (µm) in order along the filament, joined by straight
// pieces.
type Curve struct{ X, Y []float64 }

// Length returns the length (µm) of c.
func (c Curve) Length() float64 {
	sum := 0.0
	for i := 1; i < len(c.X); i++ {
		sum += math.Hypot(c.X[i]-c.X[i-1], c.Y[i]-c.Y[i-1])
	}
	return sum
}

// Image is the photons that each pixel expects, row by row.
type Image struct {
	Width, Height int
	Pix           []float64
}

// Reset gives im a shape and makes every pixel value.
func (im *Image) Reset(width, height int, value float64) {
	if n := width * height; cap(im.Pix) < n {
		im.Pix = make([]float64, n)
	} else {
		im.Pix = im.Pix[:n]
	}
	im.Width, im.Height = width, height
	for i := range im.Pix {
		im.Pix[i] = value
	}
}

// Optics maps µm to pixels.
type Optics struct {
	// PixelUm is the side of a pixel in the sample and PSFUm the standard deviation of the
	// Gaussian point-spread function, both µm and above 0.
	PixelUm, PSFUm float64
}

// AddLine adds a line of photonsPerUm along c. labels, if not empty, are relative
// brightnesses of equal parts of its length, in order. Fewer than two points, or X and Y of
// unequal length, panic.
func (o Optics) AddLine(im *Image, c Curve, photonsPerUm float64, labels []float64) {
	if len(c.X) < 2 || len(c.X) != len(c.Y) {
		panic(fmt.Sprintf("synth: curve of %d and %d coordinates, want two points or more", len(c.X), len(c.Y)))
	}
	length := c.Length()
	pieces := max(1, int(math.Ceil(length/(o.PSFUm/2))))
	step := length / float64(pieces)
	var st stamp
	i, passed := 0, 0.0 // polyline piece and the arc length at its start
	piece := math.Hypot(c.X[1]-c.X[0], c.Y[1]-c.Y[0])
	for k := range pieces {
		s := (float64(k) + 0.5) * step
		for i < len(c.X)-2 && s > passed+piece {
			passed += piece
			i++
			piece = math.Hypot(c.X[i+1]-c.X[i], c.Y[i+1]-c.Y[i])
		}
		f := 0.0
		if piece > 0 {
			f = math.Min(1, (s-passed)/piece)
		}
		photons := photonsPerUm * step
		if len(labels) > 0 {
			photons *= labels[min(len(labels)-1, int(s/length*float64(len(labels))))]
		}
		st.add(im, o, c.X[i]+f*(c.X[i+1]-c.X[i]), c.Y[i]+f*(c.Y[i+1]-c.Y[i]), photons)
	}
}

// AddPoint adds a point of the given photons at (xUm, yUm).
func (o Optics) AddPoint(im *Image, xUm, yUm, photons float64) {
	var st stamp
	st.add(im, o, xUm, yUm, photons)
}

// cutoff is where the point-spread function ends, in standard deviations.
const cutoff = 5

// stamp is the working memory for one point's image.
type stamp struct{ column []float64 }

func (st *stamp) add(im *Image, o Optics, xUm, yUm, photons float64) {
	x, y, sigma := xUm/o.PixelUm, yUm/o.PixelUm, o.PSFUm/o.PixelUm
	x0, x1 := span(x, sigma, im.Width)
	y0, y1 := span(y, sigma, im.Height)
	if x0 > x1 || y0 > y1 {
		return
	}
	st.column = st.column[:0]
	last := cumulative((float64(x0) - 0.5 - x) / sigma)
	for i := x0; i <= x1; i++ {
		next := cumulative((float64(i) + 0.5 - x) / sigma)
		st.column = append(st.column, next-last)
		last = next
	}
	last = cumulative((float64(y0) - 0.5 - y) / sigma)
	for j := y0; j <= y1; j++ {
		next := cumulative((float64(j) + 0.5 - y) / sigma)
		share := photons * (next - last)
		last = next
		row := im.Pix[j*im.Width+x0 : j*im.Width+x1+1]
		for i, w := range st.column {
			row[i] += share * w
		}
	}
}

// span returns the first and last pixel that a point at x reaches, cut to the image; first
// exceeds last where it reaches none.
func span(x, sigma float64, size int) (first, last int) {
	if !(x+cutoff*sigma >= -0.5 && x-cutoff*sigma <= float64(size)-0.5) {
		return 1, 0
	}
	first = max(0, int(math.Floor(x-cutoff*sigma+0.5)))
	last = min(size-1, int(math.Floor(x+cutoff*sigma+0.5)))
	return first, last
}

// cumulative returns the normal distribution function at z, within 2e-10: cubic
// interpolation of a table, several times as fast as the error function.
func cumulative(z float64) float64 {
	u := (z + tableEnd) * tableSteps
	if !(u > 0) {
		return 0
	}
	i := int(u)
	if i >= len(normal)-1 {
		return 1
	}
	f := u - float64(i)
	a, b := &normal[i], &normal[i+1]
	d := b.value - a.value
	return a.value + f*(a.slope+f*(3*d-2*a.slope-b.slope+f*(a.slope+b.slope-2*d)))
}

const (
	tableEnd   = 7  // standard deviations
	tableSteps = 64 // per standard deviation
)

// normal holds the distribution function and its slope per step.
var normal = func() (table [2*tableEnd*tableSteps + 1]struct{ value, slope float64 }) {
	for i := range table {
		z := float64(i)/tableSteps - tableEnd
		table[i].value = math.Erfc(-z/math.Sqrt2) / 2
		table[i].slope = math.Exp(-z*z/2) / math.Sqrt(2*math.Pi) / tableSteps
	}
	return table
}()
