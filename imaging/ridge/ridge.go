// Package ridge answers, for every pixel of a frame: does a bright line pass here, how sure is
// that against the pixel noise, which way does the line run, and where exactly is its crest?
//
// [Compute] fills a [Map]; [Implementation] says which code filters the frame. Several goroutines
// may call Compute at once, each with a Map of its own. The filter workspaces are kept for the
// next call; [Drain] gives their memory back.
//
// # Units
//
// Lengths are pixels, brightness is camera counts, Strength is in standard deviations of its own
// noise, angles are radians in image coordinates (x to the right, y down).
//
// # Theory
//
// The frame is filtered with the derivatives of a Gaussian of standard deviation σ. Across a
// bright line the second derivative is the strongest negative one, so the line's normal n is the
// eigenvector of the Hessian H with the smallest eigenvalue, −nᵀHn is the ridge response, and the
// crest lies at about −(g·n)/(nᵀHn) along the normal, g being the gradient: Steger, IEEE Trans.
// Pattern Anal. Mach. Intell. 20:113 (1998), equations cited from memory. White pixel noise of
// standard deviation ε gives a second derivative in any direction the standard deviation
// ε·√(Σg″²·Σg²), for a continuous filter ε·√(3/(16π))/σ³, the same in every direction; that is the
// unit of Strength. A Gaussian line of peak A and standard deviation s then has the strength
// A·s/(s²+σ²)^{3/2} over that unit on its crest.
//
// # Limits
//
// The smallest of all directions is taken, so that on noise alone Strength is biased up and its
// tail lies above that of a single direction. Where lines meet, neither direction nor offset
// means much.
package ridge

import (
	"errors"
	"fmt"
	"math"

	"wend/imaging"
)

// ErrFrame and ErrOptions are wrapped by the errors of [Compute]: the frame cannot be used, or
// the options cannot.
var (
	ErrFrame   = errors.New("unusable frame")
	ErrOptions = errors.New("unusable options")
)

// Bounds on what Compute accepts; beyond them float32 arithmetic or memory would give out.
const (
	minSigmaPx = 0.5
	maxSigmaPx = 50
	maxCounts  = 1e12
	maxPixels  = 1 << 28
)

// Options says how to look for lines. There are no defaults: every value depends on the frame.
type Options struct {
	// SigmaPx is the standard deviation of the Gaussian filter, px, from 0.5 to 50. A line is
	// found most surely with about its own standard deviation.
	SigmaPx float64
	// NoiseCounts is the standard deviation of the white noise of one pixel, counts, above 0.
	// Not looked at where Noise is given.
	NoiseCounts float64
	// Noise, if not nil, holds that standard deviation for every pixel of the frame, row by
	// row. It is taken as constant over the reach of the filter.
	Noise []float32
	// Floor is the least Strength that is worked out; whatever lies below is 0. At 0 every
	// pixel with a bright ridge is worked out, which takes longer.
	Floor float64
}

// Map is what Compute finds, row-major like the frame. Where Strength is 0, so are the others.
type Map struct {
	Width, Height int
	// Strength is the ridge response −nᵀHn in standard deviations of its noise; 0 where it is
	// below the floor or where the stronger curvature is that of a dark line.
	Strength []float32
	// Theta is the angle of the line's normal n = (cos Theta, sin Theta), from −π/2 to π/2.
	Theta []float32
	// Offset is the signed distance from the pixel's centre to the crest along n, px.
	Offset []float32
}

// resize gives m the wanted shape, keeping its memory where it suffices, and clears it.
func (m *Map) resize(width, height int) {
	n := width * height
	for _, p := range []*[]float32{&m.Strength, &m.Theta, &m.Offset} {
		if cap(*p) < n {
			*p = make([]float32, n)
			continue
		}
		*p = (*p)[:n]
		clear(*p)
	}
	m.Width, m.Height = width, height
}

// Implementation names the code that filters the frames of this build: "OpenCV" with its
// version, or "plain Go".
func Implementation() string { return active.name() }

// Drain frees the workspaces that no call is using. Compute may be called again afterwards.
func Drain() { active.drain() }

// Compute fills dst with the ridge map of f, a frame of counts with its background already
// subtracted; f is left as it was and dst's memory is used again where it suffices. Outside
// the frame the image is taken as mirrored about its outermost pixels.
//
// The error wraps ErrFrame for an empty frame, one that the filter (radius 4·SigmaPx rounded up)
// does not fit into, or one with values that are not finite, and ErrOptions for unusable options; dst
// is then left as it was. A nil dst panics.
func Compute(f imaging.Frame, o Options, dst *Map) error { return active.compute(f, o, dst) }

// check reports why Compute must refuse f or o. Everything that reaches an engine has passed
// here: C++ code would end the process instead of returning an error.
func check(f imaging.Frame, o Options) error {
	if !(o.SigmaPx >= minSigmaPx && o.SigmaPx <= maxSigmaPx) {
		return fmt.Errorf("ridge: SigmaPx %g, want %g to %d px: %w", o.SigmaPx, minSigmaPx, maxSigmaPx, ErrOptions)
	}
	if !(o.Floor >= 0) || math.IsInf(o.Floor, 0) {
		return fmt.Errorf("ridge: Floor %g, want a finite number from 0: %w", o.Floor, ErrOptions)
	}
	if f.Width <= 0 || f.Height <= 0 {
		return fmt.Errorf("ridge: frame of %d×%d pixels, want at least one: %w", f.Width, f.Height, ErrFrame)
	}
	if f.Width > maxPixels/f.Height {
		return fmt.Errorf("ridge: frame of %d×%d pixels, want at most %d in all: %w", f.Width, f.Height, maxPixels, ErrFrame)
	}
	if len(f.Pix) != f.Width*f.Height {
		return fmt.Errorf("ridge: frame of %d×%d pixels with %d values: %w", f.Width, f.Height, len(f.Pix), ErrFrame)
	}
	if r := radius(o.SigmaPx); f.Width <= r || f.Height <= r {
		return fmt.Errorf("ridge: frame of %d×%d pixels, want more than %d each way for SigmaPx %g: %w",
			f.Width, f.Height, r, o.SigmaPx, ErrFrame)
	}
	for i, v := range f.Pix {
		if !(v >= -maxCounts && v <= maxCounts) {
			return fmt.Errorf("ridge: pixel (%d, %d) is %g, want a value within ±%g counts: %w",
				i%f.Width, i/f.Width, v, float64(maxCounts), ErrFrame)
		}
	}
	return checkNoise(f, o)
}

// checkNoise is the part of check for the two ways of giving the noise.
func checkNoise(f imaging.Frame, o Options) error {
	if o.Noise == nil {
		if !(o.NoiseCounts > 0 && o.NoiseCounts <= maxCounts) {
			return fmt.Errorf("ridge: NoiseCounts %g, want above 0 and at most %g: %w",
				o.NoiseCounts, float64(maxCounts), ErrOptions)
		}
		return nil
	}
	if len(o.Noise) != len(f.Pix) {
		return fmt.Errorf("ridge: Noise for %d pixels, want %d: %w", len(o.Noise), len(f.Pix), ErrOptions)
	}
	for i, v := range o.Noise {
		if !(v > 0 && v <= maxCounts) {
			return fmt.Errorf("ridge: Noise of pixel (%d, %d) is %g, want above 0 and at most %g: %w",
				i%f.Width, i/f.Width, v, float64(maxCounts), ErrOptions)
		}
	}
	return nil
}
