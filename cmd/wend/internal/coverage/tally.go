package main

import (
	"math"
	"sort"
)

// sharpTo is the Cramér–Rao standard deviation of ln Lp up to which a movie should give a value close to the bound.
const sharpTo = 0.15

// tally gathers estimates of one quantity by one method.
type tally struct {
	n, held, lowMiss, highMiss, open, none int
	errors                                 []float64 // of the logarithm
	sharpN, sharpAnswered                  int
	ratios, widths                         []float64 // error and width over the bound's, sharp movies alone
}

// enter adds an estimate of truth: value NaN where there is only a bound, and low NaN where there is nothing. boundSD is the least standard deviation
// of the logarithm.
func (t *tally) enter(value, low, high, truth, boundSD float64) {
	t.n++
	if boundSD < sharpTo {
		t.sharpN++
	}
	switch {
	case math.IsNaN(low):
		t.none++
		return
	case low > truth:
		t.lowMiss++
	case high < truth:
		t.highMiss++
	default:
		t.held++
	}
	if math.IsInf(high, 1) || math.IsNaN(value) {
		t.open++
		return
	}
	e := math.Log(value / truth)
	t.errors = append(t.errors, e)
	if boundSD < sharpTo {
		t.sharpAnswered++
		t.ratios = append(t.ratios, e/boundSD)
		t.widths = append(t.widths, math.Log(high/low)/(2*1.959964*boundSD))
	}
}

// add adds the counts of another tally.
func (t *tally) add(o tally) {
	t.n, t.held, t.lowMiss, t.highMiss, t.open, t.none = t.n+o.n, t.held+o.held, t.lowMiss+o.lowMiss, t.highMiss+o.highMiss, t.open+o.open, t.none+o.none
	t.errors = append(t.errors, o.errors...)
	t.sharpN, t.sharpAnswered = t.sharpN+o.sharpN, t.sharpAnswered+o.sharpAnswered
	t.ratios, t.widths = append(t.ratios, o.ratios...), append(t.widths, o.widths...)
}

// covered is the share of intervals, lower bounds included, that hold the truth.
func (t tally) covered() float64 { return float64(t.held) / float64(t.n-t.none) }

// bias returns the mean of the logarithmic error and its standard error.
func (t tally) bias() (mean, se float64) {
	n, s, s2 := float64(len(t.errors)), 0.0, 0.0
	for _, e := range t.errors {
		s, s2 = s+e, s2+e*e
	}
	mean = s / n
	return mean, math.Sqrt(math.Max(0, s2/n-mean*mean) / n)
}

// sharp returns how many movies are sharp, the share of them with a value, the root mean square error over the bound and the median width of
// the interval over the bound's.
func (t tally) sharp() (n int, answered, spread, width float64) {
	for _, r := range t.ratios {
		spread += r * r
	}
	w := append([]float64{}, t.widths...)
	sort.Float64s(w)
	width = math.NaN()
	if len(w) > 0 {
		width = w[len(w)/2]
	}
	return t.sharpN, float64(t.sharpAnswered) / float64(t.sharpN), math.Sqrt(spread / float64(len(t.ratios))), width
}
