package report

import (
	"math"
	"testing"
)

func TestRoundInterval(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	for _, tc := range []struct {
		value, low, high   float64
		wantValue, wantInt string
	}{
		{17.234, 14.06, 21.03, "17.2", "14.1 to 21.0"},    // half-width 3.485: tenths
		{17.234, 17.02, 17.41, "17.23", "17.02 to 17.41"}, // 0.195: hundredths
		{1734, 1406, 2103, "1730", "1410 to 2100"},        // 348.5: tens
		{10, 0.04, 19.96, "10", "0 to 20"},                // 9.96 has the two digits 10
		{nan, 123.4, inf, "–", "≥ 123"},
		{15.2, 8.34, inf, "15.2", "≥ 8.3"},
		{nan, nan, nan, "–", "–"},
		{7.05e-26, 5.8e-26, 8.9e-26, "7.1", "(5.8 to 8.9) × 10⁻²⁶"},
	} {
		got := roundInterval(tc.value, tc.low, tc.high)
		if got.Value != tc.wantValue || got.Interval() != tc.wantInt {
			t.Errorf("roundInterval(%g, %g, %g) = %q, %q, want %q, %q", tc.value, tc.low, tc.high, got.Value, got.Interval(), tc.wantValue, tc.wantInt)
		}
	}
}

func TestDigits(t *testing.T) {
	for _, tc := range []struct {
		v    float64
		n    int
		want string
	}{{0.108, 3, "0.108"}, {9.996, 3, "10.0"}, {123456, 3, "123456"}, {-0.5, 2, "−0.50"}, {0, 3, "0"}, {2.4e-5, 2, "2.4 × 10⁻⁵"},
		{math.NaN(), 2, "–"}, {math.Inf(1), 2, "∞"}} {
		if got := digits(tc.v, tc.n); got != tc.want {
			t.Errorf("digits(%g, %d) = %q, want %q", tc.v, tc.n, got, tc.want)
		}
	}
	if got := plain(22); got != "22" {
		t.Errorf("plain(22) = %q", got)
	}
}
