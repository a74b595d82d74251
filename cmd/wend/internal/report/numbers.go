package report

import (
	"math"
	"strconv"
	"strings"
)

// valueInterval is a value with its 95 % interval, rounded alike and with one power of ten for all three.
type valueInterval struct {
	Value, Low, High string // "–" where there is none, "∞" for no upper limit
	Power            string // " × 10⁻²⁶", or empty
}

const none = "–"

// roundInterval rounds to two significant digits of half the interval's width, or, where that is not finite,
// to three of the value.
func roundInterval(value, low, high float64) valueInterval {
	scale := 0.0
	for _, v := range []float64{value, low, high} {
		if finite(v) {
			scale = math.Max(scale, math.Abs(v))
		}
	}
	exponent := 0
	power := ""
	if scale > 0 && (scale < 1e-2 || scale >= 1e6) {
		exponent = int(math.Floor(math.Log10(scale)))
		power = " × 10" + superscript(exponent)
	}
	unit := math.Pow(10, float64(exponent))
	half := (high - low) / 2
	decimals := 0
	switch {
	case finite(half) && half > 0:
		decimals = decimalsFor(half/unit, 2)
	case scale > 0:
		decimals = decimalsFor(scale/unit, 3)
	}
	show := func(v float64) string { return roundTo(v/unit, decimals) }
	return valueInterval{show(value), show(low), show(high), power}
}

// Interval is "14.1 to 21.0", "≥ 14.1" without upper limit, or "–".
func (v valueInterval) Interval() string {
	switch {
	case v.Low == none && v.High == none:
		return none
	case v.High == "∞":
		return "≥ " + v.Low + v.Power
	case v.Power != "":
		return "(" + v.Low + " to " + v.High + ")" + v.Power
	}
	return v.Low + " to " + v.High
}

// decimalsFor is how many decimals show so many significant digits of v; negative for tens and hundreds.
func decimalsFor(v float64, digits int) int {
	d := digits - 1 - int(math.Floor(math.Log10(v)))
	// 0.0996 rounds to 0.10, which needs one decimal less.
	if p := math.Pow(10, float64(d)); math.Round(v*p) >= math.Pow(10, float64(digits)) {
		d--
	}
	return max(-6, min(8, d))
}

func roundTo(v float64, decimals int) string {
	switch {
	case math.IsNaN(v):
		return none
	case math.IsInf(v, 1):
		return "∞"
	case math.IsInf(v, -1):
		return "−∞"
	}
	if decimals < 0 {
		p := math.Pow(10, float64(-decimals))
		v, decimals = math.Round(v/p)*p, 0
	}
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.HasPrefix(s, "-") {
		if strings.Trim(s, "-0.") == "" {
			return s[1:]
		}
		return "−" + s[1:]
	}
	return s
}

// digits prints v with so many significant digits, a power of ten where it is very large or small.
func digits(v float64, n int) string {
	if !finite(v) || v == 0 {
		return roundTo(v, 0)
	}
	a := math.Abs(v)
	if a < 1e-3 || a >= 1e6 {
		e := int(math.Floor(math.Log10(a)))
		return roundTo(v/math.Pow(10, float64(e)), n-1) + " × 10" + superscript(e)
	}
	return roundTo(v, max(0, decimalsFor(a, n)))
}

// plain prints a setting: up to six significant digits, without zeros at the end.
func plain(v float64) string {
	if !finite(v) {
		return none
	}
	return strconv.FormatFloat(v, 'g', 6, 64)
}

func superscript(n int) string {
	return strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴", "5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹").
		Replace(strconv.Itoa(n))
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

func positive(v float64) bool { return finite(v) && v > 0 }

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}
