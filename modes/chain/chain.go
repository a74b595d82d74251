package chain

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
)

// Options says what a [Chain] is made of and what surrounds it.
type Options struct {
	// LengthUm is the contour length and LpUm the persistence length, both µm and required.
	LengthUm, LpUm float64
	// DragPaS is the transverse drag per length (Pa·s), required; along its axis the filament
	// feels half of it.
	DragPaS float64
	// TempK is the temperature (K), required.
	TempK float64
	// Modes is how many bending modes move; 0 takes [DefaultModes].
	Modes int
	// CurvaturePerUm is the curvature (1/µm) of a stress-free shape that is an arc.
	CurvaturePerUm float64
	// StressFreeAngle, if not nil, adds to the stress-free shape the tangent angle (rad) at
	// arc length s (µm).
	StressFreeAngle func(sUm float64) float64
	// TubeStiffness is γ (N/m²) of a harmonic tube ½γy² per length about a straight axis
	// through the home pose; 0 is a free filament.
	TubeStiffness float64
	// Home is where the filament starts and is held.
	Home Pose
	// WanderUm is the rms of the centre's motion about home in each direction, as if held by a
	// soft spring: 0 lets it not move at all, +Inf diffuse freely. In a tube it counts along
	// the axis only.
	WanderUm float64
	// TurnRad is the rms of the orientation about home in the same sense. In a tube it is not
	// used.
	TurnRad float64
}

// Pose is a rigid position: the centre of mass (µm) and the orientation (rad, from x
// towards y).
type Pose struct{ XUm, YUm, AngleRad float64 }

// State is a filament at one moment, or its mean over a span of time.
type State struct {
	// B holds the amplitudes b_n (µm^{3/2}) of modes 1, 2, … about the stress-free shape.
	B []float64
	Pose
}

// Curve is a centreline, points in µm in order along the filament.
type Curve struct{ X, Y []float64 }

// ErrOptions is wrapped by every error about options that make no chain.
var ErrOptions = errors.New("impossible chain")

// Chain is a worm-like chain in a plane with exactly diagonal bending energy. It is not
// altered by use and is safe for concurrent use.
type Chain struct {
	opts      Options
	variance  []float64 // of b_n, µm³
	rate      []float64 // 1/τ_n, 1/s
	mobility  float64   // kT/ζ, µm³/s
	tube      float64   // γ/kT, µm⁻³
	segments  int
	slopes    []float64 // ψ_n′ at the middle of segment g: slopes[g*modes+n], µm^{-3/2}
	restAngle []float64 // stress-free tangent angle in the middle of each segment, mean 0
}

// DefaultModes returns how many modes a chain moves so that what is left out is finer than
// a light microscope resolves (waves of 0.4 µm) and than a tenth of the persistence length;
// from 16 to 400.
func DefaultModes(lengthUm, lpUm float64) int {
	n := math.Ceil(math.Max(5*lengthUm, 10*lengthUm/lpUm))
	return int(math.Min(400, math.Max(16, n)))
}

// NewChain prepares a chain. An option out of range is an error that wraps ErrOptions.
func NewChain(opts Options) (*Chain, error) {
	for _, c := range []struct {
		name  string
		value float64
		ok    bool
		want  string
	}{
		{"LengthUm", opts.LengthUm, opts.LengthUm > 0 && !math.IsInf(opts.LengthUm, 1), "above 0"},
		{"LpUm", opts.LpUm, opts.LpUm > 0 && !math.IsInf(opts.LpUm, 1), "above 0"},
		{"DragPaS", opts.DragPaS, opts.DragPaS > 0 && !math.IsInf(opts.DragPaS, 1), "above 0"},
		{"TempK", opts.TempK, opts.TempK > 0 && !math.IsInf(opts.TempK, 1), "above 0"},
		{"CurvaturePerUm", opts.CurvaturePerUm, math.Abs(opts.CurvaturePerUm) <= math.MaxFloat64, "a finite number"},
		{"TubeStiffness", opts.TubeStiffness, opts.TubeStiffness >= 0 && !math.IsInf(opts.TubeStiffness, 1), "0 or more"},
		{"WanderUm", opts.WanderUm, opts.WanderUm >= 0, "0 or more"},
		{"TurnRad", opts.TurnRad, opts.TurnRad >= 0, "0 or more"},
		{"Modes", float64(opts.Modes), opts.Modes >= 0 && opts.Modes <= 2000, "0 to 2000"},
	} {
		if !c.ok {
			return nil, fmt.Errorf("chain: %w: %s is %g, want %s", ErrOptions, c.name, c.value, c.want)
		}
	}
	if opts.Modes == 0 {
		opts.Modes = DefaultModes(opts.LengthUm, opts.LpUm)
	}
	c := &Chain{opts: opts, segments: 8 * opts.Modes}
	kT := KT(opts.TempK)
	c.mobility = kT / opts.DragPaS * 1e18
	c.tube = opts.TubeStiffness / kT * 1e-18
	for n := 1; n <= opts.Modes; n++ {
		stiffness := opts.LpUm*powInt(BeamRoot(n)/opts.LengthUm, 4) + c.tube // µm⁻³
		c.variance = append(c.variance, 1/stiffness)
		c.rate = append(c.rate, stiffness*c.mobility)
	}
	c.fillSegments()
	return c, nil
}

