package chain

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// TrackOptions is the timing of a movie.
type TrackOptions struct {
	// Frames is how many, 1 or more.
	Frames int
	// IntervalS from the start of one exposure to the start of the next and ExposureS, both s;
	// the exposure is 0 to the interval.
	IntervalS, ExposureS float64
	// SubSteps is how many curves stand for one exposure; 0 takes from 8 to 32, the fewest
	// that move less than SubStepUm within themselves. An exposure of 0 has one.
	SubSteps int
	// SubStepUm is the rms motion (µm) that a sub-step may hold, for SubSteps 0; 0 takes 0.03.
	SubStepUm float64
	// Rand returns a fresh generator for frame -1 (the initial state), 0, 1, …, the same
	// for the same frame at every call, and independent of those of other frames. Required.
	Rand func(frame int) *rand.Rand
}

// Track is a chain's path through the frames of a movie. It keeps the state at the start
// of each frame and makes the rest anew, so that frames can be had in any order and
// concurrently.
type Track struct {
	chain  *Chain
	opts   TrackOptions
	starts []State
	sub    *Stepper
}

// NewTrack runs c from equilibrium through all frames.
func (c *Chain) NewTrack(opts TrackOptions) (*Track, error) {
	switch {
	case opts.Frames < 1:
		return nil, fmt.Errorf("chain: %w: %d frames, want 1 or more", ErrOptions, opts.Frames)
	case !(opts.IntervalS > 0) || math.IsInf(opts.IntervalS, 1):
		return nil, fmt.Errorf("chain: %w: interval %g s, want above 0", ErrOptions, opts.IntervalS)
	case !(opts.ExposureS >= 0 && opts.ExposureS <= opts.IntervalS):
		return nil, fmt.Errorf("chain: %w: exposure %g s, want 0 to the interval %g s", ErrOptions, opts.ExposureS, opts.IntervalS)
	case opts.SubSteps < 0:
		return nil, fmt.Errorf("chain: %w: %d sub-steps, want 0 or more", ErrOptions, opts.SubSteps)
	case opts.Rand == nil:
		return nil, fmt.Errorf("chain: %w: no Rand", ErrOptions)
	}
	if opts.SubStepUm <= 0 {
		opts.SubStepUm = 0.03
	}
	if opts.ExposureS == 0 {
		opts.SubSteps = 1
	} else if opts.SubSteps == 0 {
		opts.SubSteps = c.subSteps(opts.ExposureS, opts.SubStepUm)
	}
	tr := &Track{chain: c, opts: opts}
	tr.sub = c.Stepper(opts.ExposureS / float64(opts.SubSteps))
	dead := c.Stepper(opts.IntervalS - opts.ExposureS)
	s := c.Equilibrium(opts.Rand(-1))
	for frame := range opts.Frames {
		start := s
		start.B = append([]float64(nil), s.B...)
		tr.starts = append(tr.starts, start)
		rng := opts.Rand(frame)
		for range opts.SubSteps {
			tr.sub.Step(&s, nil, rng)
		}
		dead.Step(&s, nil, rng)
	}
	return tr, nil
}

// subSteps returns the fewest sub-steps from 8 to 32 that hold at most rmsUm of motion
// across the filament each.
func (c *Chain) subSteps(exposureS, rmsUm float64) int {
	for k := 8; k < 32; k++ {
		dt := exposureS / float64(k)
		l := c.opts.LengthUm
		// Variance within the step: v(1−S) for what relaxes, Ddt/3 for the rigid motion.
		sum := (c.mobility/l + c.mobility/l) * dt / 3 // translation and mean effect of turning
		for i, v := range c.variance {
			sum += v / l * (1 - BlurFactor(dt*c.rate[i]))
		}
		if sum <= rmsUm*rmsUm {
			return k
		}
	}
	return 32
}

// Frames returns how many frames the track has.
func (tr *Track) Frames() int { return len(tr.starts) }

// SubSteps returns how many curves stand for one exposure.
func (tr *Track) SubSteps() int { return tr.opts.SubSteps }

// SubStates returns the mean state over each sub-step of a frame's exposure, in order. The
// mean of their amplitudes is exactly that over the exposure, however few the sub-steps.
func (tr *Track) SubStates(frame int) []State {
	s := tr.starts[frame]
	s.B = append([]float64(nil), s.B...)
	rng := tr.opts.Rand(frame)
	states := make([]State, tr.opts.SubSteps)
	for i := range states {
		tr.sub.Step(&s, &states[i], rng)
	}
	return states
}

// SubCurves returns the centreline in each sub-step of a frame's exposure, in order.
func (tr *Track) SubCurves(frame int) []Curve {
	states := tr.SubStates(frame)
	curves := make([]Curve, len(states))
	for i, s := range states {
		tr.chain.Curve(s, &curves[i])
	}
	return curves
}

// MeanAmplitudes returns the mode amplitudes (µm^{3/2}) averaged over a frame's exposure.
func (tr *Track) MeanAmplitudes(frame int) []float64 {
	states := tr.SubStates(frame)
	mean := make([]float64, len(states[0].B))
	for _, s := range states {
		for n, b := range s.B {
			mean[n] += b / float64(len(states))
		}
	}
	return mean
}

// Resample returns c in steps of equal length along it, as near as can be to spacingUm,
// both end points kept, with the arc length (µm) of each point. Steps are measured along
// the polyline through c's points. It panics for fewer than two points.
func (c Curve) Resample(spacingUm float64) (points Curve, sUm []float64) {
	if len(c.X) < 2 || len(c.X) != len(c.Y) {
		panic(fmt.Sprintf("chain: curve of %d and %d coordinates, want two points or more", len(c.X), len(c.Y)))
	}
	length := c.Length()
	steps := max(1, int(math.Round(length/spacingUm)))
	i, passed := 0, 0.0 // segment and the arc length at its start
	segment := math.Hypot(c.X[1]-c.X[0], c.Y[1]-c.Y[0])
	for k := 0; k <= steps; k++ {
		s := length * float64(k) / float64(steps)
		for i < len(c.X)-2 && s > passed+segment {
			passed += segment
			i++
			segment = math.Hypot(c.X[i+1]-c.X[i], c.Y[i+1]-c.Y[i])
		}
		f := 0.0
		if segment > 0 {
			f = math.Min(1, (s-passed)/segment)
		}
		points.X = append(points.X, c.X[i]+f*(c.X[i+1]-c.X[i]))
		points.Y = append(points.Y, c.Y[i]+f*(c.Y[i+1]-c.Y[i]))
		sUm = append(sUm, s)
	}
	return points, sUm
}

// Length returns the length (µm) of the polyline through c's points.
func (c Curve) Length() float64 {
	sum := 0.0
	for i := 1; i < len(c.X); i++ {
		sum += math.Hypot(c.X[i]-c.X[i-1], c.Y[i]-c.Y[i-1])
	}
	return sum
}
