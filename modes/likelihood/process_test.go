package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"wend/modes/chain"
)

// The two densities were computed with another implementation of the dense Gaussian (numpy 1.24) for mean 0,
// v = 1, τ = 1, R = 0.1, T = 0.5; printed to ten decimals.
func TestLogLikelihoodVectors(t *testing.T) {
	y := []float64{0.3, -0.1, 0.4, 0.8, 0.2}
	noise := []float64{0.1, 0.1, 0.1, 0.1, 0.1}
	for _, tc := range []struct{ interval, want float64 }{{0.5, -4.0519276139}, {0.8, -4.4439428024}} {
		f := Frames{ExposureS: 0.5}
		for i := range y {
			f.TimesS = append(f.TimesS, float64(i)*tc.interval)
		}
		got := LogLikelihood(Process{1, 1}, f, y, noise, 0)
		if d := math.Abs(got - tc.want); !(d <= 1e-10) {
			t.Errorf("interval %g: %.11f, want %.10f", tc.interval, got, tc.want)
		}
	}
}

// The blurred variance is that of [chain.BlurFactor], written another way.
func TestExposureVariance(t *testing.T) {
	for _, a := range []float64{0, 1e-8, 1e-5, 1e-3, 1.99e-2, 2e-2, 0.1, 0.49, 0.51, 3, 50, 1e4} {
		got, want := Covariance(Process{1, 1}, a, 0), chain.BlurFactor(a)
		if !(math.Abs(got/want-1) <= 1e-9) {
			t.Errorf("exposure of %g relaxation times: variance %.12g, want %.12g", a, got, want)
		}
	}
	// The series and the closed form meet.
	lo, hi := newExposure(2e-2*(1-1e-9)), newExposure(2e-2)
	if d := math.Abs(lo.varMean/hi.varMean - 1); !(d < 1e-8) {
		t.Errorf("series and closed form differ by %g", d)
	}
}

// dense is the oracle: the density from the full covariance.
func dense(p Process, f Frames, y, noise []float64, mean float64) (known, restricted float64) {
	n := len(y)
	c := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			c.SetSym(i, j, Covariance(p, f.ExposureS, f.TimesS[j]-f.TimesS[i]))
		}
		c.SetSym(i, i, c.At(i, i)+noise[i])
	}
	var ch mat.Cholesky
	if !ch.Factorize(c) {
		return math.NaN(), math.NaN()
	}
	quad := func(a, b []float64) float64 {
		var z mat.VecDense
		if err := ch.SolveVecTo(&z, mat.NewVecDense(n, b)); err != nil {
			return math.NaN()
		}
		return mat.Dot(mat.NewVecDense(n, a), &z)
	}
	ones, r := make([]float64, n), make([]float64, n)
	for i := range ones {
		ones[i], r[i] = 1, y[i]-mean
	}
	l2 := math.Log(2 * math.Pi)
	known = -0.5 * (float64(n)*l2 + ch.LogDet() + quad(r, r))
	y1, one := quad(y, ones), quad(ones, ones)
	restricted = -0.5 * (float64(n-1)*l2 + ch.LogDet() + math.Log(one) + quad(y, y) - y1*y1/one)
	return known, restricted
}

func TestFilterAgainstDense(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, tc := range []struct {
		name          string
		v, tau, t, dt float64
		gaps          bool
	}{
		{"no dead time", 1.3, 0.7, 0.5, 0.5, false},
		{"dead time", 0.2, 2, 0.5, 0.9, true},
		{"instantaneous", 1, 1, 0, 0.3, true},
		{"long exposure", 4, 0.01, 1, 1, true},
		{"slow", 50, 1000, 0.1, 0.1, true},
	} {
		f := Frames{ExposureS: tc.t}
		var y, noise []float64
		now := 0.0
		for range 40 {
			f.TimesS = append(f.TimesS, now)
			y = append(y, rng.NormFloat64())
			noise = append(noise, 0.05+0.1*rng.Float64())
			now += tc.dt
			if tc.gaps && rng.IntN(3) == 0 {
				now += tc.dt * float64(1+rng.IntN(5))
			}
		}
		p := Process{tc.v, tc.tau}
		k, r := dense(p, f, y, noise, 0.3)
		if got := LogLikelihood(p, f, y, noise, 0.3); !(math.Abs(got-k) <= 1e-9*math.Abs(k)) {
			t.Errorf("%s: known mean %.12f, dense %.12f", tc.name, got, k)
		}
		if got := Restricted(p, f, y, noise); !(math.Abs(got-r) <= 1e-9*math.Abs(r)) {
			t.Errorf("%s: restricted %.12f, dense %.12f", tc.name, got, r)
		}
		// The restricted likelihood does not know the mean.
		shifted := make([]float64, len(y))
		for i := range y {
			shifted[i] = y[i] + 17
		}
		if got := Restricted(p, f, shifted, noise); !(math.Abs(got-r) <= 1e-7*math.Abs(r)) {
			t.Errorf("%s: shifted by a constant %.12f, want %.12f", tc.name, got, r)
		}
	}
}

// Without fluctuation only independent noise is left.
func TestLogLikelihoodNoiseOnly(t *testing.T) {
	f := Frames{TimesS: []float64{0, 1, 2}, ExposureS: 0.5}
	y, noise := []float64{1, -2, 0.5}, []float64{1, 2, 3}
	want := 0.0
	for i := range y {
		want -= 0.5 * (math.Log(2*math.Pi*noise[i]) + y[i]*y[i]/noise[i])
	}
	if got := LogLikelihood(Process{0, 1}, f, y, noise, 0); !(math.Abs(got-want) < 1e-12) {
		t.Errorf("%.14f, want %.14f", got, want)
	}
}
