// Package movie answers the question: what movie would these filaments have given? It puts
// chains that move into images, frame by frame, and keeps the truth beside them.
//
// Start with [New]; [Movie.Frame] and [Movie.Truth] then give any frame's counts and true
// contours, in any order and concurrently, and [Movie.Write] saves it all. Lengths are µm,
// times s.
//
// The same options give the same movie to the last count.
//
// # Limits
//
// Filaments move in the focal plane and pass through each other. Their centres and
// orientations are held near home by soft springs, as a microscope's user picks filaments
// that stay; a long soft filament may still bend out of the field, which
// [Movie.LeavesField] tells.
package movie

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"

	"wend/imaging/synth"
	"wend/modes/chain"
)

// ErrOptions is wrapped by every error about options from which no movie can be made.
var ErrOptions = errors.New("impossible movie")

// Options is everything that a movie depends on. Zero means none or off unless it says
// otherwise; [DefaultOptions] gives a bright ordinary movie.
type Options struct {
	Frames, WidthPx, HeightPx int
	// PixelUm is the side of a pixel (µm); IntervalS from frame to frame and ExposureS of each
	// (s), 0 to the interval.
	PixelUm, IntervalS, ExposureS float64
	TemperatureC                  float64

	// Filaments is how many. Their lengths (µm) are uniform in LengthUm·(1 ± LengthSpread).
	Filaments              int
	LengthUm, LengthSpread float64
	// LpUm is the persistence length (µm).
	LpUm float64
	// DragPaS is the transverse drag per length (Pa·s); 0 takes that of a rod of radius 4 nm
	// in water, 1 µm above a wall.
	DragPaS float64
	// BendPerUm is the curvature (1/µm) of the stress-free shape.
	BendPerUm float64
	// TubeRmsUm is the bulk rms (µm) per direction of a harmonic tube about each filament; 0
	// leaves them free.
	TubeRmsUm float64
	// WanderUm and TurnRad are the rms of the motion of centres (µm) and orientations (rad);
	// +Inf lets them diffuse freely.
	WanderUm, TurnRad float64
	// AllowCrossing lets filaments start across each other.
	AllowCrossing bool
	// Fixed, if not empty, are shown instead of filaments, the same in every frame.
	Fixed []synth.Curve
	// SubSteps is how many positions make an exposure; 0 takes 8 to 32 by need.
	SubSteps int

	// PSFUm is the standard deviation of the point-spread function (µm).
	PSFUm                         float64
	PhotonsPerUm, BackgroundPerPx float64
	// Uneven, 0 to 1, is the relative unevenness of the background.
	Uneven float64
	// DyePerUm, above 0, labels filaments with that many dye molecules per µm at random.
	DyePerUm float64
	// Spots and HotPixels are how many.
	Spots, HotPixels int
	// BleachTo is the brightness of filaments and spots in the last frame relative to the
	// first, above 0; Flicker the relative standard deviation from frame to frame.
	BleachTo, Flicker float64

	// Gain (counts per electron), Offset (counts) and ReadNoiseE (electrons) of the camera.
	Gain, Offset, ReadNoiseE float64
	// Noiseless leaves out photon noise, read noise and rounding.
	Noiseless bool

	Seed uint64
}

// DefaultOptions is a bright movie of one actin-like filament.
func DefaultOptions() Options {
	return Options{
		Frames: 100, WidthPx: 256, HeightPx: 200, PixelUm: 0.1, IntervalS: 0.5, ExposureS: 0.05, TemperatureC: 22,
		Filaments: 1, LengthUm: 10, LpUm: 17, WanderUm: 0.3, TurnRad: 0.2,
		PSFUm: 0.13, PhotonsPerUm: 2000, BackgroundPerPx: 20, BleachTo: 1,
		Gain: 2, Offset: 100, ReadNoiseE: 1.5, Seed: 1,
	}
}

// TempK returns the temperature in K.
func (o Options) TempK() float64 { return o.TemperatureC + chain.ZeroCelsius }

// maxPixels bounds a frame, so that a slip of the keyboard is an error and not an
// exhausted memory.
const maxPixels = 1 << 26

