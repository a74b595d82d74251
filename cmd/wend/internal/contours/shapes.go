package main

import (
	"context"
	"fmt"
	"io"
	"math"

	"wend/cmd/wend/internal/movie"
	"wend/imaging"
	"wend/modes"
	"wend/modes/chain"
	"wend/modes/likelihood"
	"wend/trace"
)

// source shows a movie as frames to be traced.
type source struct{ m *movie.Movie }

func (s source) Frames() int { return s.m.Frames() }

func (s source) ReadFrame(t int, dst *imaging.Frame) error {
	s.m.Frame(t, dst)
	return nil
}

// traceMovie makes a movie and follows its filaments; waves above resolvedUm come through.
func traceMovie(ctx context.Context, o movie.Options) (m *movie.Movie, list []trace.Filament, resolvedUm float64, err error) {
	if m, err = movie.New(o); err != nil {
		return nil, nil, 0, err
	}
	hint := trace.CameraHint{GainCounts: math.NaN(), OffsetCounts: math.NaN(), MaxCount: 65535}
	c, list, err := trace.Movie(ctx, source{m}, 0, o.Frames-1, trace.Options{PixelUm: o.PixelUm, MinLengthUm: 2}, hint, 1, nil)
	return m, list, c.ResolvedWidths() * c.WidthPx * o.PixelUm, err
}

// widthUm is the standard deviation of a line's profile with the pixel, µm: a pixel is a box, which blurs like
// the optics, across the line and along it.
func widthUm(o movie.Options) float64 { return math.Sqrt(o.PSFUm*o.PSFUm + o.PixelUm*o.PixelUm/12) }

// boundUm3 is the least noise density of a centreline, s²/(λJ(r)) with J = ∫u²φ²/(φ+r)du and r = βs/λ, for λ
// photons per µm over a background and read variance of β per µm²: the information of Poisson counts about the place of
// a strip of line. A wave of wavenumber q is seen with its amplitude times exp(-q²s²/2), so that its least
// variance is exp(q²s²) times that.
func boundUm3(o movie.Options) float64 {
	s := widthUm(o)
	r := (o.BackgroundPerPx + o.ReadNoiseE*o.ReadNoiseE) / (o.PixelUm * o.PixelUm) * s / o.PhotonsPerUm
	information := 0.0
	const step = 1e-3
	for u := -9.0; u <= 9; u += step {
		phi := math.Exp(-u*u/2) / math.Sqrt(2*math.Pi)
		information += u * u * phi * phi / (phi + r) * step
	}
	return s * s / (o.PhotonsPerUm * information)
}

// bands are ranges of wavelength, µm, from (included) to the next.
var bands = []float64{0.8, 1, 1.5, 3, math.Inf(1)}

// bandOf returns the band of a wavelength, -1 for one that is too short.
func bandOf(wavelengthUm float64) int {
	for b := len(bands) - 2; b >= 0; b-- {
		if wavelengthUm >= bands[b] {
			return b
		}
	}
	return -1
}

// band is what the beam modes of a range of wavelengths add up to; every sum is over modes and frames.
type band struct {
	count                       float64
	across                      float64 // squared error of the displacement over the bound
	predicted                   float64 // its prediction over the bound
	product, truth, noise       float64 // traced × true, true², error² × true²: the regression and its error
	above, aboveTruth, aboveVar float64 // traced² - predicted noise, true², where the true variance exceeds the noise
}

// tally is how a case went.
type tally struct {
	bands            [4]band
	frames, used     int
	lengths, lengthP []float64 // length minus the true one, µm, and its standard error
	trueLength       float64
	resolvedUm       float64
	motion, hidden2  float64 // excess noise × hidden variance, hidden variance²
}

func (t *tally) add(o *tally) {
	for i := range t.bands {
		a, b := &t.bands[i], &o.bands[i]
		for _, v := range [][2]*float64{{&a.count, &b.count}, {&a.across, &b.across},
			{&a.predicted, &b.predicted}, {&a.product, &b.product}, {&a.truth, &b.truth}, {&a.noise, &b.noise},
			{&a.above, &b.above}, {&a.aboveTruth, &b.aboveTruth}, {&a.aboveVar, &b.aboveVar}} {
			*v[0] += *v[1]
		}
	}
	t.frames += o.frames
	t.used += o.used
	t.lengths, t.lengthP = append(t.lengths, o.lengths...), append(t.lengthP, o.lengthP...)
	t.motion += o.motion
	t.hidden2 += o.hidden2
}

