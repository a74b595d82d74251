package modes

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/modes/chain"
	"wend/modes/likelihood"
)

// ordinary is a movie long enough to tell what the bending is.
var ordinary = filament{lengthUm: 10, lpUm: 15, dragPaS: 2.4e-3, frames: 200, intervalS: 0.5, exposureS: 0.03, noiseUm3: 1e-4}

const judged = 7 // movies of each kind

// over analyses movies of f, each altered by spoil, and counts what is said.
func over(t *testing.T, f filament, spoil func(s *Series, rng *rand.Rand)) (yes, no int, results []Result) {
	t.Helper()
	if testing.Short() {
		t.Skip("many movies")
	}
	for i := range judged {
		f.seed = uint64(500 + i)
		s := f.series(t)
		if spoil != nil {
			spoil(&s, rand.New(rand.NewPCG(77, uint64(i))))
		}
		r := Analyse(s, DefaultOptions())
		switch r.Thermal {
		case ThermalYes:
			yes++
		case ThermalNo:
			no++
		}
		results = append(results, r)
	}
	return yes, no, results
}

// Thermal bending in a movie that is long enough is mostly called so, and never the contrary.
func TestThermalYes(t *testing.T) {
	t.Parallel()
	yes, no, results := over(t, ordinary, nil)
	if yes < 2 || no > 0 { // about two in three are

		t.Errorf("of %d: %d yes, %d no", judged, yes, no)
	}
	for i, r := range results {
		if r.Confinement != ConfinementFree && r.Confinement != ConfinementUnclear {
			t.Errorf("movie %d: confinement %s", i, r.Confinement)
		}
	}
}

// A wide tube makes a filament look stiffer. It is found, and the persistence length fitted with it holds the truth.
func TestConfinedIsFound(t *testing.T) {
	t.Parallel()
	f := ordinary
	f.tubeRmsUm = 0.3
	_, _, results := over(t, f, nil)
	found, held := 0, 0
	for _, r := range results {
		if r.Confinement == ConfinementTube && has(r, FlagConfined) {
			found++
		}
		if r.LpLowUm <= f.lpUm && f.lpUm <= r.LpHighUm {
			held++
		}
		if r.Confinement == ConfinementFree {
			t.Error("called free")
		}
		if r.Confinement == ConfinementTube {
			for _, m := range []string{MethodModes, MethodTangent, MethodDistance} {
				if e := estimate(t, r, QuantityLp, m); !math.IsNaN(e.Value) || !math.IsNaN(e.High) {
					t.Errorf("a method for free filaments, %s, gives %.2f µm", m, e.Value)
				}
			}
		}
	}
	// Fewer than 4 of 7 at 95 % has probability 0.0002.
	if found < judged-1 || held < 4 {
		t.Errorf("of %d, %d found, %d intervals hold the truth", judged, found, held)
	}
}

// A place that stays where it is: the filament turns and bends about it.
func TestPinnedIsFound(t *testing.T) {
	t.Parallel()
	_, _, results := over(t, ordinary, func(s *Series, rng *rand.Rand) {
		for i, c := range s.Curves {
			ch, _ := newChords(c)
			x, y, _, _ := ch.place(c, 0.15)
			for j := range c.XUm {
				c.XUm[j] += 3 - x + 0.01*rng.NormFloat64()
				c.YUm[j] += 4 - y + 0.01*rng.NormFloat64()
			}
			s.Curves[i] = c
		}
	})
	for i, r := range results {
		if !has(r, FlagPinned) || r.Confinement != ConfinementPinned || !math.IsNaN(r.LpUm) || r.LpFrom != "" {
			t.Errorf("movie %d: flags %v, confinement %s, Lp %g", i, r.Flags, r.Confinement, r.LpUm)
		}
	}
}

// bendMore adds to a mode of every curve an amplitude given in µm^3/2.
func bendMore(s *Series, mode int, amplitude []float64) {
	for i, c := range s.Curves {
		ch, _ := newChords(c)
		x := make([]float64, len(c.XUm))
		y := make([]float64, len(c.XUm))
		x[0], y[0] = c.XUm[0], c.YUm[0]
		for j := range ch.angle {
			a := ch.angle[j] + amplitude[i]*chain.BeamSlope(mode, (ch.start[j]+ch.length[j]/2)/ch.total)/math.Pow(s.LengthUm, 1.5)
			x[j+1], y[j+1] = x[j]+ch.length[j]*math.Cos(a), y[j]+ch.length[j]*math.Sin(a)
		}
		s.Curves[i] = Curve{XUm: x, YUm: y}
	}
}

// Slow extra bending with the thermal variance again in one long wave is hardly ever called thermal.
func TestSlowBendingIsNotThermal(t *testing.T) {
	t.Parallel()
	for _, mode := range []int{1, 2} {
		yes, _, _ := over(t, ordinary, func(s *Series, rng *rand.Rand) {
			v := 1 / (ordinary.lpUm * math.Pow(BeamWavenumber(mode, ordinary.lengthUm), 4))
			extra := likelihood.Simulate(likelihood.Process{Variance: v, RelaxationS: 5}, likelihood.Frames{TimesS: s.TimesS}, rng)
			bendMore(s, mode, extra)
		})
		// At 5 %, three of seven have probability 0.004.
		if yes > 2 {
			t.Errorf("mode %d: %d of %d called thermal", mode, yes, judged)
		}
	}
}

