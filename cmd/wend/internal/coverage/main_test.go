package main

import (
	"bytes"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"wend/modes"
)

// The same seed gives the same bytes, whatever the number of workers, and a row per condition.
func TestRun(t *testing.T) {
	var out [2]bytes.Buffer
	for i, workers := range []string{"1", "3"} {
		var stderr bytes.Buffer
		if code := run([]string{"-conditions", "3", "-repeats", "2", "-workers", workers}, &out[i], &stderr); code != 0 || stderr.Len() > 0 {
			t.Fatalf("status %d, %s", code, stderr.String())
		}
	}
	if out[0].String() != out[1].String() {
		t.Errorf("one worker:\n%s\nthree:\n%s", out[0].String(), out[1].String())
	}
	if !strings.Contains(out[0].String(), "covered") || !strings.Contains(out[0].String(), "\n     all ") && !strings.Contains(out[0].String(), " all ") {
		t.Errorf("no row for all:\n%s", out[0].String())
	}
	var stdout, stderr bytes.Buffer
	if code := run([]string{"-repeats", "0"}, &stdout, &stderr); code != 2 || stderr.Len() == 0 {
		t.Errorf("no repeats: status %d, message %q, want 2 and a message", code, stderr.String())
	}
}

// The contours drawn have the variance that the theory gives them: without exposure and noise 1/(Lp·k⁴).
func TestSimulate(t *testing.T) {
	c := condition{dragPaS: 1e-3, lengthUm: 5, lpUm: 8, frames: 400, intervalS: 5, noiseScale: 1}
	s := simulate(c, rand.New(rand.NewPCG(1, 1)))
	var b [][]float64
	for _, curve := range s.Curves {
		b = append(b, modes.BeamAmplitudes(curve, c.lengthUm, 4))
	}
	for n := range 4 {
		mean, square := 0.0, 0.0
		for i := range b {
			mean += b[i][n] / 400
		}
		for i := range b {
			square += (b[i][n] - mean) * (b[i][n] - mean) / 399
		}
		want := 1 / (c.lpUm * math.Pow(modes.BeamWavenumber(n+1, c.lengthUm), 4))
		// 400 independent values: 7 %, three and a half times that.
		if !(math.Abs(math.Log(square/want)) < 0.25) {
			t.Errorf("mode %d: variance %.3g µm³, want %.3g", n+1, square, want)
		}
	}
}

// Tallies: one interval holds, one lies above the truth, one is open, one is missing. The second's error is twice the bound's.
func TestTally(t *testing.T) {
	var y tally
	nan, inf := math.NaN(), math.Inf(1)
	y.enter(2, 1, 4, 2, 0.2)
	y.enter(2*math.Exp(0.2), 2*math.Exp(0.1), 2*math.Exp(0.3), 2, 0.1)
	y.enter(nan, 1, inf, 2, 0.2)
	y.enter(nan, nan, nan, 2, 0.1)
	mean, se := y.bias()
	if y.n != 4 || y.held != 2 || y.lowMiss != 1 || y.open != 1 || y.none != 1 || math.Abs(y.covered()-2./3) > 1e-12 {
		t.Errorf("%+v", y)
	}
	if math.Abs(mean-0.1) > 1e-12 || math.Abs(se-0.1/math.Sqrt2) > 1e-12 {
		t.Errorf("mean %g, standard error %g", mean, se)
	}
	if n, answered, spread, width := y.sharp(); n != 2 || answered != 0.5 || math.Abs(spread-2) > 1e-9 || math.Abs(width-0.2/(2*1.959964*0.1)) > 1e-9 {
		t.Errorf("sharp: %d, answered %g, spread %g, width %g", n, answered, spread, width)
	}
	z := y
	z.add(y)
	if z.n != 8 || z.held != 4 || z.covered() != y.covered() {
		t.Errorf("twice: %+v", z)
	}
}