// measureShapes traces a movie of one filament and compares every used contour's beam modes and length with those of the
// mean of its true positions during the exposure.
func measureShapes(ctx context.Context, o movie.Options) (*tally, error) {
	m, list, resolvedUm, err := traceMovie(ctx, o)
	if err != nil {
		return nil, err
	}
	t := &tally{frames: o.Frames, trueLength: o.LengthUm, resolvedUm: resolvedUm}
	if len(list) == 0 {
		return t, nil
	}
	longest := list[0]
	for _, f := range list {
		if len(f.Contours) > len(longest.Contours) {
			longest = f
		}
	}
	count := 0
	for bandOf(2*math.Pi/modes.BeamWavenumber(count+1, o.LengthUm)) >= 0 {
		count++
	}
	s, bound := widthUm(o), boundUm3(o)
	square, expected := make([]float64, count), make([]float64, count)
	var traced, truth, across [][]float64
	var density []float64
	for _, c := range longest.Contours {
		if !c.Used() {
			continue
		}
		is := m.Truth(c.Frame)[0]
		line := c.Line()
		points := alongTruth(line, is)
		b := modes.BeamAmplitudes(points, o.LengthUm, count)
		a := modes.BeamAmplitudes(modes.Curve{XUm: is.XUm, YUm: is.YUm}, o.LengthUm, count)
		if math.IsNaN(b[0]) || !(c.NoiseUm3 > 0) {
			continue
		}
		traced, truth, across = append(traced, b), append(truth, a), append(across, displacement(points, is, count))
		density = append(density, c.NoiseUm3)
		t.lengths = append(t.lengths, c.LengthUm-is.SUm[len(is.SUm)-1])
		t.lengthP = append(t.lengthP, c.LengthSEUm)
	}
	t.used = len(traced)
	n := float64(t.used)
	for k := range count {
		q := modes.BeamWavenumber(k+1, o.LengthUm)
		b := &t.bands[bandOf(2*math.Pi/q)]
		gain := math.Exp(q * q * s * s)
		variance, noise := 0.0, 0.0
		for i := range traced {
			x, y, e := truth[i][k], traced[i][k], traced[i][k]-truth[i][k]
			p := density[i] * gain
			square[k] += e * e / n
			expected[k] += p / n
			b.count++
			b.across += across[i][k] * across[i][k] / (bound * gain)
			b.predicted += p / (bound * gain)
			// Every mode has a variance of its own: they weigh by their noise.
			b.product += x * y / (bound * gain)
			b.truth += x * x / (bound * gain)
			b.noise += x * x * e * e / (bound * gain * bound * gain)
			variance += x * x / n
			noise += p / n
		}
		if variance > noise {
			for i := range traced {
				x, y, p := truth[i][k], traced[i][k], density[i]*gain
				b.above += (y*y - p) / variance
				b.aboveTruth += x * x / variance
				d := (y*y - p - x*x) / variance
				b.aboveVar += d * d
			}
		}
		if o.ExposureS > 0 {
			h := likelihood.Hidden(likelihood.ModeProcess(q, o.LpUm, o.DragPaS, o.TempK()), o.ExposureS)
			// A mode's noise is known to a constant share of itself.
			t.motion += n * (square[k] - expected[k]) * h / (expected[k] * expected[k])
			t.hidden2 += n * h * h / (expected[k] * expected[k])
		}
	}
	return t, nil
}

// alongTruth gives the traced points from the end at which the truth begins.
func alongTruth(line []trace.Point, is movie.Contour) modes.Curve {
	var c modes.Curve
	first, last := line[0], line[len(line)-1]
	x, y := is.XUm[0], is.YUm[0]
	back := math.Hypot(last.XUm-x, last.YUm-y) < math.Hypot(first.XUm-x, first.YUm-y)
	for i := range line {
		p := line[i]
		if back {
			p = line[len(line)-1-i]
		}
		c.XUm, c.YUm = append(c.XUm, p.XUm), append(c.YUm, p.YUm)
	}
	return c
}

