package chain

import (
	"math"
	"testing"
)

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol) {
		t.Errorf("%s = %.12g, want %.12g within %.2g", what, got, want, tol)
	}
}

// simpson integrates f over [0, 1] with n (even) intervals.
func simpson(n int, f func(float64) float64) float64 {
	h := 1 / float64(n)
	sum := f(0) + f(1)
	for i := 1; i < n; i++ {
		w := 4.0
		if i%2 == 0 {
			w = 2
		}
		sum += w * f(float64(i)*h)
	}
	return sum * h / 3
}

// Thomson, Theory of Vibration with Applications (2010), D.1-D.2, p. 510.
func TestBeamRootPublished(t *testing.T) {
	for _, tc := range []struct {
		n    int
		want float64
	}{{1, 4.7300}, {2, 7.8532}, {3, 10.9956}} {
		near(t, "BeamRoot", BeamRoot(tc.n), tc.want, 5e-5) // half the last printed digit
	}
}

func TestBeamRootSolvesEquation(t *testing.T) {
	for n := 1; n <= 200; n++ {
		x := BeamRoot(n)
		// cos x − 1/cosh x has slope ±1 at the root, so the residual is the error of x.
		if r := math.Abs(math.Cos(x) - 1/math.Cosh(x)); !(r <= 2e-16*x) {
			t.Errorf("n %d: residual %g", n, r)
		}
		if n > 1 && !(x-BeamRoot(n-1) > 3 && x-BeamRoot(n-1) < 3.2) {
			t.Errorf("n %d: root skipped", n)
		}
	}
}

func TestBeamModesOrthonormal(t *testing.T) {
	modes := []int{1, 2, 3, 4, 7, 12, 20}
	for _, n := range modes {
		for _, m := range modes {
			want := 0.0
			if n == m {
				want = 1
			}
			got := simpson(2000, func(x float64) float64 { return BeamMode(n, x) * BeamMode(m, x) })
			near(t, "∫ψψ", got, want, 1e-7)
			scale := math.Pow(BeamRoot(n)*BeamRoot(m), 2)
			got = simpson(2000, func(x float64) float64 { return BeamCurvature(n, x) * BeamCurvature(m, x) })
			near(t, "∫ψ″ψ″/k⁴", got/scale, want, 1e-7)
		}
		// Free of rigid motion.
		near(t, "∫ψ", simpson(2000, func(x float64) float64 { return BeamMode(n, x) }), 0, 1e-8)
		near(t, "∫xψ", simpson(2000, func(x float64) float64 { return x * BeamMode(n, x) }), 0, 1e-8)
	}
}

func TestBeamModeEndsAndDerivatives(t *testing.T) {
	for _, n := range []int{1, 2, 3, 10, 11, 60, 199, 200} {
		k := BeamRoot(n)
		last := 2.0
		if n%2 == 0 {
			last = -2
		}
		near(t, "ψ(0)", BeamMode(n, 0), 2, 1e-12)
		near(t, "ψ(1)", BeamMode(n, 1), last, 1e-12)
		for _, x := range []float64{0, 1} {
			near(t, "ψ″(end)/k²", BeamCurvature(n, x)/(k*k), 0, 1e-12)
			near(t, "ψ‴(end)/k³", BeamThird(n, x)/(k*k*k), 0, 1e-12)
		}
		// Each derivative is the slope of the one before it, and ψ⁗ = k⁴ψ.
		h := 1e-4 / k
		for _, x := range []float64{0.013, 0.21, 0.5, 0.77, 0.99} {
			d := func(f func(int, float64) float64) float64 {
				return (f(n, x-2*h) - 8*f(n, x-h) + 8*f(n, x+h) - f(n, x+2*h)) / (12 * h)
			}
			near(t, "ψ′", d(BeamMode)/k, BeamSlope(n, x)/k, 1e-8)
			near(t, "ψ″", d(BeamSlope)/(k*k), BeamCurvature(n, x)/(k*k), 1e-8)
			near(t, "ψ‴", d(BeamCurvature)/math.Pow(k, 3), BeamThird(n, x)/math.Pow(k, 3), 1e-8)
			near(t, "ψ⁗", d(BeamThird)/math.Pow(k, 4), BeamMode(n, x), 1e-8)
		}
	}
}

