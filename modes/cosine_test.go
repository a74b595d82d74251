package modes

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/modes/chain"
)

// direct is the definition: √(2/L) Σ θ_k Δs_k cos(nπs_k/L).
func direct(c Curve, lengthUm float64, n int) float64 {
	ch, _ := newChords(c)
	sum := 0.0
	for i, a := range ch.angle {
		s := (ch.start[i] + ch.length[i]/2) / ch.total
		sum += a * ch.length[i] / ch.total * lengthUm * math.Cos(float64(n)*math.Pi*s)
	}
	return math.Sqrt(2/lengthUm) * sum
}

// The cosine modes made of beam modes are those of the definition, for a shape that the beam modes hold.
func TestCosineModesDefinition(t *testing.T) {
	const length = 9.0
	rng := rand.New(rand.NewPCG(1, 8))
	var curves []Curve
	for range 6 {
		var b []float64
		for m := 1; m <= 6; m++ {
			b = append(b, rng.NormFloat64()/math.Sqrt(10*math.Pow(BeamWavenumber(m, length), 4)))
		}
		curves = append(curves, integrated(length, 0.05, func(s float64) float64 {
			a := 2.0
			for m, v := range b {
				a += v * chain.BeamSlope(m+1, s/length) / math.Pow(length, 1.5)
			}
			return a
		}))
	}
	s := Series{LengthUm: length, PSFUm: 0.13, TemperatureK: 295, Curves: curves, FreeEnds: true}
	for i := range curves {
		s.TimesS = append(s.TimesS, float64(i))
		s.NoiseUm3 = append(s.NoiseUm3, 1e-6)
	}
	o := DefaultOptions()
	rows := cosineModes(measure(s, o), theory{lpUm: 10, dragPaS: 3e-3, noiseScale: 1}, o)
	if len(rows) < 6 {
		t.Fatalf("%d rows, want 6 or more", len(rows))
	}
	for n := 1; n <= 6; n++ {
		want := 0.0
		for _, c := range curves {
			want += direct(c, length, n) / float64(len(curves))
		}
		if got := rows[n-1].MeanAmplitude; !(math.Abs(got-want) <= 2e-3*math.Sqrt(rows[n-1].free/10)+1e-3*math.Abs(want)) {
			t.Errorf("mode %d: mean amplitude %.6f, by definition %.6f", n, got, want)
		}
		if got, want := rows[n-1].WavelengthUm, 2*length/float64(n); !(math.Abs(got-want) < 1e-9) {
			t.Errorf("mode %d: wavelength %g, want %g", n, got, want)
		}
	}
}

// The blur of a cosine mode for exposures in units of the first beam mode's relaxation time, computed elsewhere from
// the mixture of beam modes and printed to three digits. Modes beyond those resolved take part there and not here, hence one per cent.
func TestCosineModesBlur(t *testing.T) {
	for _, tc := range []struct {
		exposure float64
		want     [4]float64
	}{{0.1, [4]float64{0.952, 0.760, 0.455, 0.233}}, {0.5, [4]float64{0.832, 0.375, 0.140, 0.061}}, {1, [4]float64{0.717, 0.219, 0.080, 0.032}}} {
		f := filament{lengthUm: 10, lpUm: 10, dragPaS: 3e-3, frames: 3, intervalS: 10, noiseUm3: 1e-6, seed: 1}
		s := f.series(t)
		o := DefaultOptions()
		a := measure(s, o)
		th := theory{lpUm: 10, dragPaS: 3e-3, noiseScale: 1}
		a.frames.ExposureS = tc.exposure * a.relaxation(a.k[0], th)
		for n, row := range cosineModes(a, th, o)[:4] {
			if got := row.BlurFactor; !(math.Abs(got/tc.want[n]-1) < 0.012+5e-4/tc.want[n]) {
				t.Errorf("exposure %gτ, mode %d: blur %.4f, want %.3f", tc.exposure, n+1, got, tc.want[n])
			}
		}
	}
}

// One mode without noise: the combined estimate is that mode's, less the bias 1/ν of its logarithm.
func TestCombineModesOne(t *testing.T) {
	r := cosineRow{gain: 0.5, free: 4}
	r.Used, r.Variance, r.Shapes = true, 0.2, 40
	value, low, high, used := combineModes([]cosineRow{r}, 1, 0)
	if want := 4 * 0.5 / 0.2 * math.Exp(-1./40); used != 1 || !(math.Abs(value/want-1) < 1e-4) {
		t.Errorf("%d modes, %.6f, want 1 and %.6f", used, value, want)
	}
	if !(low < value && value < high) {
		t.Errorf("interval %g to %g about %g", low, high, value)
	}
	// The ends: ν(x-1-ln x) = 3.841459 with x = s²/V.
	for _, end := range []float64{low, high} {
		x := end / 10
		if d := 40*(x-1-math.Log(x)) - 3.841459; !(math.Abs(d) < 1e-3) {
			t.Errorf("end %g: twice the drop is %g off", end, d)
		}
	}
}

// ⟨cos⟩ of a circle's arc is cos(s/r), whatever the noise-free method does with it.
func TestTangentOfArc(t *testing.T) {
	c := integrated(6, 0.1, func(s float64) float64 { return s / 5 })
	s := Series{LengthUm: 6, PSFUm: 0.13, TemperatureK: 295, FreeEnds: true}
	for i := range 3 {
		s.Curves, s.TimesS, s.NoiseUm3 = append(s.Curves, c), append(s.TimesS, float64(i)), append(s.NoiseUm3, 1e-6)
	}
	a := measure(s, DefaultOptions())
	rows, _ := tangentCorrelation(a, theory{lpUm: 10, dragPaS: 3e-3, noiseScale: 1})
	if len(rows) < 10 {
		t.Fatalf("%d separations, want 10 or more", len(rows))
	}
	for _, r := range rows {
		if want := math.Cos(r.SeparationUm / 5); !(math.Abs(r.CosMean-want) < 1e-6) {
			t.Errorf("separation %.2f µm: %.8f, want %.8f", r.SeparationUm, r.CosMean, want)
		}
	}
}

// ∫ψ′² in closed form against the integral.
func TestSlopeSquare(t *testing.T) {
	for _, m := range []int{1, 2, 3, 8, 21} {
		const cells = 4000
		want := 0.0
		for i := range cells {
			d := chain.BeamSlope(m, (float64(i)+0.5)/cells)
			want += d * d / cells
		}
		if got := slopeSquare(m); !(math.Abs(got/want-1) < 1e-4) {
			t.Errorf("mode %d: %.5f, integral %.5f", m, got, want)
		}
	}
}
