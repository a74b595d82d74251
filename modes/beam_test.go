package modes

import (
	"math"
	"testing"

	"wend/modes/chain"
)

// integrated returns points about spacing apart on the curve whose tangent angle is angle(s), by fine midpoint integration.
func integrated(length, spacing float64, angle func(s float64) float64) Curve {
	n := int(math.Round(length / spacing))
	const fine = 50
	h := length / float64(n*fine)
	c := Curve{XUm: []float64{3}, YUm: []float64{-2}}
	x, y := 3.0, -2.0
	for i := range n {
		for j := range fine {
			t := angle((float64(i*fine+j) + 0.5) * h)
			x += h * math.Cos(t)
			y += h * math.Sin(t)
		}
		c.XUm, c.YUm = append(c.XUm, x), append(c.YUm, y)
	}
	return c
}

// A curve made of known amplitudes, with bends of a radian and crossing the angle ±π, gives them back.
func TestBeamAmplitudesKnownCurve(t *testing.T) {
	const length = 7.3
	want := []float64{2, -1.5, 0.6, 0.2, -0.1, 0.04, 0.02, -0.01}
	for _, spacing := range []float64{0.05, 0.1, 0.2} {
		c := integrated(length, spacing, func(s float64) float64 {
			a := 3.0
			for n, b := range want {
				a += b * chain.BeamSlope(n+1, s/length) / math.Pow(length, 1.5)
			}
			return a
		})
		got := BeamAmplitudes(c, length, len(want))
		for n := range want {
			// What remains is that a chord is shorter than its arc by (θ′Δ)²/24, which shifts arc length. θ′ reaches 2/µm
			// here, so 0.002 of the arc at Δ = 0.1; twice that of an amplitude is allowed, and of what leaks from others.
			if d := math.Abs(got[n] - want[n]); !(d <= 0.4*spacing*spacing*math.Abs(want[n])+0.02*spacing*spacing) {
				t.Errorf("spacing %g, mode %d: %.6f, want %.6f", spacing, n+1, got[n], want[n])
			}
		}
	}
}

// Turning, shifting and scaling of arc length leave the amplitudes as they are; running from the other end and mirroring
// change signs only.
func TestBeamAmplitudesSymmetry(t *testing.T) {
	angle := func(s float64) float64 { return 0.4*math.Sin(1.3*s) + 0.05*s*s }
	c := integrated(5, 0.1, angle)
	ref := BeamAmplitudes(c, 5, 6)
	turned := Curve{}
	for i := range c.XUm {
		sin, cos := math.Sincos(2.9)
		turned.XUm = append(turned.XUm, 100+cos*c.XUm[i]-sin*c.YUm[i])
		turned.YUm = append(turned.YUm, sin*c.XUm[i]+cos*c.YUm[i])
	}
	back, mirror := Curve{}, Curve{XUm: c.XUm}
	for i := range c.XUm {
		j := len(c.XUm) - 1 - i
		back.XUm, back.YUm = append(back.XUm, c.XUm[j]), append(back.YUm, c.YUm[j])
		mirror.YUm = append(mirror.YUm, -c.YUm[i])
	}
	for name, tc := range map[string]struct {
		c    Curve
		sign func(n int) float64
	}{
		"turned":   {turned, func(int) float64 { return 1 }},
		"mirrored": {mirror, func(int) float64 { return -1 }},
		// ψ_n is even about the middle for odd n; y and the direction of s both turn over.
		"from the other end": {back, func(n int) float64 { return float64(1 - 2*(n%2)) }},
	} {
		got := BeamAmplitudes(tc.c, 5, 6)
		for n := 1; n <= 6; n++ {
			if d := math.Abs(got[n-1] - tc.sign(n)*ref[n-1]); !(d <= 1e-9) {
				t.Errorf("%s, mode %d: %.9f, reference %.9f", name, n, got[n-1], ref[n-1])
			}
		}
	}
}

func TestBeamAmplitudesRefuses(t *testing.T) {
	for name, c := range map[string]Curve{
		"empty":    {},
		"two":      {XUm: []float64{0, 1}, YUm: []float64{0, 0}},
		"repeated": {XUm: []float64{0, 1, 1, 2}, YUm: []float64{0, 0, 0, 0}},
		"nan":      {XUm: []float64{0, math.NaN(), 2}, YUm: []float64{0, 0, 0}},
		"ragged":   {XUm: []float64{0, 1, 2}, YUm: []float64{0, 0}},
	} {
		got := BeamAmplitudes(c, 3, 2)
		if len(got) != 2 || !math.IsNaN(got[0]) || !math.IsNaN(got[1]) {
			t.Errorf("%s: %v, want two NaN", name, got)
		}
	}
}
