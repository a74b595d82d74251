package modes

import (
	"math"
	"testing"
)

// Without noise and exposure the contraction of a nearly straight planar chain, x = Lp(1-R/L)/L, has the density of Wilhelm and Frey, Phys. Rev. Lett. 77:2581
// (1996), whose planar series gives the values below, made with scipy 1.10.1:
//
//	from scipy.special import pbdv, comb; from numpy import *
//	p=lambda x: 2**.5*2**-.75*pi**-.5*x**-1.25*sum(comb(2*l,l)/4**l*exp(-(2*l+.5)**2/(8*x))*pbdv(1.5,(2*l+.5)/sqrt(2*x))[0] for l in range(60))
//
// The series is cited from memory; its mean is 1/12.
func TestContractionPublished(t *testing.T) {
	const l, lp = 10.0, 1000.0
	c := contraction{}
	for n := 1; n <= 400; n++ {
		c.variance, c.mean = append(c.variance, math.Pow(l/(float64(n)*math.Pi), 2)/lp), append(c.mean, 0)
	}
	unit := l * l / lp // contraction in µm at x = 1
	if mean, _ := c.moments(); !(math.Abs(mean/unit*12-1) < 2e-3) {
		t.Errorf("mean %.6f, want 1/12", mean/unit)
	}
	x := []float64{0.02, 0.05, 0.1, 0.2, 0.3, 0.5}
	want := []float64{10.3144, 9.80541, 3.87422, 0.878754, 0.254853, 0.0265592}
	at := make([]float64, len(x))
	for i := range x {
		at[i] = x[i] * unit
	}
	for i, f := range c.density(at) {
		// 400 modes leave out a four hundredth of the mean, which shifts the steep flanks.
		if got := f * unit; !(math.Abs(got/want[i]-1) < 0.02) {
			t.Errorf("density at %.2f is %.5f, want %.5f", x[i], got, want[i])
		}
	}
}

// The density is one: it integrates to 1 and has the moments of its squares, with noise, a bend and a normal error too.
func TestContractionMoments(t *testing.T) {
	c := contraction{variance: []float64{0.012, 0.01, 0.0032}, mean: []float64{0.08, 0, 0.05}, errorVariance: 1e-5}
	mean, variance := c.moments()
	const n = 4000
	x := make([]float64, n)
	h := (mean + 25*math.Sqrt(variance)) / n
	for i := range x {
		x[i] = -0.02 + h*(float64(i)+0.5)
	}
	var s0, s1, s2 float64
	for i, f := range c.density(x) {
		s0, s1, s2 = s0+f*h, s1+f*h*x[i], s2+f*h*x[i]*x[i]
	}
	if !(math.Abs(s0-1) < 1e-4) || !(math.Abs(s1/mean-1) < 1e-3) || !(math.Abs((s2-s1*s1)/variance-1) < 5e-3) {
		t.Errorf("integral %.6f, mean %.6f of %.6f, variance %.3g of %.3g", s0, s1, mean, s2-s1*s1, variance)
	}
}
