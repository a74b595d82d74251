package modes

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/modes/chain"
)

// filament describes a movie of a simulated filament.
type filament struct {
	lengthUm, lpUm, dragPaS float64
	frames                  int
	intervalS, exposureS    float64
	noiseUm3                float64
	curvaturePerUm          float64
	tubeRmsUm               float64 // of a harmonic tube; 0: none
	slides                  bool    // along the tube, freely
	seed                    uint64
}

const testPSFUm = 0.13

// series runs the chain, averages its shape over each exposure and adds noise across the line in the bending modes that a contour can
// hold, P·exp((k·PSF)²) each, and in the two rigid ones. The contour length is the mean of what the contours show.
func (f filament) series(t testing.TB) Series {
	t.Helper()
	o := chain.Options{LengthUm: f.lengthUm, LpUm: f.lpUm, DragPaS: f.dragPaS, TempK: 295.15,
		CurvaturePerUm: f.curvaturePerUm, WanderUm: 1, TurnRad: 1, Modes: 32}
	if f.tubeRmsUm > 0 {
		o.TubeStiffness = chain.TubeStiffness(f.tubeRmsUm, f.lpUm, o.TempK)
	}
	if f.slides {
		o.WanderUm = math.Inf(1)
	}
	c, err := chain.NewChain(o)
	if err != nil {
		t.Fatal(err)
	}
	tr, err := c.NewTrack(chain.TrackOptions{Frames: f.frames, IntervalS: f.intervalS, ExposureS: f.exposureS, SubSteps: 10,
		Rand: func(frame int) *rand.Rand { return rand.New(rand.NewPCG(f.seed, uint64(frame+1))) }})
	if err != nil {
		t.Fatal(err)
	}
	s := Series{PSFUm: testPSFUm, IntervalS: f.intervalS, ExposureS: f.exposureS, TemperatureK: 295.15, FreeEnds: true}
	rng := rand.New(rand.NewPCG(f.seed, 0))
	var lengths []float64
	for i := range f.frames {
		m, at := chain.MeanCurve(tr.SubCurves(i)).Resample(0.1)
		curve := Curve{XUm: m.X, YUm: m.Y}
		if f.noiseUm3 > 0 {
			curve = roughen(curve, at, f.lengthUm, f.noiseUm3, rng)
		}
		ch, _ := newChords(Curve{XUm: m.X, YUm: m.Y})
		lengths = append(lengths, ch.total)
		s.Curves = append(s.Curves, curve)
		s.TimesS = append(s.TimesS, float64(i)*f.intervalS)
		s.NoiseUm3 = append(s.NoiseUm3, f.noiseUm3)
	}
	s.LengthUm = mean(lengths)
	for _, l := range lengths {
		s.LengthSDUm += (l - s.LengthUm) * (l - s.LengthUm) / float64(len(lengths))
	}
	s.LengthSDUm = math.Sqrt(s.LengthSDUm)
	return s
}

func roughen(c Curve, at []float64, lengthUm, noiseUm3 float64, rng *rand.Rand) Curve {
	n := len(at)
	y := make([]float64, n)
	shift, tilt := rng.NormFloat64(), rng.NormFloat64()
	sd := math.Sqrt(noiseUm3 / lengthUm)
	for i := range y {
		y[i] = sd * (shift + tilt*math.Sqrt(12)*(float64(i)/float64(n-1)-0.5))
	}
	for m := 1; 2*math.Pi/BeamWavenumber(m, lengthUm) > 6.8*testPSFUm; m++ {
		k := BeamWavenumber(m, lengthUm)
		b := sd * math.Exp(k*k*testPSFUm*testPSFUm/2) * rng.NormFloat64()
		for i := range y {
			y[i] += b * chain.BeamMode(m, float64(i)/float64(n-1))
		}
	}
	out := Curve{XUm: make([]float64, n), YUm: make([]float64, n)}
	for i := range n {
		a, b := max(0, i-1), min(n-1, i+1)
		dx, dy := c.XUm[b]-c.XUm[a], c.YUm[b]-c.YUm[a]
		h := math.Hypot(dx, dy)
		out.XUm[i], out.YUm[i] = c.XUm[i]-y[i]*dy/h, c.YUm[i]+y[i]*dx/h
	}
	return out
}

// estimate finds the estimate of a quantity by a method.
func estimate(t testing.TB, r Result, quantity, method string) Estimate {
	t.Helper()
	for _, e := range r.Estimates {
		if e.Quantity == quantity && e.Method == method {
			return e
		}
	}
	t.Fatalf("no estimate of %s by %s", quantity, method)
	return Estimate{}
}

func has(r Result, flag string) bool {
	for _, f := range r.Flags {
		if f == flag {
			return true
		}
	}
	return false
}
