package trace

import (
	"math"
	"testing"
)

// A cubic B-spline basis adds up to one, reproduces straight lines (coefficients at the functions' centres), has the slopes
// that differences give, and goes on straight outside.
func TestCubic(t *testing.T) {
	b := cubicOver(-2, 11, 1.7)
	value := func(s float64, coefficient func(x float64) float64) float64 {
		first, w := b.weights(s)
		sum := 0.0
		for k, v := range w {
			sum += v * coefficient(b.centre(first+k))
		}
		return sum
	}
	line := func(x float64) float64 { return 3 - 0.7*x }
	bend := func(x float64) float64 { return math.Sin(x) }
	for s := -4.0; s < 13; s += 0.173 {
		if got := value(s, func(float64) float64 { return 1 }); math.Abs(got-1) > 1e-12 {
			t.Errorf("at %.2f the basis adds up to %.15f", s, got)
		}
		if got := value(s, line); math.Abs(got-line(s)) > 1e-12 {
			t.Errorf("at %.2f a straight line is %.12f, want %.12f", s, got, line(s))
		}
		if s > -2+1e-3 && s < 11-1e-3 {
			first, w := b.slopes(s)
			slope := 0.0
			for k, v := range w {
				slope += v * bend(b.centre(first+k))
			}
			const h = 1e-5
			if want := (value(s+h, bend) - value(s-h, bend)) / (2 * h); math.Abs(slope-want) > 1e-8 {
				t.Errorf("at %.2f the slope is %.10f, by differences %.10f", s, slope, want)
			}
		}
	}
	// Beyond the end the curve is its own tangent.
	end := value(11, bend)
	slope := (value(11, bend) - value(11-1e-6, bend)) / 1e-6
	if got, want := value(13, bend), end+2*slope; math.Abs(got-want) > 1e-5 {
		t.Errorf("two beyond the end: %.8f, want %.8f", got, want)
	}
}

func TestHats(t *testing.T) {
	b := hatsOver(0, 10, 3)
	for s := -2.0; s < 12; s += 0.31 {
		first, w := b.weights(s)
		if math.Abs(w[0]+w[1]-1) > 1e-12 {
			t.Errorf("at %.2f the basis adds up to %g", s, w[0]+w[1])
		}
		got := w[0]*b.centre(first) + w[1]*b.centre(first+1)
		if want := min(max(s, 0), 10); math.Abs(got-want) > 1e-12 {
			t.Errorf("at %.2f the identity is %g, want %g", s, got, want)
		}
	}
}

// The recurrence is the exponential.
func TestGaussians(t *testing.T) {
	out := make([]float64, 14)
	for _, s2 := range []float64{0.6, 1.7, 9} {
		gaussians(out, -6.37, s2, 2.5)
		for i, got := range out {
			x := -6.37 + float64(i)
			want := 2.5 * math.Exp(-x*x/(2*s2))
			if math.Abs(got-want) > 1e-12*2.5+1e-9*want {
				t.Errorf("variance %g at %g: %g, want %g", s2, x, got, want)
			}
		}
	}
}

func TestResampleAndSmooth(t *testing.T) {
	var circle []xy
	for i := 0; i <= 60; i++ {
		sin, cos := math.Sincos(float64(i) / 20)
		circle = append(circle, xy{20 * cos, 20 * sin})
	}
	length := arcLengths(circle)[60]
	points := resample(circle, -3, 0.5, int((length+6)/0.5))
	for i, p := range points {
		s := -3 + 0.5*float64(i)
		if s > 1 && s < length-1 {
			if d := math.Abs(p.length() - 20); d > 2e-3 {
				t.Errorf("at %.1f a point lies %.4f off the circle", s, d)
			}
		}
		if i > 0 && math.Abs(p.distance(points[i-1])-0.5) > 5e-3 {
			t.Errorf("at %.1f the step is %.4f, want 0.5", s, p.distance(points[i-1]))
		}
	}
	// Before its beginning the curve goes on straight along the chord to its second point.
	if d := points[0].minus(circle[0]); math.Abs(d.length()-3) > 1e-9 || d.y > -2.9 {
		t.Errorf("3 before the beginning lies %v", d)
	}
	var line []xy
	for i := range 30 {
		line = append(line, xy{float64(i), 2 + 0.3*float64(i)})
	}
	for i, p := range smooth(line, 2) {
		if p.distance(line[i]) > 1e-12 {
			t.Errorf("smoothing moved point %d of a straight line by %g", i, p.distance(line[i]))
		}
	}
	if s := smooth(circle, 3); s[0] != circle[0] && s[0].distance(circle[0]) > 1e-9 {
		t.Error("smoothing moved an end")
	}
}