// A filament that glides along a path with the shape of a thermal chain has the spectrum of one, and is told by its times.
func TestGlidingIsNotThermal(t *testing.T) {
	t.Parallel()
	yes, _, _ := over(t, ordinary, func(s *Series, rng *rand.Rand) {
		const speed, step = 0.5, 0.1 // µm/s, µm
		n := int((ordinary.lengthUm+speed*s.TimesS[len(s.TimesS)-1])/step) + 2
		x, y, a := make([]float64, n), make([]float64, n), 0.0
		for j := 1; j < n; j++ {
			a += math.Sqrt(step/ordinary.lpUm) * rng.NormFloat64()
			x[j], y[j] = x[j-1]+step*math.Cos(a), y[j-1]+step*math.Sin(a)
		}
		points := int(ordinary.lengthUm / step)
		for i := range s.Curves {
			from := int(speed * s.TimesS[i] / step)
			s.Curves[i] = Curve{XUm: append([]float64(nil), x[from:from+points+1]...), YUm: append([]float64(nil), y[from:from+points+1]...)}
			for j := range s.Curves[i].XUm {
				s.Curves[i].YUm[j] += math.Sqrt(s.NoiseUm3[i]/step) * rng.NormFloat64()
			}
		}
	})
	if yes > 1 {
		t.Errorf("%d of %d called thermal", yes, judged)
	}
}

// "no" takes every persistence length and rigidity away: here a short wave bends with a hundred times its thermal variance.
func TestNotThermalWithholds(t *testing.T) {
	t.Parallel()
	_, no, results := over(t, ordinary, func(s *Series, rng *rand.Rand) {
		extra := make([]float64, len(s.TimesS))
		for i := range extra {
			extra[i] = 10 / math.Sqrt(ordinary.lpUm*math.Pow(BeamWavenumber(3, ordinary.lengthUm), 4)) * rng.NormFloat64()
		}
		bendMore(s, 3, extra)
	})
	if no < judged-1 {
		t.Errorf("%d of %d called not thermal", no, judged)
	}
	for _, r := range results {
		if r.Thermal != ThermalNo {
			continue
		}
		for _, e := range r.Estimates {
			if (e.Quantity == QuantityLp || e.Quantity == QuantityRigidity) && !(math.IsNaN(e.Value) && math.IsNaN(e.Low) && math.IsNaN(e.High)) {
				t.Errorf("%s by %s: %g", e.Quantity, e.Method, e.Value)
			}
		}
		for _, m := range r.Modes {
			if !math.IsNaN(m.LpUm) {
				t.Errorf("mode %d: Lp %g µm", m.Mode, m.LpUm)
			}
		}
	}
}

// Contours far noisier than predicted are flagged and not called thermal.
func TestNoiseFarFromPredicted(t *testing.T) {
	t.Parallel()
	yes, _, results := over(t, ordinary, func(s *Series, _ *rand.Rand) {
		for i := range s.NoiseUm3 {
			s.NoiseUm3[i] /= 6
		}
	})
	for i, r := range results {
		if !has(r, FlagNoise) {
			t.Errorf("movie %d: flags %v", i, r.Flags)
		}
	}
	if yes > 0 {
		t.Errorf("%d called thermal", yes)
	}
}

// Geometry: cos³ of the tilt that a chamber allows; a flat one allows none.
func TestProjectionFactor(t *testing.T) {
	for _, tc := range []struct{ chamber, length, want float64 }{{0, 10, 1}, {10 * math.Sin(math.Pi/9), 10, math.Pow(math.Cos(math.Pi/9), 3)}, {20, 10, 0}} {
		if got := ProjectionFactor(tc.chamber, tc.length); !(math.Abs(got-tc.want) < 1e-12) {
			t.Errorf("chamber %g µm: %g, want %g", tc.chamber, got, tc.want)
		}
	}
	s := ordinary
	s.frames = 30
	series := s.series(t)
	series.ChamberUm = 4
	if r := Analyse(series, DefaultOptions()); !has(r, FlagProjection) {
		t.Errorf("a chamber of 4 µm for a filament of 10 µm: flags %v", r.Flags)
	}
}

// A bent filament that rolls evenly about its axis is found, a bent one that does not roll is not.
func TestRollingIsFound(t *testing.T) {
	t.Parallel()
	for _, rolling := range []bool{true, false} {
		_, _, results := over(t, ordinary, func(s *Series, rng *rand.Rand) {
			bend, turn := make([]float64, len(s.TimesS)), 0.0
			for i := range bend {
				bend[i] = 6 / math.Sqrt(ordinary.lpUm*math.Pow(BeamWavenumber(1, ordinary.lengthUm), 4))
				if rolling {
					bend[i] *= math.Cos(turn)
				}
				turn += 0.8 * rng.NormFloat64()
			}
			bendMore(s, 1, bend)
		})
		found := 0
		for _, r := range results {
			if has(r, FlagRolling) {
				found++
			}
		}
		if rolling && found < judged-2 || !rolling && found > 0 {
			t.Errorf("rolling %v: %d of %d flagged", rolling, found, judged)
		}
	}
}

// Two modes that turn about each other, as motors can make them, are told from the same two played forwards and backwards at once.
func TestIrreversible(t *testing.T) {
	f := ordinary
	f.frames = 400
	f.seed = 3
	series := f.series(t)
	a := measure(series, DefaultOptions())
	th := theory{lpUm: f.lpUm, dragPaS: f.dragPaS, noiseScale: 1}
	if a.irreversible(th) {
		t.Error("a thermal movie is called irreversible")
	}
	rng := rand.New(rand.NewPCG(5, 5))
	x, y := 0.0, 0.0
	for i := range a.b[0] {
		x, y = 0.6*x-0.3*y+rng.NormFloat64(), 0.6*y+0.3*x+rng.NormFloat64()
		a.b[0][i], a.b[1][i] = x, y
	}
	if !a.irreversible(th) {
		t.Error("circulating modes are called reversible")
	}
}
