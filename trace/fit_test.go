package trace

import (
	"math"
	"math/rand/v2"
	"testing"

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

// acrossError is the distance from p to the nearest point of a fine curve.
func acrossError(p xy, at func(t float64) xy) float64 {
	best := math.Inf(1)
	for i := 0; i <= 4000; i++ {
		best = min(best, p.distance(at(float64(i)/4000)))
	}
	return best
}

func TestScratchFit(t *testing.T) {
	const px, sigma = 0.108, 0.13 / 0.108
	at := func(u float64) xy {
		return xy{12 + 80*u, 20 + 8*math.Sin(2*math.Pi*u*1.3) + 6*u}
	}
	d := newDrawing(110, 60, sigma, 8)
	d.line(at, 600*px)
	rng := rand.New(rand.NewPCG(1, 2))
	width := math.Sqrt(sigma*sigma + 1.0/12)
	tr, err := NewTracer(Options{PixelUm: px}, Conditions{WidthPx: width, MaxCount: math.Inf(1),
		Camera: imaging.Camera{GainCounts: 1, ReadVariance: 2.25}})
	if err != nil {
		t.Fatal(err)
	}
	for rep := range 3 {
		f := d.exposed(rng, 1.5)
		if rep == 0 {
			f = d.frame
		}
		cs, err := tr.Frame(f, rep)
		if err != nil {
			t.Fatal(err)
		}
		for _, c := range cs {
			sum := 0.0
			var ses []float64
			for _, p := range c.Points {
				e := acrossError(xy{p.XUm / px, p.YUm / px}, at) * px
				sum += e * e
				ses = append(ses, p.SEUm)
			}
			t.Logf("%q n=%d L=%.4f±%.4f rms=%.2f nm  se=%.2f nm width=%.1f photons=%.1f bg=%.1f snr=%.2f P=%.3g ends %v", c.Reason, len(c.Points), c.LengthUm, c.LengthSEUm,
				1e3*math.Sqrt(sum/float64(len(c.Points))), 1e3*median(ses), c.WidthUm*1e3, c.PhotonsPerUm, c.BackgroundPerUm2, c.SNR, c.NoiseUm3, c.EndsSEUm)
		}
		var fine []xy
		for i := 0; i <= 10000; i++ {
			fine = append(fine, at(float64(i)/10000))
		}
		if rep == 0 {
			t.Logf("true length %.4f", arcLengths(fine)[10000]*px)
		}
	}
}

func TestScratchLength(t *testing.T) {
	const px, sigma = 0.108, 0.13 / 0.108
	width := math.Sqrt(sigma*sigma + 1.0/12)
	at := func(u float64) xy {
		return xy{12 + 80.3*u, 20 + 8*math.Sin(2*math.Pi*u*1.3) + 6*u}
	}
	var fine []xy
	for i := 0; i <= 10000; i++ {
		fine = append(fine, at(float64(i)/10000))
	}
	L := arcLengths(fine)[10000]
	d := newDrawing(110, 60, sigma, 8)
	d.line(at, 600*px)
	rng := rand.New(rand.NewPCG(1, 2))
	var raw, cor, e0, e1, rms []float64
	var prof, prse, pn [6]float64
	for rep := range 60 {
		f := d.exposed(rng, 1.5)
		if rep == 0 {
			f = d.frame
		}
		tr, _ := NewTracer(Options{PixelUm: px}, Conditions{WidthPx: width, MaxCount: math.Inf(1),
			Camera: imaging.Camera{GainCounts: 1, ReadVariance: 2.25}})
		var r fitted
		tr.observe = func(_ *fitter, x fitted) { r = x }
		tr.Frame(f, 0)
		p := r.points
		if p[0].x > p[len(p)-1].x {
			p = reversed(p)
		}
		ee0 := p[0].minus(at(0)).dot(at(1e-3).minus(at(0)).unit())
		ee1 := p[len(p)-1].minus(at(1)).dot(at(1).minus(at(1 - 1e-3)).unit())
		s := 0.0
		for i, q := range p {
			e := sq(acrossError(q, at) * px * 1e3)
			k := min(i, len(p)-1-i) / 4
			if rep > 0 {
				prof[min(k, 5)] += e
				prse[min(k, 5)] += sq(r.se[i] * px * 1e3)
				pn[min(k, 5)]++
			}
			if i >= 2 && i < len(p)-2 {
				s += e
			}
		}
		s = math.Sqrt(s / float64(len(p)-4))
		if rep == 0 {
			t.Logf("noiseless: raw %.4f cor %.4f ends %.4f %.4f rms %.2f true %.4f px", arcLengths(p)[len(p)-1]-L, r.length-L, ee0, ee1, s, L)
			continue
		}
		raw = append(raw, arcLengths(p)[len(p)-1]-L)
		cor = append(cor, r.length-L)
		e0 = append(e0, ee0)
		e1 = append(e1, ee1)
		rms = append(rms, s)
	}
	for i := range prof {
		t.Logf("%d %.2f se %.2f", i, math.Sqrt(prof[i]/pn[i]), math.Sqrt(prse[i]/pn[i]))
	}
	mean := func(v []float64) float64 {
		s := 0.0
		for _, x := range v {
			s += x
		}
		return s / float64(len(v))
	}
	t.Logf("px: raw %.4f±%.4f cor %.4f±%.4f e0 %.4f±%.4f e1 %.4f±%.4f rms %.2f nm", mean(raw), spread(raw), mean(cor), spread(cor), mean(e0), spread(e0), mean(e1), spread(e1), mean(rms))
}