// displacement projects the distance of the points from the true line, to its left positive, on the first count beam modes.
func displacement(c modes.Curve, is movie.Contour, count int) []float64 {
	out := make([]float64, count)
	n := len(c.XUm)
	length := is.SUm[len(is.SUm)-1]
	step := length / float64(n-1)
	j := 0
	for i := range n {
		// The nearest piece of the truth is never far from the last one.
		best, off, s := math.Inf(1), 0.0, 0.0
		for k := max(0, j-5); k < min(j+10, len(is.XUm)-1); k++ {
			dx, dy := is.XUm[k+1]-is.XUm[k], is.YUm[k+1]-is.YUm[k]
			ex, ey := c.XUm[i]-is.XUm[k], c.YUm[i]-is.YUm[k]
			l := math.Hypot(dx, dy)
			u := (ex*dx + ey*dy) / l
			if d := math.Hypot(ex-min(max(u, 0), l)*dx/l, ey-min(max(u, 0), l)*dy/l); d < best {
				best, off, s, j = d, (dx*ey-dy*ex)/l, is.SUm[k]+u, k
			}
		}
		part := step
		if i == 0 || i == n-1 {
			part /= 2
		}
		for m := range out {
			out[m] += off * chain.BeamMode(m+1, min(max(s/length, 0), 1)) / math.Sqrt(length) * part
		}
	}
	return out
}

const header = `Beam modes of traced contours against the true ones (means over the exposure), by wavelength in µm. error/bound: mean
squared distance from the true line over s²/(λJ)·exp(q²s²), the least that the photons allow a line at rest; noise: its prediction over
what is observed; slope: regression of traced on true amplitudes ± its standard error, wanted 1; variance: that of the traced amplitudes less the predicted noise over the true one, where
it exceeds the noise; length: mean error, and its scatter predicted over observed; motion: the share of the variance hidden by the exposure
that is back as noise; resolved: the shortest wavelength that is meant to come through, µm.

                      frames |  error/bound               |  noise                     |  slope                                                      |  variance                                  | length          |          |
case        light/µm    used | 0.8-1  1-1.5  1.5-3    >3  | 0.8-1  1-1.5  1.5-3    >3  |  0.8-1         1-1.5         1.5-3         >3               |  1-1.5         1.5-3         >3              | bias     pred.  | resolved | motion
`

func (t *tally) print(w io.Writer, name string, light float64) {
	fmt.Fprintf(w, "%-12s %7.0f  %4.0f%%  |", name, light, 100*float64(t.used)/float64(t.frames))
	for _, b := range t.bands {
		fmt.Fprintf(w, "%6.2f ", b.across/b.count)
	}
	fmt.Fprint(w, "|")
	for _, b := range t.bands {
		fmt.Fprintf(w, "%6.2f ", b.predicted/b.across)
	}
	fmt.Fprint(w, "|")
	for _, b := range t.bands {
		fmt.Fprintf(w, " %5.3f ± %-5.3f", b.product/b.truth, math.Sqrt(b.noise)/b.truth)
	}
	fmt.Fprint(w, "|")
	for _, b := range t.bands[1:] {
		if b.aboveTruth == 0 {
			fmt.Fprintf(w, " %-13s", "noise")
			continue
		}
		fmt.Fprintf(w, " %5.3f ± %-5.3f", b.above/b.aboveTruth, math.Sqrt(b.aboveVar)/b.aboveTruth)
	}
	mean, sd := moments(t.lengths)
	p, _ := moments(t.lengthP)
	fmt.Fprintf(w, " | %+5.2f%%  %5.2f  |  %5.2f   |", 100*mean/t.trueLength, p/sd, t.resolvedUm)
	if t.hidden2 > 0 {
		fmt.Fprintf(w, " %+.3f", t.motion/t.hidden2)
	}
	fmt.Fprintln(w)
}

func moments(v []float64) (mean, sd float64) {
	n := float64(len(v))
	for _, x := range v {
		mean += x / n
	}
	for _, x := range v {
		sd += (x - mean) * (x - mean) / (n - 1)
	}
	return mean, math.Sqrt(sd)
}