func (o Options) check() error {
	finite := func(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
	positive := func(v float64) bool { return finite(v) && v > 0 }
	notNegative := func(v float64) bool { return finite(v) && v >= 0 }
	for _, c := range []struct {
		what  string
		value float64
		ok    bool
		want  string
	}{
		{"frames", float64(o.Frames), o.Frames >= 1, "1 or more"},
		{"width (px)", float64(o.WidthPx), o.WidthPx >= 8 && o.WidthPx <= maxPixels, "8 or more"},
		{"height (px)", float64(o.HeightPx), o.HeightPx >= 8 && o.HeightPx <= maxPixels, "8 or more"},
		{"pixel (µm)", o.PixelUm, positive(o.PixelUm), "above 0"},
		{"interval (s)", o.IntervalS, positive(o.IntervalS), "above 0"},
		{"exposure (s)", o.ExposureS, o.ExposureS >= 0 && o.ExposureS <= o.IntervalS, fmt.Sprintf("0 to the interval, %g", o.IntervalS)},
		{"temperature (°C)", o.TemperatureC, o.TemperatureC > -chain.ZeroCelsius && finite(o.TemperatureC), "above absolute zero"},
		{"filaments", float64(o.Filaments), o.Filaments >= 0, "0 or more"},
		{"length (µm)", o.LengthUm, positive(o.LengthUm), "above 0"},
		{"length spread", o.LengthSpread, o.LengthSpread >= 0 && o.LengthSpread < 1, "0 to below 1"},
		{"persistence length (µm)", o.LpUm, positive(o.LpUm), "above 0"},
		{"drag (Pa·s)", o.DragPaS, notNegative(o.DragPaS), "0 (water near a wall) or more"},
		{"bend (1/µm)", o.BendPerUm, finite(o.BendPerUm), "a finite number"},
		{"tube rms (µm)", o.TubeRmsUm, notNegative(o.TubeRmsUm), "0 (free) or more"},
		{"wander (µm)", o.WanderUm, o.WanderUm >= 0, "0 or more"},
		{"turn (rad)", o.TurnRad, o.TurnRad >= 0, "0 or more"},
		{"sub-steps", float64(o.SubSteps), o.SubSteps >= 0, "0 (by need) or more"},
		{"point-spread function (µm)", o.PSFUm, positive(o.PSFUm), "above 0"},
		{"photons per µm", o.PhotonsPerUm, notNegative(o.PhotonsPerUm), "0 or more"},
		{"background per pixel", o.BackgroundPerPx, notNegative(o.BackgroundPerPx), "0 or more"},
		{"unevenness", o.Uneven, o.Uneven >= 0 && o.Uneven <= 1, "0 to 1"},
		{"dye per µm", o.DyePerUm, notNegative(o.DyePerUm), "0 (uniform) or more"},
		{"spots", float64(o.Spots), o.Spots >= 0, "0 or more"},
		{"hot pixels", float64(o.HotPixels), o.HotPixels >= 0, "0 or more"},
		{"bleach-to", o.BleachTo, o.BleachTo > 0 && finite(o.BleachTo), "above 0 (1: no bleaching)"},
		{"flicker", o.Flicker, o.Flicker >= 0 && o.Flicker < 1, "0 to below 1"},
		{"gain", o.Gain, positive(o.Gain), "above 0"},
		{"offset", o.Offset, notNegative(o.Offset) && o.Offset < synth.MaxCount, "0 or more"},
		{"read noise (electrons)", o.ReadNoiseE, notNegative(o.ReadNoiseE), "0 or more"},
	} {
		if !c.ok {
			return fmt.Errorf("movie: %w: %s is %g, want %s", ErrOptions, c.what, c.value, c.want)
		}
	}
	if o.WidthPx*o.HeightPx > maxPixels {
		return fmt.Errorf("movie: %w: %d × %d pixels, want at most %d in all", ErrOptions, o.WidthPx, o.HeightPx, maxPixels)
	}
	for i, c := range o.Fixed {
		if len(c.X) < 2 || len(c.X) != len(c.Y) {
			return fmt.Errorf("movie: %w: fixed curve %d has %d and %d coordinates, want two points or more", ErrOptions, i+1, len(c.X), len(c.Y))
		}
	}
	if o.DragPaS == 0 && math.IsNaN(o.drag()) {
		return fmt.Errorf("movie: %w: no viscosity of water at %g °C, want a drag", ErrOptions, o.TemperatureC)
	}
	return nil
}

func (o Options) drag() float64 {
	if o.DragPaS > 0 {
		return o.DragPaS
	}
	return chain.DragNearWall(chain.WaterViscosity(o.TempK()), 0.004, 1)
}

// What a generator is for; part of its seed, so that no two uses share numbers.
const (
	forPlacing = iota + 1
	forMoving
	forLabels
	forDirt
	forLight
	forCamera
)

// random returns the generator for one use, filament and frame.
func (o Options) random(use, filament, frame int) *rand.Rand {
	h := mix(o.Seed)
	for _, v := range [...]int{use, filament, frame} {
		h = mix(h ^ mix(uint64(v)))
	}
	return rand.New(rand.NewPCG(h, mix(h+1)))
}

// mix scatters the bits of x (the finaliser of the SplitMix64 generator).
func mix(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}
