package chain

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestStaticsLimits(t *testing.T) {
	for _, l := range []float64{1, 10, 23.7} {
		near(t, "2D rod", MeanSquareEndToEnd2D(1e9*l, l)/(l*l), 1, 1e-9)
		near(t, "3D rod", MeanSquareEndToEnd3D(1e9*l, l)/(l*l), 1, 1e-9)
		lp := l / 1e7
		near(t, "2D coil", MeanSquareEndToEnd2D(lp, l)/(4*lp*l), 1, 3e-7)
		near(t, "3D coil", MeanSquareEndToEnd3D(lp, l)/(2*lp*l), 1, 3e-7)
		near(t, "trapped coil", MeanSquareEndToEndTrapped(lp, l)/(4.0/3*lp*l), 1, 3e-7)
		// The plane's chain is that of space at twice the persistence length.
		near(t, "2D as 3D", MeanSquareEndToEnd2D(l, l), MeanSquareEndToEnd3D(2*l, l), 1e-12)
		// ⟨R²⟩ is the double integral of the tangent correlation.
		want := simpson(400, func(u float64) float64 { return 2 * l * l * (1 - u) * TangentCorrelation2D(0.6*l, u*l) })
		near(t, "2D integral", MeanSquareEndToEnd2D(0.6*l, l), want, 1e-9*l*l)
		want = simpson(400, func(u float64) float64 { return 2 * l * l * (1 - u) * TangentCorrelation3D(0.6*l, u*l) })
		near(t, "3D integral", MeanSquareEndToEnd3D(0.6*l, l), want, 1e-9*l*l)
	}
}

func TestPersistenceFromEndToEndInverts(t *testing.T) {
	for _, ratio := range []float64{1e-3, 0.1, 0.8, 1.7, 30, 1e3} {
		l := 7.3
		lp := ratio * l
		// Near the rod the contraction L²−⟨R²⟩ is all that is left, 1/(6 ratio) of L².
		tol := 1e-12 * math.Max(1, 10*ratio)
		near(t, "2D", PersistenceFromEndToEnd2D(MeanSquareEndToEnd2D(lp, l), l)/lp, 1, tol)
		near(t, "3D", PersistenceFromEndToEnd3D(MeanSquareEndToEnd3D(lp, l), l)/lp, 1, tol)
		near(t, "trapped", PersistenceFromEndToEndTrapped(MeanSquareEndToEndTrapped(lp, l), l)/lp, 1, tol)
	}
	if got := PersistenceFromEndToEnd2D(4, 2); !math.IsInf(got, 1) {
		t.Errorf("rod gave %g, want +Inf", got)
	}
	for _, bad := range []float64{-1, 0, 4.01, math.NaN()} {
		if got := PersistenceFromEndToEnd2D(bad, 2); !math.IsNaN(got) {
			t.Errorf("⟨R²⟩ %g at L 2 gave %g, want NaN", bad, got)
		}
	}
}

// A chain of joined segments in space, built without any of the package: each tangent is
// turned from the last by a Gaussian step of variance 2Δ/Lp on the sphere's tangent plane.
func TestMeanSquareEndToEndAgainstWalk(t *testing.T) {
	const chains, steps = 3000, 160
	rng := rand.New(rand.NewPCG(3, 1))
	for _, tc := range []struct{ l, lp float64 }{{10, 17}, {10, 5}, {20, 2}} {
		ds := tc.l / steps
		var sum, sum2, flat float64
		for range chains {
			var r, u [3]float64
			z := 2*rng.Float64() - 1
			phi := 2 * math.Pi * rng.Float64()
			u = [3]float64{math.Sqrt(1-z*z) * math.Cos(phi), math.Sqrt(1-z*z) * math.Sin(phi), z}
			for range steps {
				var kick [3]float64
				dot := 0.0
				for i := range kick {
					r[i] += u[i] * ds
					kick[i] = rng.NormFloat64() * math.Sqrt(ds/tc.lp)
					dot += kick[i] * u[i]
				}
				norm := 0.0
				for i := range u {
					kick[i] -= dot * u[i]
					norm += kick[i] * kick[i]
				}
				sin, cos := math.Sincos(math.Sqrt(norm))
				for i := range u { // turn by the length of the kick
					u[i] = cos*u[i] + sin*kick[i]/math.Sqrt(norm)
				}
			}
			xy := r[0]*r[0] + r[1]*r[1]
			r2 := xy + r[2]*r[2]
			sum, sum2, flat = sum+r2, sum2+r2*r2, flat+xy
		}
		mean := sum / chains
		se := math.Sqrt((sum2/chains - mean*mean) / chains)
		// A turn by a Gaussian angle has ⟨cos⟩ = 1 − x + x²/3, x = Δ/Lp, so the walk's own
		// persistence length is off by x/6 of itself.
		walk := mean * ds / tc.lp / 6
		near(t, "⟨R²⟩", mean, MeanSquareEndToEnd3D(tc.lp, tc.l), 4*se+walk)
		near(t, "projected ⟨R²⟩", flat/chains, MeanSquareEndToEndTrapped(tc.lp, tc.l), 8*se+walk)
	}
}
