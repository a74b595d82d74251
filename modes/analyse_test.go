package modes

import (
	"math"
	"testing"
)

// Every method gives back the stiffness of simulated filaments from contours with noise, exposure and small angles not assumed.
func TestAnalyseRecovers(t *testing.T) {
	for _, tc := range []struct {
		name string
		f    filament
	}{
		{"stiff", filament{lengthUm: 9.3, lpUm: 17, dragPaS: 4e-3, frames: 60, intervalS: 0.5, exposureS: 0.05, noiseUm3: 1e-4}},
		{"flexible", filament{lengthUm: 8.2, lpUm: 4, dragPaS: 4e-3, frames: 60, intervalS: 0.5, exposureS: 0.1, noiseUm3: 1e-4}},
		{"blurred", filament{lengthUm: 11.7, lpUm: 9, dragPaS: 3e-3, frames: 60, intervalS: 0.5, exposureS: 0.5, noiseUm3: 1e-4}},
	} {
		const runs = 8
		held, drag, wrong := map[string]int{}, 0, 0
		given := map[string]int{}
		sum, width := map[string]float64{}, map[string]float64{}
		methods := []string{MethodLikelihood, MethodModes, MethodTangent, MethodDistance, MethodDistribution}
		for i := range runs {
			f := tc.f
			f.seed = uint64(100 + i)
			r := Analyse(f.series(t), DefaultOptions())
			for _, m := range methods {
				e := estimate(t, r, QuantityLp, m)
				if math.IsNaN(e.Value) { // called confined, or too long for the theory of the distribution
					continue
				}
				given[m]++
				if e.Low <= f.lpUm && f.lpUm <= e.High {
					held[m]++
				}
				sum[m] += math.Log(e.Value/f.lpUm) / runs
				width[m] += math.Log(e.High/e.Low) / (2 * 1.96) / runs
			}
			if e := estimate(t, r, QuantityDrag, MethodLikelihood); e.Low <= f.dragPaS && f.dragPaS <= e.High {
				drag++
			}
			if r.Thermal == ThermalNo || r.Confinement == ConfinementTube || r.Confinement == ConfinementPinned {
				wrong++
			}
			if has(r, FlagChanging) {
				t.Errorf("%s: run %d flagged %s", tc.name, i, FlagChanging)
			}
		}
		for _, m := range methods {
			if m == MethodDistribution && tc.f.lengthUm > tc.f.lpUm && given[m] < runs/2 {
				continue
			}
			t.Logf("%s, %s: %d of %d held, mean error of ln Lp %+.3f, predicted sd %.3f", tc.name, m, held[m], runs, sum[m], width[m])
			// Of 8 intervals of 95 % fewer than 5 hold the truth with probability 0.0004.
			if held[m] < 5 {
				t.Errorf("%s, %s: %d of %d intervals hold the truth", tc.name, m, held[m], runs)
			}
			if !(math.Abs(sum[m]) < 3.3*width[m]/math.Sqrt(runs)+0.03) {
				t.Errorf("%s, %s: mean error of ln Lp %+.3f, one estimate has %.3f", tc.name, m, sum[m], width[m])
			}
		}
		// A false word has a probability below 0.01 each.
		if drag < 5 || wrong > 1 {
			t.Errorf("%s: drag held %d times, called not thermal or confined %d times, of %d", tc.name, drag, wrong, runs)
		}
	}
}

// A constant intrinsic bend is taken out by likelihood and modes, and stays in the tangent correlation.
func TestAnalyseIntrinsicBend(t *testing.T) {
	f := filament{lengthUm: 8, lpUm: 15, dragPaS: 4e-3, frames: 80, intervalS: 0.5, exposureS: 0.05, noiseUm3: 5e-5, seed: 4}
	straight := Analyse(f.series(t), DefaultOptions())
	f.curvaturePerUm = 0.12
	bent := Analyse(f.series(t), DefaultOptions())
	for _, m := range []string{MethodLikelihood, MethodModes} {
		a, b := estimate(t, straight, QuantityLp, m), estimate(t, bent, QuantityLp, m)
		// The same fluctuations about another shape; the length differs a little.
		if !(math.Abs(math.Log(a.Value/b.Value)) < 0.05) {
			t.Errorf("%s: %.2f µm straight, %.2f µm bent", m, a.Value, b.Value)
		}
	}
	if e := estimate(t, bent, QuantityLp, MethodTangent); !(e.Value < 0.8*15) {
		t.Errorf("tangent of a bent filament: %.2f µm, want well below 15", e.Value)
	}
}

