package trace

import (
	"errors"
	"fmt"
	"math"

	"wend/imaging"
)

// Source gives the frames of one movie. ReadFrame must be safe for concurrent use.
type Source interface {
	Frames() int
	ReadFrame(t int, dst *imaging.Frame) error
}

// ErrNoFrames is returned where a movie has no frame to trace.
var ErrNoFrames = errors.New("trace: the movie has no frames")

// CameraHint holds what is known of the camera beforehand; NaN for what is not.
type CameraHint struct {
	GainCounts, OffsetCounts float64
	MaxCount                 float64
}

const (
	surveyFrames = 12
	// surveyLines is about how many lines are enough.
	surveyLines = 40
	// firstWidthPx is the line width that a survey starts from: a well sampled image has
	// between one and two pixels per standard deviation of its PSF (common practice).
	firstWidthPx = 1.4
)

// Survey measures the line width and the camera noise on a dozen frames spread over the movie, in
// rounds: trace with what is known, then take the width that the pixels ask for, and the noise
// from the residuals of the fits against the fitted light. Both need no filament to stand still.
// first and last bound the frames, both included.
func Survey(src Source, first, last int, o Options, hint CameraHint) (Conditions, error) {
	o = o.withDefaults()
	if last < first {
		return Conditions{}, ErrNoFrames
	}
	count := min(surveyFrames, last-first+1)
	frames := make([]imaging.Frame, count)
	var noise, level []float64
	for i := range frames {
		t := first
		if count > 1 {
			t += i * (last - first) / (count - 1)
		}
		if err := src.ReadFrame(t, &frames[i]); err != nil {
			return Conditions{}, fmt.Errorf("trace: survey: %w", err)
		}
		var back imaging.Frame
		imaging.EstimateBackground(frames[i], backgroundBlockPx, &back)
		noise = append(noise, imaging.NoiseStd(frames[i], back))
		mean := 0.0
		for _, v := range back.Pix {
			mean += float64(v)
		}
		level = append(level, mean/float64(len(back.Pix)))
	}
	c := Conditions{WidthPx: firstWidthPx, KnotWidths: firstKnots, MaxCount: hint.MaxCount}
	// Until the residuals have spoken the noise is taken as the background's everywhere.
	c.Camera = imaging.Camera{GainCounts: 1e-6, OffsetCounts: 0, ReadVariance: max(sq(median(noise)), 1.0/12)}
	var samples imaging.NoiseSamples
	var densities []float64 // of the noise, cubed line widths
	lines := 0
	for round := range 3 {
		tracer, err := NewTracer(o, c)
		if err != nil {
			return Conditions{}, err
		}
		samples, densities = imaging.NoiseSamples{}, nil
		var widths, misfits []float64
		tracer.observe = func(f *fitter, r fitted) {
			if r.length*o.PixelUm >= o.MinLengthUm && r.widthSE > 0 && r.widthSE < 0.3*f.width {
				widths = append(widths, min(max(f.width+r.widthStep, f.width*0.6), f.width*1.6))
			}
			misfits = append(misfits, r.chi2PerPixel)
			if r.length*o.PixelUm >= o.MinLengthUm {
				densities = append(densities, r.knotNoise())
			}
			f.residuals(frames[0].Width, &samples)
		}
		for i := range frames {
			if _, err := tracer.Frame(frames[i], i); err != nil {
				return Conditions{}, err
			}
		}
		lines = len(widths)
		if round > 1 && len(misfits) > 0 { // the camera is known by now
			c.Misfit = median(misfits)
		}
		if len(frames) > 3 && lines > 2*surveyLines { // a crowded field says as much in fewer frames
			frames = spreadOut(frames, max(3, len(frames)*surveyLines/lines))
		}
		if lines > 0 {
			c.WidthPx = min(max(median(widths), 0.7), 8)
		}
		if round > 0 || lines > 0 {
			c.Camera = imaging.FitCamera(samples, hint.GainCounts, hint.OffsetCounts, median(level), median(noise))
		}
	}
	if lines == 0 {
		c.WidthPx = firstWidthPx
		c.Camera = imaging.FitCamera(imaging.NoiseSamples{}, hint.GainCounts, hint.OffsetCounts, median(level), median(noise))
	}
	if math.IsNaN(c.MaxCount) || c.MaxCount == 0 {
		c.MaxCount = math.Inf(1)
	}
	c.KnotWidths = chooseKnots(median(densities))
	return c, nil
}

// spreadOut returns n of the frames, evenly spread.
func spreadOut(frames []imaging.Frame, n int) []imaging.Frame {
	if n >= len(frames) {
		return frames
	}
	out := make([]imaging.Frame, n)
	for i := range out {
		out[i] = frames[i*(len(frames)-1)/max(1, n-1)]
	}
	return out
}

// residuals adds half the squared difference of the residuals of neighbouring pixels to samples, with
// the mean of their fitted counts. What the model gets wrong (a line smeared by its own motion) is as
// wide as the line and nearly the same in neighbours; the camera's noise is not. The squares are
// scaled up by what the fit itself has taken out of them (its leverage, spread evenly).
func (f *fitter) residuals(frameWidth int, samples *imaging.NoiseSamples) {
	n := len(f.pixels)
	if n <= 2*f.size {
		return
	}
	scale := float64(n) / float64(n-f.size) / 2
	index := func(p *pixel) int { return int(p.y)*frameWidth + int(p.x) }
	for i := range f.pixels {
		f.nearest[index(&f.pixels[i])] = int32(i + 1)
	}
	for i := range f.pixels {
		p := &f.pixels[i]
		for _, step := range [2]int{1, frameWidth} {
			at := index(p) + step
			if at >= len(f.nearest) || f.nearest[at] == 0 {
				continue
			}
			q := &f.pixels[f.nearest[at]-1]
			if p.robust < 1 || q.robust < 1 || sq(p.x-q.x)+sq(p.y-q.y) > 1 {
				continue
			}
			samples.Add((p.below+p.model+q.below+q.model)/2, sq(p.residual-q.residual)*scale)
		}
	}
	for i := range f.pixels {
		f.nearest[index(&f.pixels[i])] = 0
	}
}
