package trace

import (
	"math"
	"math/rand/v2"

	"wend/imaging"
)

// drawing renders lines of light the slow way: short pieces whose Gaussians are integrated over
// each pixel by erf. Positions in pixels, brightness in counts per pixel of length.
type drawing struct {
	frame imaging.Frame
	sigma float64
}

func newDrawing(w, h int, sigma, background float64) drawing {
	d := drawing{imaging.NewFrame(w, h), sigma}
	for i := range d.frame.Pix {
		d.frame.Pix[i] = float32(background)
	}
	return d
}

// line adds the curve at(t), t from 0 to 1, in pieces of about a twentieth of a pixel.
func (d drawing) line(at func(t float64) xy, brightness float64) {
	const fine = 20000
	var fineCurve []xy
	for i := 0; i <= fine; i++ {
		fineCurve = append(fineCurve, at(float64(i)/fine))
	}
	s := arcLengths(fineCurve)
	length := s[fine]
	pieces := int(length * 20)
	k := 0
	edge := func(x, c float64) float64 {
		return (math.Erf((x+0.5-c)/(d.sigma*math.Sqrt2)) - math.Erf((x-0.5-c)/(d.sigma*math.Sqrt2))) / 2
	}
	for i := range pieces {
		target := (float64(i) + 0.5) * length / float64(pieces)
		for s[k+1] < target {
			k++
		}
		c := fineCurve[k].plus(fineCurve[k+1].minus(fineCurve[k]).times((target - s[k]) / (s[k+1] - s[k])))
		light := brightness * length / float64(pieces)
		r := int(6*d.sigma) + 1
		x0, y0 := int(c.x), int(c.y)
		var ex []float64
		for x := x0 - r; x <= x0+r; x++ {
			ex = append(ex, edge(float64(x), c.x))
		}
		for y := max(0, y0-r); y <= min(d.frame.Height-1, y0+r); y++ {
			ey := light * edge(float64(y), c.y)
			for x := max(0, x0-r); x <= min(d.frame.Width-1, x0+r); x++ {
				d.frame.Pix[y*d.frame.Width+x] += float32(ey * ex[x-x0+r])
			}
		}
	}
}

// exposed returns the drawing with shot noise (normal approximation, gain 1) and read noise.
func (d drawing) exposed(rng *rand.Rand, readSD float64) imaging.Frame {
	f := imaging.NewFrame(d.frame.Width, d.frame.Height)
	for i, v := range d.frame.Pix {
		f.Pix[i] = float32(float64(v) + rng.NormFloat64()*math.Sqrt(float64(v)+readSD*readSD))
	}
	return f
}

// acrossError is the distance from p to the nearest point of a curve.
func acrossError(p xy, at func(t float64) xy) float64 { return p.distance(nearestOn(p, at)) }

// nearestOn is the point of a curve nearest to p: the best of 500, then the least distance between its
// neighbours by cutting the stretch in three, which is good to 10⁻⁷ of it.
func nearestOn(p xy, at func(t float64) xy) xy {
	const coarse = 500
	best, from := math.Inf(1), 0.0
	for i := 0; i <= coarse; i++ {
		if d := p.distance(at(float64(i) / coarse)); d < best {
			best, from = d, float64(i-1)/coarse
		}
	}
	to := min(from+2.0/coarse, 1)
	from = max(from, 0)
	for range 40 {
		a, b := from+(to-from)/3, to-(to-from)/3
		if p.distance(at(a)) < p.distance(at(b)) {
			to = b
		} else {
			from = a
		}
	}
	return at((from + to) / 2)
}

// sine is a wave of the given amplitude and number of waves along a slanted axis; off the pixel grid.
func sine(x0, y0, length, slope, amplitude, waves float64) func(t float64) xy {
	return func(t float64) xy {
		return xy{x0 + length*t, y0 + slope*length*t + amplitude*math.Sin(2*math.Pi*waves*t)}
	}
}

// lengthOf is the length of a curve, pixels.
func lengthOf(at func(t float64) xy) float64 {
	var p []xy
	for i := 0; i <= 20000; i++ {
		p = append(p, at(float64(i)/20000))
	}
	return arcLengths(p)[20000]
}

// The images of these tests: a pixel of 0.108 µm and a point-spread function of 0.13 µm, as sharp lines have.
const (
	testPixelUm = 0.108
	testSigmaPx = 0.13 / testPixelUm
)

// testWidthPx is the line's width with the pixel.
var testWidthPx = math.Sqrt(testSigmaPx*testSigmaPx + 1.0/12)

// testTracer traces drawings with gain 1 and the read noise given.
func testTracer(knots, readSD float64) *Tracer {
	t, err := NewTracer(Options{PixelUm: testPixelUm}, Conditions{WidthPx: testWidthPx, KnotWidths: knots, MaxCount: math.Inf(1),
		Camera: imaging.Camera{GainCounts: 1, ReadVariance: readSD * readSD}})
	if err != nil {
		panic(err)
	}
	return t
}

// fitOf returns the fit of the longest line of a frame, from the left end.
func fitOf(t *Tracer, f imaging.Frame) (best fitted, ok bool) {
	t.observe = func(_ *fitter, r fitted) {
		if !ok || r.length > best.length {
			best, ok = r, true
		}
	}
	if _, err := t.Frame(f, 0); err != nil {
		return best, false
	}
	if ok && best.points[0].x > best.points[len(best.points)-1].x {
		best.points = reversed(best.points)
		for i, j := 0, len(best.se)-1; i < j; i, j = i+1, j-1 {
			best.se[i], best.se[j] = best.se[j], best.se[i]
		}
		best.endsSE[0], best.endsSE[1] = best.endsSE[1], best.endsSE[0]
	}
	return best, ok
}
