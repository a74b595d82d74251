package movie

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sync"

	"wend/imaging"
	"wend/imaging/synth"
	"wend/modes/chain"
)

// Movie is a synthetic movie that makes its frames when asked. It is not altered by use
// and is safe for concurrent use.
type Movie struct {
	opts   Options
	scene  synth.Scene
	camera synth.Camera
	chains []*chain.Chain
	tracks []*chain.Track
	labels [][]float64
	light  []float64 // of each frame
	images sync.Pool
}

// New checks opts, places the filaments and runs them through the movie. Options out of
// range, and filaments that find no place, are errors that wrap ErrOptions.
func New(opts Options) (*Movie, error) {
	if err := opts.check(); err != nil {
		return nil, err
	}
	if len(opts.Fixed) > 0 {
		opts.Filaments = 0
	}
	m := &Movie{
		opts: opts,
		scene: synth.Scene{Width: opts.WidthPx, Height: opts.HeightPx,
			Optics:          synth.Optics{PixelUm: opts.PixelUm, PSFUm: opts.PSFUm},
			BackgroundPerPx: opts.BackgroundPerPx, Uneven: opts.Uneven},
		camera: synth.Camera{Gain: opts.Gain, Offset: opts.Offset, ReadNoiseE: opts.ReadNoiseE},
		images: sync.Pool{New: func() any { return new(synth.Image) }},
	}
	if err := m.place(); err != nil {
		return nil, err
	}
	m.scatterDirt()
	for i, c := range m.chains {
		track, err := c.NewTrack(chain.TrackOptions{
			Frames: opts.Frames, IntervalS: opts.IntervalS, ExposureS: opts.ExposureS,
			SubSteps: opts.SubSteps, SubStepUm: opts.PSFUm / 4,
			Rand: func(frame int) *rand.Rand { return opts.random(forMoving, i, frame) },
		})
		if err != nil {
			return nil, fmt.Errorf("movie: filament %d: %w", i+1, err)
		}
		m.tracks = append(m.tracks, track)
	}
	for i := range m.Filaments() {
		var labels []float64
		if opts.DyePerUm > 0 {
			labels = synth.SpottyLabels(m.lengthUm(i), opts.DyePerUm, opts.PSFUm/2, opts.random(forLabels, i, 0))
		}
		m.labels = append(m.labels, labels)
	}
	for t := range opts.Frames {
		light := 1.0
		if opts.Frames > 1 {
			light = math.Pow(opts.BleachTo, float64(t)/float64(opts.Frames-1))
		}
		if opts.Flicker > 0 {
			light *= math.Max(0, 1+opts.Flicker*opts.random(forLight, 0, t).NormFloat64())
		}
		m.light = append(m.light, light)
	}
	return m, nil
}

// Options returns what the movie was made from.
func (m *Movie) Options() Options { return m.opts }

// Frames returns how many frames the movie has.
func (m *Movie) Frames() int { return m.opts.Frames }

// Filaments returns how many filaments, or fixed curves, it shows.
func (m *Movie) Filaments() int { return len(m.chains) + len(m.opts.Fixed) }

// Camera returns the noise model of the movie's camera.
func (m *Movie) Camera() imaging.Camera { return m.camera.Model() }

// Chain returns filament i, from 0; there is none for fixed curves.
func (m *Movie) Chain(i int) *chain.Chain { return m.chains[i] }

// Track returns the path of filament i, from 0.
func (m *Movie) Track(i int) *chain.Track { return m.tracks[i] }

func (m *Movie) lengthUm(i int) float64 {
	if len(m.opts.Fixed) > 0 {
		return m.opts.Fixed[i].Length()
	}
	return m.chains[i].Options().LengthUm
}

// curves returns the positions of filament i during frame t.
func (m *Movie) curves(i, t int) []chain.Curve {
	if len(m.opts.Fixed) > 0 {
		return []chain.Curve{chain.Curve(m.opts.Fixed[i])}
	}
	return m.tracks[i].SubCurves(t)
}

// Expect writes the photons that each pixel of frame t expects to dst.
func (m *Movie) Expect(t int, dst *synth.Image) {
	lines := make([]synth.Line, m.Filaments())
	for i := range lines {
		lines[i] = synth.Line{PhotonsPerUm: m.opts.PhotonsPerUm, Labels: m.labels[i]}
		for _, c := range m.curves(i, t) {
			lines[i].Curves = append(lines[i].Curves, synth.Curve(c))
		}
	}
	m.scene.Expect(lines, m.light[t], dst)
}

// ReadFrame is Frame, for whatever reads frames; it never fails.
func (m *Movie) ReadFrame(t int, dst *imaging.Frame) error {
	m.Frame(t, dst)
	return nil
}

// Frame writes frame t, from 0, to dst, reusing its memory: counts from 0 to 65535. A
// frame outside the movie panics.
func (m *Movie) Frame(t int, dst *imaging.Frame) {
	im := m.images.Get().(*synth.Image)
	defer m.images.Put(im)
	m.Expect(t, im)
	if m.opts.Noiseless {
		m.camera.ExposeNoiseless(im, dst)
		return
	}
	m.camera.Expose(im, m.opts.random(forCamera, 0, t), dst)
}
