package ridge

import "math"

// kernel holds the three one-dimensional filters that the derivatives are made of, for a radius r
// of 2r+1 taps each, to be correlated with the image (tap i meets pixel x+i−r). They are
// sampled from the Gaussian and its derivatives and then scaled so that a constant, a slope and a
// parabola come out exactly.
type kernel struct {
	sigma  float64
	radius int
	// smooth, first and second take the 0th, 1st and 2nd derivative of the smoothed signal.
	smooth, first, second []float32
	// noise is the standard deviation of a second derivative of white noise of 1 count.
	noise float64
}

// radius is how far the filters of standard deviation sigma (px) reach.
func radius(sigma float64) int { return int(math.Ceil(4 * sigma)) }

func newKernel(sigma float64) *kernel {
	r := radius(sigma)
	g := make([]float64, 2*r+1)
	sum := 0.0
	for i := range g {
		u := float64(i-r) / sigma
		g[i] = math.Exp(-u * u / 2)
		sum += g[i]
	}
	m2, m4 := 0.0, 0.0 // second and fourth moment of the sampled Gaussian
	for i := range g {
		g[i] /= sum
		u := float64(i - r)
		m2 += u * u * g[i]
		m4 += u * u * u * u * g[i]
	}
	k := &kernel{
		sigma: sigma, radius: r,
		smooth: make([]float32, len(g)), first: make([]float32, len(g)), second: make([]float32, len(g)),
	}
	s0, s2 := 0.0, 0.0
	for i := range g {
		u := float64(i - r)
		second := 2 * (u*u - m2) / (m4 - m2*m2) * g[i]
		k.smooth[i], k.first[i], k.second[i] = float32(g[i]), float32(u/m2*g[i]), float32(second)
		s0 += g[i] * g[i]
		s2 += second * second
	}
	k.noise = math.Sqrt(s0 * s2)
	return k
}

// mirror folds index i into 0…n−1 about the outermost pixels, which are not repeated. It
// serves −n < i < 2n−1.
func mirror(i, n int) int {
	if i < 0 {
		return -i
	}
	if i >= n {
		return 2*(n-1) - i
	}
	return i
}
