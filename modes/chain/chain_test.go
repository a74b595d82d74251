package chain

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

func actin(t testing.TB, change func(*Options)) *Chain {
	t.Helper()
	o := Options{LengthUm: 12, LpUm: 15, DragPaS: 2e-3, TempK: 295, WanderUm: math.Inf(1), TurnRad: math.Inf(1)}
	if change != nil {
		change(&o)
	}
	c, err := NewChain(o)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// within holds the mean of squares against a variance with the scatter of n independent
// Gaussian values, 4 standard errors.
func withinVariance(t *testing.T, what string, sumSquares, variance float64, n int) {
	t.Helper()
	near(t, what, sumSquares/float64(n)/variance, 1, 4*math.Sqrt(2/float64(n)))
}

func TestNewChainRefuses(t *testing.T) {
	good := Options{LengthUm: 10, LpUm: 17, DragPaS: 2e-3, TempK: 295}
	for name, change := range map[string]func(*Options){
		"length": func(o *Options) { o.LengthUm = 0 },
		"lp":     func(o *Options) { o.LpUm = math.NaN() },
		"drag":   func(o *Options) { o.DragPaS = -1 },
		"temp":   func(o *Options) { o.TempK = math.Inf(1) },
		"bend":   func(o *Options) { o.CurvaturePerUm = math.NaN() },
		"tube":   func(o *Options) { o.TubeStiffness = -1 },
		"wander": func(o *Options) { o.WanderUm = math.NaN() },
		"modes":  func(o *Options) { o.Modes = -1 },
	} {
		o := good
		change(&o)
		if _, err := NewChain(o); !errors.Is(err, ErrOptions) {
			t.Errorf("%s: error %v, want ErrOptions", name, err)
		}
	}
	if _, err := NewChain(good); err != nil {
		t.Error(err)
	}
}

// The sampled curve knows nothing of beam modes here: its tangent angles must have the
// cosine-mode variances (L/nπ)²/Lp, its correlations and ⟨R²⟩ those of the plane, at bends
// far from small (L = 2Lp).
func TestEquilibriumStatics(t *testing.T) {
	const chains, modes = 2500, 5
	lp, l := 6.0, 12.0
	c := actin(t, func(o *Options) { o.LpUm, o.LengthUm, o.Modes = lp, l, 60 })
	rng := rand.New(rand.NewPCG(11, 4))
	var squares [modes + 1]float64
	var r2, r4, cosine, cosine2 float64
	var curve Curve
	seg := c.segments
	h := l / float64(seg)
	angle := make([]float64, seg)
	for range chains {
		c.Curve(c.Equilibrium(rng), &curve)
		near(t, "length", curve.Length(), l, 1e-9)
		for g := range angle {
			angle[g] = math.Atan2(curve.Y[g+1]-curve.Y[g], curve.X[g+1]-curve.X[g])
			if g > 0 { // unwrap
				angle[g] += 2 * math.Pi * math.Round((angle[g-1]-angle[g])/(2*math.Pi))
			}
		}
		for n := 1; n <= modes; n++ {
			a := 0.0
			for g, th := range angle {
				a += th * math.Cos(float64(n)*math.Pi*(float64(g)+0.5)/float64(seg)) * h
			}
			squares[n] += a * a * 2 / l
		}
		dx, dy := curve.X[seg]-curve.X[0], curve.Y[seg]-curve.Y[0]
		d2 := dx*dx + dy*dy
		r2, r4 = r2+d2, r4+d2*d2
		k := math.Cos(angle[3*seg/4] - angle[seg/4])
		cosine, cosine2 = cosine+k, cosine2+k*k
	}
	for n := 1; n <= modes; n++ {
		withinVariance(t, "var a_n", squares[n], math.Pow(l/(float64(n)*math.Pi), 2)/lp, chains)
	}
	// Modes above the last leave out tangent variance L/(π²·Lp·Modes) at each point, and so
	// shift both means by the order of that.
	left := l / (math.Pi * math.Pi * lp * 60)
	mean := r2 / chains
	se := math.Sqrt((r4/chains - mean*mean) / chains)
	near(t, "⟨R²⟩", mean, MeanSquareEndToEnd2D(lp, l), 4*se+mean*left)
	mean = cosine / chains
	se = math.Sqrt((cosine2/chains - mean*mean) / chains)
	near(t, "⟨cos⟩", mean, TangentCorrelation2D(lp, l/2), 4*se+left)
}

func TestVarianceAndRelaxationIdentity(t *testing.T) {
	c := actin(t, func(o *Options) { o.TubeStiffness = 0.05 })
	for n := 1; n <= 12; n++ {
		// var/τ = kT/ζ for every mode, whatever the stiffness and the tube; in µm³/s.
		near(t, "var/τ", c.Variance(n)/c.RelaxationS(n)/(KT(295)/2e-3*1e18), 1, 1e-12)
	}
	free := actin(t, nil)
	// τ₁ = ζL⁴/(κ k⁴) in SI.
	want := 2e-3 * math.Pow(12e-6, 4) / (15e-6 * KT(295) * math.Pow(BeamRoot(1), 4))
	near(t, "τ₁", free.RelaxationS(1)/want, 1, 1e-12)
}

// Before the slowest mode relaxes, a point in the middle moves as on an endless filament,
// ⟨Δy²⟩ = 2Γ(¼)/(3π)·kT t^¾/(κ^¼ζ^¾), and one at an end four times as far. The exponent is that of Farge &
// Maggs, Macromolecules 26:5041 (1993) (citation from memory), the coefficient
// (2kT/π)∫(1−e^{−κq⁴t/ζ})/(κq⁴)dq.
func TestModesAddUpToThreeQuarterLaw(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes = 400 })
	dt := 1e-3 * c.RelaxationS(1)
	kT, zeta, l := KT(295), 2e-3, 12e-6
	msd := func(x float64) float64 {
		offset := x - 0.5
		// Rigid: 2D⊥t and 2D_r t times the squared distance from the middle.
		sum := 2 * kT / (zeta * l) * dt * (1 + 12*offset*offset) * 1e12
		for n := 1; n <= 400; n++ {
			psi := BeamMode(n, x)
			sum += -2 * c.Variance(n) * math.Expm1(-dt/c.RelaxationS(n)) * psi * psi / 12
		}
		return sum
	}
	want := 2 * math.Gamma(0.25) / (3 * math.Pi) * kT * math.Pow(dt, 0.75) / math.Pow(15e-6*kT, 0.25) / math.Pow(zeta, 0.75) * 1e12
	near(t, "middle", msd(0.5)/want, 1, 1e-3)
	near(t, "end", msd(0)/want, 4, 4e-3)
}

