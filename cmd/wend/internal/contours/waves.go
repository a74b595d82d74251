package main

import (
	"context"
	"fmt"
	"io"
	"math"

	"wend/cmd/wend/internal/movie"
	"wend/imaging/synth"
	"wend/trace"
)

const (
	waveAmplitudeUm = 0.03
	waveExtentUm    = 9.0
	waveFrames      = 60
)

// wavelengths of the second table, µm: one filament of each in every frame.
var wavelengths = []float64{0.5, 0.6, 0.7, 0.8, 1, 1.3, 2, 4}

// waves adds up the amplitudes of traced waves.
type waves struct {
	amplitude [][]float64 // by wavelength, of every frame, over the true one
	frames    int
}

func (w *waves) add(o *waves) {
	for i := range w.amplitude {
		w.amplitude[i] = append(w.amplitude[i], o.amplitude[i]...)
	}
	w.frames += o.frames
}

// measureWaves traces a movie of waves that stand still, each a little turned and shifted against the pixels.
func measureWaves(ctx context.Context, light float64, seed uint64) (*waves, error) {
	o := movie.DefaultOptions()
	o.Frames, o.PixelUm, o.PSFUm, o.PhotonsPerUm, o.BackgroundPerPx, o.Seed = waveFrames, 0.108, 0.13, light, 8, seed
	o.WidthPx, o.HeightPx = 110, 40+30*len(wavelengths)
	place := func(i int) (x, y, angle float64) {
		return 1.35 + 0.013*float64(seed%8) + 0.017*float64(i), (20 + 30*float64(i) + 0.3*float64(i) + 0.21*float64(seed%5)) * o.PixelUm,
			0.04 + 0.013*float64(i)
	}
	for i, l := range wavelengths {
		x, y, angle := place(i)
		o.Fixed = append(o.Fixed, synth.Sinusoid(x, y, waveExtentUm, waveAmplitudeUm, l, angle))
	}
	_, list, _, err := traceMovie(ctx, o)
	if err != nil {
		return nil, err
	}
	w := &waves{amplitude: make([][]float64, len(wavelengths)), frames: o.Frames}
	for _, f := range list {
		for _, c := range f.Contours {
			if !c.Used() {
				continue
			}
			line := c.Line()
			middle := line[len(line)/2]
			for i, l := range wavelengths {
				x, y, angle := place(i)
				sin, cos := math.Sincos(angle)
				if along, across := turned(middle.XUm-x, middle.YUm-y, sin, cos); math.Abs(across) < 0.5 && along > 0 && along < waveExtentUm {
					w.amplitude[i] = append(w.amplitude[i], amplitudeOf(line, x, y, sin, cos, l)/waveAmplitudeUm)
				}
			}
		}
	}
	return w, nil
}

func turned(dx, dy, sin, cos float64) (along, across float64) {
	return dx*cos + dy*sin, dy*cos - dx*sin
}

// amplitudeOf regresses the points' distance from the axis on the wave, the outer micrometre left out at each end.
func amplitudeOf(line []trace.Point, x, y, sin, cos, wavelengthUm float64) float64 {
	var sw, sy, sww, swy, n float64
	for _, p := range line {
		along, across := turned(p.XUm-x, p.YUm-y, sin, cos)
		if along < 1 || along > waveExtentUm-1 {
			continue
		}
		v := math.Sin(2 * math.Pi * along / wavelengthUm)
		n++
		sw += v
		sy += across
		sww += v * v
		swy += v * across
	}
	return (swy - sw*sy/n) / (sww - sw*sw/n)
}

func waveHeader() string {
	h := fmt.Sprintf("\nAmplitude out over amplitude in (± standard error) of waves of %g nm, by wavelength (µm).\n\nlight/µm ", 1000*waveAmplitudeUm)
	for _, l := range wavelengths {
		h += fmt.Sprintf("  %-13g", l)
	}
	return h + "\n"
}

func (w *waves) print(to io.Writer, light float64) {
	fmt.Fprintf(to, "%8.0f ", light)
	for _, v := range w.amplitude {
		if len(v) < w.frames/2 {
			fmt.Fprintf(to, "  %-13s", "not found")
			continue
		}
		mean, sd := moments(v)
		fmt.Fprintf(to, "  %.3f ± %.3f", mean, sd/math.Sqrt(float64(len(v))))
	}
	fmt.Fprintln(to)
}
