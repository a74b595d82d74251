package main

import (
	"context"
	"math"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/imaging"
)

// accuracyCase is a kind of movie. vary changes the options of movie number i.
type accuracyCase struct {
	name string
	vary func(o *movie.Options, i int)
}

// cases are ordinary light (600 photons per µm, 8 background photons per pixel) at three drags, and what
// is harder than that one way at a time.
func cases() []accuracyCase {
	drag := func(v float64) func(o *movie.Options, i int) {
		return func(o *movie.Options, _ int) { o.DragPaS = v }
	}
	return []accuracyCase{
		{"water near a wall", drag(2.4e-3)},
		{"drag × 2.5", drag(6e-3)},
		{"drag × 5", drag(12e-3)},
		{"bright", func(o *movie.Options, _ int) { o.PhotonsPerUm = 2000 }},
		{"dim", func(o *movie.Options, _ int) { o.PhotonsPerUm = 200 }},
		{"soft", func(o *movie.Options, i int) { o.LpUm = 1.5 + 0.5*float64(i%4); o.LengthUm = 6 + float64(i%3) }},
		{"bent", func(o *movie.Options, _ int) { o.BendPerUm = 0.08 }},
		{"short exposure", func(o *movie.Options, _ int) { o.DragPaS = 2.4e-3; o.ExposureS = 0.005 }},
		{"small pixels", func(o *movie.Options, _ int) {
			o.PixelUm, o.WidthPx, o.HeightPx, o.BackgroundPerPx = 0.065, 330, 300, 3
		}},
		{"large pixels", func(o *movie.Options, _ int) {
			o.PixelUm, o.WidthPx, o.HeightPx, o.BackgroundPerPx = 0.16, 140, 120, 18
		}},
		{"low gain", func(o *movie.Options, _ int) { o.Gain, o.ReadNoiseE = 0.5, 1 }},
		{"long filaments", func(o *movie.Options, i int) {
			o.LengthUm, o.WidthPx, o.HeightPx, o.IntervalS = 20+float64(i%3), 320, 320, 2
		}},
		{"short filaments", func(o *movie.Options, i int) { o.LengthUm = 3.5 + 0.5*float64(i%3); o.DragPaS = 2.4e-3 }},
		{"few frames", func(o *movie.Options, _ int) { o.Frames = 25 }},
		{"long exposure", func(o *movie.Options, _ int) { o.ExposureS = 0.2 }},
		{"fast frames", func(o *movie.Options, _ int) { o.IntervalS, o.ExposureS, o.Frames = 0.05, 0.02, 200 }},
		{"bleaching", func(o *movie.Options, _ int) { o.PhotonsPerUm, o.BleachTo = 900, 0.33 }},
		{"a dozen", func(o *movie.Options, _ int) {
			o.WidthPx, o.HeightPx, o.Filaments, o.Frames = 512, 512, 12, 30
			o.LengthUm, o.LengthSpread = 8, 0.4
		}},
	}
}

// options are those of movie i of the case: actin-like filaments of several lengths and stiffnesses.
func (c accuracyCase) options(i int, seed uint64) movie.Options {
	o := movie.DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx = 100, 200, 180
	o.PixelUm, o.PSFUm = 0.108, 0.13
	o.PhotonsPerUm, o.BackgroundPerPx = 600, 8
	o.IntervalS, o.ExposureS, o.DragPaS = 0.5, 0.03, 6e-3
	o.LengthUm = 7 + 0.8*float64(i%5)
	o.LpUm = 8 + 3*float64(i%4)
	o.WanderUm, o.TurnRad = 0.5, 0.4
	o.Seed = seed
	c.vary(&o, i)
	return o
}

// synthetic makes a movie and measures it.
func synthetic(ctx context.Context, o movie.Options) (*score, error) {
	m, err := movie.New(o)
	if err != nil {
		return nil, err
	}
	settings := job.Settings{PixelUm: o.PixelUm, IntervalS: o.IntervalS, ExposureS: o.ExposureS, TemperatureC: o.TemperatureC,
		Setting: "free", Channel: 1, MinLengthUm: 2, LastFrame: o.Frames - 1, Gain: math.NaN(), Offset: math.NaN()}
	r, err := job.Measure(ctx, m, imaging.Info{MaxCount: 65535, SizeC: 1}, settings, 1, nil)
	if err != nil {
		return nil, err
	}
	t := truth{contours: make(map[place][]point)}
	for frame := range o.Frames {
		for i, c := range m.Truth(frame) {
			for k := range c.XUm {
				t.contours[place{i, frame}] = append(t.contours[place{i, frame}], point{c.XUm[k], c.YUm[k]})
			}
		}
	}
	for i := range m.Filaments() {
		d := m.Describe(i)
		t.lpUm = append(t.lpUm, d.LpUm)
	}
	return judge("", r, t), nil
}