func TestStressFreeShape(t *testing.T) {
	c := actin(t, func(o *Options) { o.CurvaturePerUm, o.WanderUm, o.TurnRad = 0.1, 0, 0 })
	var curve Curve
	c.Curve(State{B: make([]float64, c.opts.Modes), Pose: Pose{3, 4, 0.5}}, &curve)
	last := len(curve.X) - 1
	// The chord of an arc of radius 10 µm.
	near(t, "chord", math.Hypot(curve.X[last]-curve.X[0], curve.Y[last]-curve.Y[0]), 20*math.Sin(0.6), 1e-4)
	near(t, "direction", math.Atan2(curve.Y[last]-curve.Y[0], curve.X[last]-curve.X[0]), 0.5, 1e-9)
	s := c.Equilibrium(rand.New(rand.NewPCG(1, 1)))
	if s.Pose != (Pose{}) {
		t.Errorf("held pose %v, want home", s.Pose)
	}
}

func TestTubeHoldsRigidMotion(t *testing.T) {
	c := actin(t, func(o *Options) {
		o.TubeStiffness, o.WanderUm, o.Home = 0.02, 0.3, Pose{5, 6, 0.4}
	})
	rng := rand.New(rand.NewPCG(2, 9))
	step := c.Stepper(0.7)
	kT, l := KT(295), 12e-6
	const n = 4000
	var along, across, turn, bend float64
	for range n {
		s := c.Equilibrium(rng)
		step.Step(&s, nil, rng) // and equilibrium stays equilibrium
		sin, cos := math.Sincos(0.4)
		dx, dy := s.XUm-5, s.YUm-6
		along += math.Pow(dx*cos+dy*sin, 2)
		across += math.Pow(dy*cos-dx*sin, 2)
		turn += math.Pow(s.AngleRad-0.4, 2)
		bend += s.B[0] * s.B[0]
	}
	withinVariance(t, "along", along, 0.09, n)
	withinVariance(t, "across", across, kT/(0.02*l)*1e12, n)
	withinVariance(t, "turn", turn, 12*kT/(0.02*l*l*l), n)
	k4 := math.Pow(BeamRoot(1)/l, 4)
	withinVariance(t, "b₁", bend, kT/(15e-6*kT*k4+0.02)*1e18, n)
}

// The bulk rms of the tube from its exact modes: the mean square over the contour of a long
// filament is Σ⟨b_n²⟩/L, its end excess 1+2√2ℓ/L divided out, ℓ = (κ/γ)^¼.
func TestTubeStiffness(t *testing.T) {
	lp, l, rms := 15.0, 60.0, 0.15
	gamma := TubeStiffness(rms, lp, 295)
	c := actin(t, func(o *Options) { o.LengthUm, o.LpUm, o.TubeStiffness, o.Modes = l, lp, gamma, 300 })
	sum := 2 / c.tube // both rigid modes
	for n := 1; n <= 300; n++ {
		sum += c.Variance(n)
	}
	deflection := math.Pow(lp/c.tube, 0.25)
	near(t, "rms", math.Sqrt(sum/l/(1+2*math.Sqrt2*deflection/l)), rms, 1e-4)
}

func TestResample(t *testing.T) {
	c := Curve{X: []float64{0, 3, 3}, Y: []float64{0, 0, 1.04}}
	points, s := c.Resample(0.5)
	if len(s) != 9 || len(points.X) != 9 || len(points.Y) != 9 {
		t.Fatalf("%d points, want 9", len(s))
	}
	for i := range s {
		near(t, "s", s[i], 4.04*float64(i)/8, 1e-12)
		near(t, "x", points.X[i], math.Min(3, s[i]), 1e-12)
		near(t, "y", points.Y[i], math.Max(0, s[i]-3), 1e-12)
	}
}

func BenchmarkCurve(b *testing.B) {
	c := actin(b, nil)
	s := c.Equilibrium(rand.New(rand.NewPCG(1, 1)))
	var curve Curve
	for b.Loop() {
		c.Curve(s, &curve)
	}
}
