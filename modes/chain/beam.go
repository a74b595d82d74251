package chain

import (
	"fmt"
	"math"
	"sync"
)

// BeamRoot returns kL of bending mode n of a beam with two free ends: the n-th positive
// root of cosh x·cos x = 1, n from 1, to double precision. It panics for n below 1.
// Source: Landau & Lifshitz, Theory of Elasticity, §25 (equation from memory).
func BeamRoot(n int) float64 {
	if n < 1 {
		panic(fmt.Sprintf("chain: beam mode %d, want 1 or more", n))
	}
	if roots := beamRoots(); n <= len(roots) {
		return roots[n-1]
	}
	return solveBeamRoot(n)
}

// beamRoots holds the roots that callers ask for in loops over modes and points.
var beamRoots = sync.OnceValue(func() []float64 {
	roots := make([]float64, 512)
	for i := range roots {
		roots[i] = solveBeamRoot(i + 1)
	}
	return roots
})

func solveBeamRoot(n int) float64 {
	// With x = (n+½)π + d the equation reads sin d = ∓1/cosh x; its iteration contracts by
	// 1/cosh x, at most 0.02, per step.
	base := (float64(n) + 0.5) * math.Pi
	sign := 1.0
	if n%2 == 0 {
		sign = -1
	}
	x := base
	for range 12 {
		x = base + sign*math.Asin(1/math.Cosh(x))
	}
	return x
}

// BeamMode returns ψ_n(x), bending mode n of a free–free beam of unit length, x in [0, 1]:
// ∫ψ_n² = 1, ψ_n(0) = 2, even about the middle for odd n and odd for even n. A filament of
// length L has ψ_n(s) = BeamMode(n, s/L)/√L. It panics for n below 1.
//
// The hyperbolic part is written in decaying exponentials, so that it is exact for low n
// and neither overflows nor cancels for high n.
func BeamMode(n int, x float64) float64 { return beam(n, 0, x) }

// BeamSlope returns ψ_n′(x) at unit length; at length L it is BeamSlope(n, s/L)/L^{3/2}.
func BeamSlope(n int, x float64) float64 { return beam(n, 1, x) }

// BeamCurvature returns ψ_n″(x) at unit length; at length L it is
// BeamCurvature(n, s/L)/L^{5/2}. It vanishes at both ends.
func BeamCurvature(n int, x float64) float64 { return beam(n, 2, x) }

// BeamThird returns ψ_n‴(x) at unit length; at length L it is BeamThird(n, s/L)/L^{7/2}. It
// vanishes at both ends.
func BeamThird(n int, x float64) float64 { return beam(n, 3, x) }

// beam returns derivative d (0 to 3) of ψ_n. With u = x−½, odd n is
// cos ku/cos(k/2) + cosh ku/cosh(k/2) and even n is −sin ku/sin(k/2) − sinh ku/sinh(k/2).
func beam(n, d int, x float64) float64 {
	k := BeamRoot(n)
	left, right := math.Exp(-k*x), math.Exp(-k*(1-x))
	sin, cos := math.Sincos(k * (x - 0.5))
	amplitude, end, sign := math.Cos(k/2), 1+math.Exp(-k), 1.0
	if n%2 == 0 {
		amplitude, end, sign = math.Sin(k/2), 1-math.Exp(-k), -1
	}
	// Each derivative turns cos → −sin → −cos → sin and swaps cosh with sinh.
	even := (n%2 == 1) == (d%2 == 0) // this derivative is even about the middle
	wave, decay := sin, right-left
	if even {
		wave, decay = cos, right+left
	}
	waveSign := 1.0
	switch d {
	case 1:
		if n%2 == 1 {
			waveSign = -1
		}
	case 2:
		waveSign = -1
	case 3:
		if n%2 == 0 {
			waveSign = -1
		}
	}
	return sign * powInt(k, d) * (waveSign*wave/amplitude + decay/end)
}

func powInt(x float64, n int) float64 {
	p := 1.0
	for range n {
		p *= x
	}
	return p
}

// CosineMixture returns c_nm, the weight of beam mode m in cosine mode n of the tangent
// angle, n and m from 1: with y = Σ b_m ψ_m(s) and θ = dy/ds,
//
//	a_n = √(2/L) ∫ θ cos(nπs/L) ds = Σ_m c_nm b_m / L,  c_nm = √2 ∫₀¹ ψ_m′(x) cos(nπx) dx.
//
// Four integrations by parts with ψ⁗ = k⁴ψ and force-free ends give
// −4√2 k_m⁴/(k_m⁴−(nπ)⁴) for n+m even and 0 otherwise. It panics for n or m below 1.
func CosineMixture(n, m int) float64 {
	if n < 1 {
		panic(fmt.Sprintf("chain: cosine mode %d, want 1 or more", n))
	}
	k4 := powInt(BeamRoot(m), 4)
	if (n+m)%2 != 0 {
		return 0
	}
	return -4 * math.Sqrt2 * k4 / (k4 - powInt(float64(n)*math.Pi, 4))
}

// BlurFactor returns S(α) = 2(α−1+e^{−α})/α², the variance of an exponentially correlated
// amplitude averaged over an exposure, relative to its instantaneous variance; α is the
// exposure divided by the relaxation time. It is 1 at α = 0; a negative α panics.
// Source: Wong & Halvorsen, Opt. Express 14:12517 (2006), the harmonic case; derived anew.
func BlurFactor(alpha float64) float64 {
	if alpha < 0 {
		panic(fmt.Sprintf("chain: exposure over relaxation time %g, want 0 or more", alpha))
	}
	if alpha < 0.5 { // Σ 2(−α)^j/(j+2)!, free of the closed form's cancellation
		sum, term := 0.0, 1.0
		for j := 0; j < 18; j++ {
			sum += term
			term *= -alpha / float64(j+3)
		}
		return sum
	}
	if math.IsInf(alpha, 1) {
		return 0
	}
	return 2 * (alpha + math.Expm1(-alpha)) / (alpha * alpha)
}
