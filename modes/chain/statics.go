package chain

import "math"

// TangentCorrelation2D returns ⟨cos[θ(s)−θ(0)]⟩ = exp(−s/2Lp) of a chain in a plane, for a
// persistence length lp and a separation s in one unit.
func TangentCorrelation2D(lp, s float64) float64 { return math.Exp(-s / (2 * lp)) }

// TangentCorrelation3D returns ⟨t(s)·t(0)⟩ = exp(−s/Lp) of the tangents in space.
func TangentCorrelation3D(lp, s float64) float64 { return math.Exp(-s / lp) }

// MeanSquareEndToEnd2D returns ⟨R²⟩ = 4LpL[1 − (2Lp/L)(1 − e^{−L/2Lp})] of a chain of
// persistence length lp and contour length l in equilibrium in a plane. It is accurate also
// for l ≪ lp, where it tends to l².
func MeanSquareEndToEnd2D(lp, l float64) float64 {
	// The double integral of the tangent correlation is that of a correlated amplitude over
	// an exposure.
	return l * l * BlurFactor(l/(2*lp))
}

// MeanSquareEndToEnd3D returns ⟨R²⟩ = 2LpL[1 − (Lp/L)(1 − e^{−L/Lp})] of a chain in space.
// Source: Kratky & Porod, Rec. Trav. Chim. 68:1106 (1949) (citation from memory).
func MeanSquareEndToEnd3D(lp, l float64) float64 { return l * l * BlurFactor(l/lp) }

// MeanSquareEndToEndTrapped returns ⟨R²⟩ in the plane of a chain that fell from space on a
// surface and stuck as it came, a projection: two thirds of [MeanSquareEndToEnd3D], with l
// the contour length in space. Source: Rivetti, Guthold & Bustamante, J. Mol. Biol. 264:919
// (1996) (citation from memory).
func MeanSquareEndToEndTrapped(lp, l float64) float64 { return 2.0 / 3 * MeanSquareEndToEnd3D(lp, l) }

// PersistenceFromEndToEnd2D returns the persistence length at which [MeanSquareEndToEnd2D]
// of contour length l is meanSquare: +Inf where meanSquare is l² and NaN where no
// persistence length gives it.
func PersistenceFromEndToEnd2D(meanSquare, l float64) float64 {
	return l / (2 * blurArgument(meanSquare/(l*l)))
}

// PersistenceFromEndToEnd3D is the inverse of [MeanSquareEndToEnd3D].
func PersistenceFromEndToEnd3D(meanSquare, l float64) float64 {
	return l / blurArgument(meanSquare/(l*l))
}

// PersistenceFromEndToEndTrapped is the inverse of [MeanSquareEndToEndTrapped].
func PersistenceFromEndToEndTrapped(meanSquare, l float64) float64 {
	return l / blurArgument(1.5*meanSquare/(l*l))
}

// blurArgument inverts BlurFactor: the α at which it is s, NaN for s outside (0, 1].
func blurArgument(s float64) float64 {
	if !(s > 0 && s <= 1) {
		return math.NaN()
	}
	if s == 1 {
		return 0
	}
	// S falls monotonically; 1−α/3 < S < 2/α bracket the root.
	low, high := math.Log(math.Max(3*(1-s), 1e-300)), math.Log(2/s)
	for range 60 {
		mid := (low + high) / 2
		if BlurFactor(math.Exp(mid)) > s {
			low = mid
		} else {
			high = mid
		}
	}
	return math.Exp((low + high) / 2)
}

// TubeStiffness returns γ (N/m²) of the harmonic tube in which a long filament of
// persistence length lpUm (µm) has the rms displacement rmsUm (µm) in each transverse
// direction at tempK (K): ⟨y²⟩ = kT/(2√2 κ^¼ γ^¾).
func TubeStiffness(rmsUm, lpUm, tempK float64) float64 {
	g := math.Pow(2*math.Sqrt2*math.Pow(lpUm, 0.25)*rmsUm*rmsUm, -4.0/3) // γ/kT, µm⁻³
	return g * KT(tempK) * 1e18
}