// The textbook form cosh kx + cos kx − σ(sinh kx + sin kx) is good while cosh does not
// swamp it, and must agree there.
func TestBeamModeTextbookForm(t *testing.T) {
	for n := 1; n <= 4; n++ {
		k := BeamRoot(n)
		sigma := (math.Cosh(k) - math.Cos(k)) / (math.Sinh(k) - math.Sin(k))
		for _, x := range []float64{0, 0.1, 0.37, 0.62, 1} {
			want := math.Cosh(k*x) + math.Cos(k*x) - sigma*(math.Sinh(k*x)+math.Sin(k*x))
			near(t, "ψ", BeamMode(n, x), want, 1e-9)
		}
	}
}

func TestCosineMixture(t *testing.T) {
	for n := 1; n <= 6; n++ {
		// θ's energy is the same in both bases: Σ_m c_nm²/k_m⁴ = 1/(nπ)², the ratio of the two
		// equilibrium variances.
		sum := 0.0
		for m := 1; m <= 400; m++ {
			c := CosineMixture(n, m)
			sum += c * c / math.Pow(BeamRoot(m), 4)
			if m <= 8 {
				want := math.Sqrt2 * simpson(4000, func(x float64) float64 {
					return BeamSlope(m, x) * math.Cos(float64(n)*math.Pi*x)
				})
				near(t, "c_nm", c, want, 1e-7*math.Max(1, math.Abs(want)))
			}
		}
		near(t, "Σc²/k⁴·(nπ)²", sum*math.Pow(float64(n)*math.Pi, 2), 1, 1e-5)
	}
}

func TestBlurFactor(t *testing.T) {
	closed := func(a float64) float64 { return 2 * (a - 1 + math.Exp(-a)) / (a * a) }
	for _, a := range []float64{0.1, 0.49, 0.499999, 0.500001, 1, 5, 50} {
		near(t, "S", BlurFactor(a), closed(a), 1e-13)
	}
	near(t, "S(0)", BlurFactor(0), 1, 0)
	near(t, "S(1e-9)", BlurFactor(1e-9), 1-1e-9/3, 1e-16)
	near(t, "S(1e8)", BlurFactor(1e8), 2e-8, 1e-15)
	// As the double integral of the correlation over the exposure.
	for _, a := range []float64{0.3, 2} {
		want := simpson(400, func(u float64) float64 { return 2 * (1 - u) * math.Exp(-a*u) })
		near(t, "S as integral", BlurFactor(a), want, 1e-10)
	}
}

// Viscosity of water, CRC Handbook of Chemistry and Physics, mPa·s (values from memory).
func TestWaterViscosity(t *testing.T) {
	for _, tc := range []struct{ celsius, want float64 }{{20, 1.002}, {30, 0.797}, {40, 0.653}} {
		near(t, "viscosity", 1e3*WaterViscosity(ZeroCelsius+tc.celsius), tc.want, 6e-4)
	}
	if !math.IsNaN(WaterViscosity(400)) || !math.IsNaN(WaterViscosity(math.NaN())) {
		t.Error("viscosity outside its range must be NaN")
	}
}

func TestDrag(t *testing.T) {
	// Far from the wall arccosh(h/a) → ln(2h/a).
	near(t, "wall", DragNearWall(1, 1, 1e5), 4*math.Pi/math.Log(2e5), 1e-9)
	// cosh of the defining relation gives the height back.
	near(t, "wall", math.Cosh(4*math.Pi/DragNearWall(1, 0.5, 2)), 4, 1e-12)
	// The kernel that the logarithm approximates: K₀(z) + ½ z K₁(z), by quadrature of
	// K_ν(z) = ∫₀^∞ e^{−z cosh t} cosh νt dt.
	z := 0.01
	upper := 12.0
	bessel := func(nu float64) float64 {
		return upper * simpson(4000, func(x float64) float64 {
			u := upper * x
			return math.Exp(-z*math.Cosh(u)) * math.Cosh(nu*u)
		})
	}
	near(t, "unbounded", DragUnbounded(1, z, 1)/(4*math.Pi/(bessel(0)+0.5*z*bessel(1))), 1, 1e-4)
	if !math.IsNaN(DragNearWall(1, 1, 0.9)) || !math.IsNaN(DragUnbounded(1, 0, 1)) {
		t.Error("drag without meaning must be NaN")
	}
}
