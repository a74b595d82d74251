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
	if got := strings.Count(out[0].String(), "\n"); got != 5 {
		t.Errorf("%d lines, want a header, 3 conditions and a total", got)
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

// Tallies: one interval holds, one lies above the truth, one is open, one is missing.
func TestTally(t *testing.T) {
	var y tally
	nan, inf := math.NaN(), math.Inf(1)
	y.enter(2, 1, 4, 2)
	y.enter(6, 3, 12, 2)
	y.enter(nan, 1, inf, 2)
	y.enter(nan, nan, nan, 2)
	mean, rms, predicted := y.bias()
	if y.n != 4 || y.held != 2 || y.lowMiss != 1 || y.open != 1 || y.none != 1 || math.Abs(y.covered()-2./3) > 1e-12 {
		t.Errorf("%+v", y)
	}
	if e := math.Log(3); math.Abs(mean-e/2) > 1e-12 || math.Abs(rms-e/math.Sqrt2) > 1e-12 || math.Abs(predicted-math.Log(4)/3.919928) > 1e-6 {
		t.Errorf("mean %g, rms %g, predicted %g", mean, rms, predicted)
	}
}
