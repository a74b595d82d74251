package modes

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"wend/modes/likelihood"
)

// information is ½tr(C⁻¹∂C C⁻¹∂C) of the log variance, drag known, from the full covariance.
func information(times []float64, tau float64) float64 {
	n := len(times)
	c := func(lnv float64) *mat.SymDense {
		m := mat.NewSymDense(n, nil)
		for i := range n {
			for j := i; j < n; j++ {
				m.SetSym(i, j, math.Exp(lnv-(times[j]-times[i])/(tau*math.Exp(lnv))))
			}
		}
		return m
	}
	const h = 1e-5
	var d, x mat.Dense
	d.Sub(c(h), c(-h))
	d.Scale(1/(2*h), &d)
	if err := x.Solve(c(0), &d); err != nil {
		return math.NaN()
	}
	var xx mat.Dense
	xx.Mul(&x, &x)
	return mat.Trace(&xx) / 2
}

func TestIndependentShapes(t *testing.T) {
	times := []float64{0, 0.1, 0.25, 0.3, 1.1, 1.2, 1.9, 2.6, 2.7, 4, 4.1, 4.3, 5, 5.5, 6.5}
	for _, tau := range []float64{0.05, 0.5, 2, 8} {
		got, want := IndependentShapes(times, tau), 2*information(times, tau)-1
		want = math.Min(want, float64(len(times)-1))
		if !(math.Abs(got-want) <= 1e-5*math.Max(1, want)) {
			t.Errorf("τ = %g: %.7f shapes, dense %.7f", tau, got, want)
		}
	}
	even := make([]float64, 1000)
	for i := range even {
		even[i] = float64(i)
	}
	// Limits: independent frames count each but one; a slow mode counts time over τ.
	if got := IndependentShapes(even, 0.01); !(math.Abs(got-999) < 1e-6) {
		t.Errorf("fast mode: %g shapes, want 999", got)
	}
	if got, want := IndependentShapes(even, 100), 9.99; !(math.Abs(got-want) < 0.02*want) {
		t.Errorf("slow mode: %g shapes, want about %g", got, want)
	}
	if got := IndependentShapes(even[:1], 1); got != 0 {
		t.Errorf("one frame: %g shapes, want 0", got)
	}
}

// An autoregressive series of N = 100 values: expected variance about its mean, and how many independent values have a variance as well
// known. Summed elsewhere (numpy 1.24) from 1-1/N_eff and N/[1+2Σ(1-k/N)φ^2k], printed to these digits.
func TestMixture(t *testing.T) {
	for _, tc := range []struct{ phi, about, shapes float64 }{{0, 0.990, 100}, {0.5, 0.970, 60.3}, {0.9, 0.828, 11.0}, {0.98, 0.435, 2.7}} {
		m := mixture{weight: []float64{1}, relaxation: []float64{-1 / math.Log(tc.phi)}}
		if tc.phi == 0 {
			m.relaxation[0] = 1e-3
		}
		for i := range 100 {
			m.frames.TimesS = append(m.frames.TimesS, float64(i))
		}
		variance, about := m.signal()
		if variance != 1 || !(math.Abs(about-tc.about) <= 5.1e-4) {
			t.Errorf("φ = %g: variance %g, about the mean %.4f, want 1 and %.3f", tc.phi, variance, about, tc.about)
		}
		if got := m.varianceShapes(); !(math.Abs(got-tc.shapes) <= 0.051) {
			t.Errorf("φ = %g: %.2f shapes, want %.1f", tc.phi, got, tc.shapes)
		}
	}
	// With exposure, the sum over pairs is the sum of covariances.
	m := mixture{weight: []float64{2}, relaxation: []float64{0.7}}
	m.frames = likelihood.Frames{TimesS: []float64{0, 0.4, 0.8, 1.9, 2.3}, ExposureS: 0.4}
	p := likelihood.Process{Variance: 2, RelaxationS: 0.7}
	sum := 0.0
	for _, a := range m.frames.TimesS {
		for _, b := range m.frames.TimesS {
			sum += likelihood.Covariance(p, 0.4, math.Abs(a-b)) / 25
		}
	}
	v, about := m.signal()
	if want := v - sum; !(math.Abs(about-want) < 1e-12) {
		t.Errorf("about the mean %.12f, want %.12f", about, want)
	}
}