func (c *Chain) fillSegments() {
	l, m := c.opts.LengthUm, c.opts.Modes
	c.slopes = make([]float64, c.segments*m)
	c.restAngle = make([]float64, c.segments)
	scale, mean := math.Pow(l, -1.5), 0.0
	for g := range c.segments {
		x := (float64(g) + 0.5) / float64(c.segments)
		for n := range m {
			c.slopes[g*m+n] = scale * BeamSlope(n+1, x)
		}
		angle := c.opts.CurvaturePerUm * x * l
		if c.opts.StressFreeAngle != nil {
			angle += c.opts.StressFreeAngle(x * l)
		}
		c.restAngle[g] = angle
		mean += angle / float64(c.segments)
	}
	for g := range c.restAngle {
		c.restAngle[g] -= mean
	}
}

// Options returns what the chain was made of, with defaults filled in.
func (c *Chain) Options() Options { return c.opts }

// At returns the same chain with another home, sharing what does not depend on it.
func (c *Chain) At(home Pose) *Chain {
	moved := *c
	moved.opts.Home = home
	return &moved
}

// EndRmsUm returns the equilibrium rms displacement (µm) of an end by bending, across the
// filament: √Σ 4 var(b_n)/L.
func (c *Chain) EndRmsUm() float64 {
	sum := 0.0
	for _, v := range c.variance {
		sum += 4 * v / c.opts.LengthUm
	}
	return math.Sqrt(sum)
}

// Variance returns the equilibrium variance (µm³) of mode n about the stress-free shape,
// n from 1: kT/(κk_n⁴+γ).
func (c *Chain) Variance(n int) float64 { return c.variance[n-1] }

// RelaxationS returns τ_n = ζ/(κk_n⁴+γ) (s), n from 1.
func (c *Chain) RelaxationS(n int) float64 { return 1 / c.rate[n-1] }

// Equilibrium draws a state from equilibrium. A direction in which the chain diffuses
// freely starts at home.
func (c *Chain) Equilibrium(rng *rand.Rand) State {
	s := State{B: make([]float64, c.opts.Modes), Pose: c.opts.Home}
	for i, v := range c.variance {
		s.B[i] = math.Sqrt(v) * rng.NormFloat64()
	}
	along, across, turn := c.rigid()
	sin, cos := math.Sincos(c.opts.Home.AngleRad)
	u, w := along.draw(rng), across.draw(rng)
	s.XUm += u*cos - w*sin
	s.YUm += u*sin + w*cos
	s.AngleRad += turn.draw(rng)
	return s
}

// Curve writes the centreline of s to dst, reusing its memory: 8 segments of equal length
// per mode, their lengths adding to LengthUm, the mean of their middles at s's centre.
func (c *Chain) Curve(s State, dst *Curve) {
	m, h := c.opts.Modes, c.opts.LengthUm/float64(c.segments)
	dst.X = append(dst.X[:0], 0)
	dst.Y = append(dst.Y[:0], 0)
	var x, y, meanX, meanY float64
	for g := range c.segments {
		angle := s.AngleRad + c.restAngle[g]
		for n, slope := range c.slopes[g*m : (g+1)*m] {
			angle += s.B[n] * slope
		}
		sin, cos := math.Sincos(angle)
		meanX += x + h*cos/2
		meanY += y + h*sin/2
		x += h * cos
		y += h * sin
		dst.X = append(dst.X, x)
		dst.Y = append(dst.Y, y)
	}
	shiftX := s.XUm - meanX/float64(c.segments)
	shiftY := s.YUm - meanY/float64(c.segments)
	for i := range dst.X {
		dst.X[i] += shiftX
		dst.Y[i] += shiftY
	}
}