func TestAnalyseDegenerate(t *testing.T) {
	base := func() Series {
		f := filament{lengthUm: 6, lpUm: 10, dragPaS: 4e-3, frames: 12, intervalS: 0.5, exposureS: 0.05, noiseUm3: 1e-4, seed: 9}
		return f.series(t)
	}
	rigid := base()
	for i := range rigid.Curves {
		rigid.Curves[i] = rigid.Curves[0]
	}
	for _, tc := range []struct {
		name  string
		flag  string
		spoil func(s *Series)
	}{
		{"empty", FlagFewFrames, func(s *Series) { *s = Series{} }},
		{"one frame", FlagFewFrames, func(s *Series) { s.Curves, s.TimesS, s.NoiseUm3 = s.Curves[:1], s.TimesS[:1], s.NoiseUm3[:1] }},
		{"two points", FlagFewFrames, func(s *Series) {
			for i := range s.Curves {
				s.Curves[i] = Curve{XUm: []float64{0, 1}, YUm: []float64{0, 1}}
			}
		}},
		{"nan points", FlagFewFrames, func(s *Series) {
			for i := range s.Curves {
				s.Curves[i].XUm[3] = math.NaN()
			}
		}},
		{"times missing", FlagFewFrames, func(s *Series) { s.TimesS = nil }},
		{"no length", FlagFewFrames, func(s *Series) { s.LengthUm = math.NaN() }},
		{"very short", FlagShort, func(s *Series) { s.LengthUm = 0.5 }},
		{"no temperature", FlagFit, func(s *Series) { s.TemperatureK = 0 }},
		{"exposure too long", FlagFit, func(s *Series) { s.ExposureS = 3 }},
		{"no fluctuation", FlagLowerBound, func(s *Series) { *s = rigid }},
		{"two frames", FlagFewShapes, func(s *Series) { s.Curves, s.TimesS, s.NoiseUm3 = s.Curves[:2], s.TimesS[:2], s.NoiseUm3[:2] }},
		{"no exposure", FlagNoBlur, func(s *Series) { s.ExposureS = 0 }},
		{"end hidden", FlagEnds, func(s *Series) { s.FreeEnds = false }},
	} {
		s := base()
		tc.spoil(&s)
		r := Analyse(s, DefaultOptions())
		if !has(r, tc.flag) {
			t.Errorf("%s: flags %v, want %s", tc.name, r.Flags, tc.flag)
		}
		if tc.flag == FlagFewFrames || tc.flag == FlagFit || tc.flag == FlagLowerBound {
			if !math.IsNaN(r.LpUm) || r.Thermal != ThermalUnclear {
				t.Errorf("%s: Lp %g, thermal %s, want NaN and unclear", tc.name, r.LpUm, r.Thermal)
			}
		}
	}
}

// A frame that can't be used is as good as absent.
func TestAnalyseSkipsBrokenFrames(t *testing.T) {
	f := filament{lengthUm: 6, lpUm: 6, dragPaS: 4e-3, frames: 30, intervalS: 0.5, exposureS: 0.1, noiseUm3: 1e-4, seed: 2}
	s := f.series(t)
	gone := s
	gone.Curves, gone.TimesS, gone.NoiseUm3 = nil, nil, nil
	for i := range s.Curves {
		if i != 7 && i != 20 {
			gone.Curves, gone.TimesS, gone.NoiseUm3 = append(gone.Curves, s.Curves[i]), append(gone.TimesS, s.TimesS[i]), append(gone.NoiseUm3, s.NoiseUm3[i])
		}
	}
	s.Curves[7] = Curve{}
	s.NoiseUm3[20] = math.NaN()
	a, b := Analyse(s, DefaultOptions()), Analyse(gone, DefaultOptions())
	if a.LpUm != b.LpUm || a.LpHighUm != b.LpHighUm || math.IsNaN(a.LpUm) {
		t.Errorf("with broken frames %g to %g µm, without them %g to %g µm", a.LpUm, a.LpHighUm, b.LpUm, b.LpHighUm)
	}
}

// A filament that becomes stiff half-way is seen to change.
func TestAnalyseChanging(t *testing.T) {
	f := filament{lengthUm: 8, lpUm: 4, dragPaS: 4e-3, frames: 40, intervalS: 0.5, exposureS: 0.05, noiseUm3: 1e-4, seed: 3}
	s := f.series(t)
	f.lpUm = 20
	later := f.series(t)
	for i := range later.Curves {
		s.Curves = append(s.Curves, later.Curves[i])
		s.TimesS = append(s.TimesS, 20+later.TimesS[i])
		s.NoiseUm3 = append(s.NoiseUm3, later.NoiseUm3[i])
	}
	if r := Analyse(s, DefaultOptions()); !has(r, FlagChanging) {
		t.Errorf("flags %v, want %s", r.Flags, FlagChanging)
	}
}

func BenchmarkAnalyse(b *testing.B) {
	f := filament{lengthUm: 12, lpUm: 8, dragPaS: 5e-3, frames: 500, intervalS: 0.3, exposureS: 0.1, noiseUm3: 2e-4, seed: 1}
	s := f.series(b)
	for b.Loop() {
		Analyse(s, DefaultOptions())
	}
}

// A length that scatters by more than its errors says that contours are mis-traced: a flag, and no word that all is thermal.
func TestAnalyseLengthScatter(t *testing.T) {
	s := filament{lengthUm: 8, lpUm: 15, dragPaS: 4e-3, frames: 300, intervalS: 0.5, exposureS: 0.05, noiseUm3: 5e-5, seed: 5}.series(t)
	s.LengthSDUm, s.LengthSEUm = 0.08, 0.07
	if r := Analyse(s, DefaultOptions()); has(r, FlagLength) || r.Thermal != ThermalYes {
		t.Errorf("a steady length: thermal %s, flags %v", r.Thermal, r.Flags)
	}
	s.LengthSDUm = 0.25
	if r := Analyse(s, DefaultOptions()); !has(r, FlagLength) || r.Thermal != ThermalUnclear {
		t.Errorf("a length that scatters: thermal %s, flags %v", r.Thermal, r.Flags)
	}
}

// Where most frames were rejected nothing is given; where a third was used, it is.
func TestAnalyseMostRejected(t *testing.T) {
	s := filament{lengthUm: 8, lpUm: 15, dragPaS: 4e-3, frames: 30, intervalS: 0.5, exposureS: 0.05, noiseUm3: 5e-5, seed: 6}.series(t)
	for _, tc := range []struct {
		frames int
		given  bool
	}{{0, true}, {90, true}, {91, false}} {
		s.Frames = tc.frames
		r := Analyse(s, DefaultOptions())
		if given := r.LpUm > 0; given != tc.given || has(r, FlagMostRejected) == tc.given {
			t.Errorf("30 of %d frames used: Lp %g, flags %v", tc.frames, r.LpUm, r.Flags)
		}
	}
}
