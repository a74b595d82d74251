package chain

import (
	"errors"
	"math"
	"math/rand/v2"
	"sync"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func seeded(seed uint64) func(int) *rand.Rand {
	return func(frame int) *rand.Rand { return rand.New(rand.NewPCG(seed, uint64(frame+2)*0x9e3779b97f4a7c15)) }
}

// A step must be the composition of its halves: mean, variances and covariance of (end,
// mean) by propagation of the linear laws, for slow, fast and free coordinates.
func TestTransitionComposes(t *testing.T) {
	for _, r := range []relaxer{
		{variance: 2, rate: 1e-7}, {variance: 2, rate: 0.3}, {variance: 0.5, rate: 3},
		{variance: 1, rate: 400}, newRelaxer(math.Inf(1), 0.4), newRelaxer(1e9, 0.4),
	} {
		whole, half := r.over(1.6), r.over(0.8)
		near(t, "e", whole.e, half.e*half.e, 1e-14)
		near(t, "a", whole.a, (half.a+half.a*half.e)/2, 1e-14)
		// Contributions of the four noises of two halves to end and mean.
		ends := []float64{half.e * half.p, 0, half.p, 0}
		means := []float64{(half.q + half.a*half.p) / 2, half.r / 2, half.q / 2, half.r / 2}
		var ee, em, mm float64
		for i := range ends {
			ee += ends[i] * ends[i]
			em += ends[i] * means[i]
			mm += means[i] * means[i]
		}
		scale := ee
		near(t, "var end", whole.p*whole.p/scale, 1, 1e-11)
		near(t, "cov", whole.p*whole.q/scale, em/scale, 1e-11)
		near(t, "var mean", (whole.q*whole.q+whole.r*whole.r)/scale, mm/scale, 1e-11)
	}
}

func TestMeanNoiseBranchesAgree(t *testing.T) {
	near(t, "S−A²", meanNoise(0.4999999999), meanNoise(0.5000000001), 1e-9)
	for _, a := range []float64{1e-6, 1e-3, 0.1, 0.45} {
		mean := -math.Expm1(-a) / a
		near(t, "S−A²", meanNoise(a), BlurFactor(a)-mean*mean, 1e-15+1e-9*a)
	}
}

// Exposure-averaged amplitudes have C₀ = vS(α) and C₁ = v e^{−(Δ−T)/τ}[(1−e^{−α})/α]²; here
// with few sub-steps, which must not matter. Standard errors from the theory's own
// correlation times.
func TestTrackAmplitudesBlurAndCorrelation(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes, o.WanderUm, o.TurnRad = 5, 0, 0 })
	exposure, interval := 0.4*c.RelaxationS(1), 0.6*c.RelaxationS(1)
	const frames = 8000
	tr, err := c.NewTrack(TrackOptions{Frames: frames, IntervalS: interval, ExposureS: exposure, SubSteps: 3, Rand: seeded(5)})
	if err != nil {
		t.Fatal(err)
	}
	series := make([][]float64, frames)
	for f := range series {
		series[f] = tr.MeanAmplitudes(f)
	}
	for n := 1; n <= 5; n++ {
		v, tau := c.Variance(n), c.RelaxationS(n)
		alpha := exposure / tau
		a := (1 - math.Exp(-alpha)) / alpha
		want0 := v * BlurFactor(alpha)
		want1 := v * math.Exp(-(interval-exposure)/tau) * a * a
		var c0, c1 float64
		for f := range frames {
			c0 += series[f][n-1] * series[f][n-1] / frames
			if f > 0 {
				c1 += series[f][n-1] * series[f-1][n-1] / (frames - 1)
			}
		}
		rho := math.Exp(-interval / tau)
		se := math.Sqrt(2 / float64(frames) * (1 + rho*rho) / (1 - rho*rho))
		near(t, "C₀/v", c0/want0, 1, 4*se)
		near(t, "(C₁−want)/C₀", (c1-want1)/want0, 0, 4*se)
	}
}

func TestFreeDiffusion(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes = 2 })
	const n = 4000
	var long, short, turn float64
	kT, l, dt := KT(295), 12e-6, 0.05
	for i := range n {
		rng := seeded(uint64(i))(0)
		s := c.Equilibrium(rng)
		s.AngleRad = 0.9
		before := s.Pose
		st := c.Stepper(dt)
		st.Step(&s, nil, rng)
		dx, dy := s.XUm-before.XUm, s.YUm-before.YUm
		sin, cos := math.Sincos(0.9)
		long += math.Pow(dx*cos+dy*sin, 2)
		short += math.Pow(dy*cos-dx*sin, 2)
		turn += math.Pow(s.AngleRad-0.9, 2)
	}
	d := kT / (2e-3 * l)
	withinVariance(t, "along", long, 2*2*d*dt*1e12, n)
	withinVariance(t, "across", short, 2*d*dt*1e12, n)
	withinVariance(t, "turn", turn, 2*12*d/(l*l)*dt, n)
}

func TestTrackSameInAnyOrder(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes = 8 })
	opts := TrackOptions{Frames: 6, IntervalS: 0.1, ExposureS: 0.1, Rand: seeded(7)}
	tr, err := c.NewTrack(opts)
	if err != nil {
		t.Fatal(err)
	}
	if k := tr.SubSteps(); k < 8 || k > 32 {
		t.Errorf("%d sub-steps, want 8 to 32", k)
	}
	again, err := c.NewTrack(opts)
	if err != nil {
		t.Fatal(err)
	}
	got := make([][]Curve, 6)
	var wg sync.WaitGroup
	for f := range 6 {
		wg.Go(func() { got[f] = tr.SubCurves(f) })
	}
	wg.Wait()
	for f := 5; f >= 0; f-- {
		if d := cmp.Diff(again.SubCurves(f), got[f]); d != "" {
			t.Errorf("frame %d differs: %s", f, d)
		}
	}
	// With no dead time a frame begins where the one before it ended: the amplitudes either
	// side of the seam must be close on the scale of the slowest mode.
	end, begin := tr.SubStates(2)[tr.SubSteps()-1], tr.SubStates(3)[0]
	if d := math.Abs(end.B[0] - begin.B[0]); !(d < 1.5*math.Sqrt(c.Variance(1)*0.2/c.RelaxationS(1))) {
		t.Errorf("b₁ jumps by %g over the seam", d)
	}
}

// A bent line that slides along itself keeps its image; its mean must stay on it, where the
// average of points of one index would cut the bend. One that shifts sideways has its mean
// midway.
func TestMeanCurve(t *testing.T) {
	arc := func(slide, radius float64) Curve {
		var c Curve
		for k := 0; k <= 300; k++ {
			sin, cos := math.Sincos((float64(k)*0.02 + slide) / radius)
			c.X, c.Y = append(c.X, radius*sin), append(c.Y, radius*(1-cos))
		}
		return c
	}
	mean := MeanCurve([]Curve{arc(-0.5, 5), arc(-0.1, 5), arc(0.2, 5), arc(0.4, 5)})
	if len(mean.X) != 301 {
		t.Fatalf("%d points, want 301", len(mean.X))
	}
	for k := range mean.X {
		// Ends are prolonged straight by up to 0.5 µm, 0.5²/(2·5) off the arc.
		tol := 2e-5
		if k < 30 || k > 270 {
			tol = 0.025
		}
		near(t, "radius", math.Hypot(mean.X[k], mean.Y[k]-5), 5, tol)
		if k > 0 {
			near(t, "step", math.Hypot(mean.X[k]-mean.X[k-1], mean.Y[k]-mean.Y[k-1]), 0.02, 2e-4)
		}
	}
	plain := MeanCurve([]Curve{arc(0.3, 5)})
	if d := cmp.Diff(arc(0.3, 5), plain); d != "" {
		t.Errorf("the mean of one curve is not that curve: %s", d)
	}
	up, down := arc(0, 5), arc(0, 5)
	for k := range up.X {
		up.Y[k] += 0.03
		down.Y[k] -= 0.03
	}
	mean = MeanCurve([]Curve{up, down})
	for k := 10; k < 290; k++ {
		// Across an inclined line the midway of two crossings is curved by 0.03²κ/2.
		near(t, "radius", math.Hypot(mean.X[k], mean.Y[k]-5), 5, 1.5e-4)
	}
}

func TestTrackInstantaneous(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes = 4 })
	tr, err := c.NewTrack(TrackOptions{Frames: 3, IntervalS: 0.1, Rand: seeded(1)})
	if err != nil {
		t.Fatal(err)
	}
	if tr.SubSteps() != 1 {
		t.Fatalf("%d sub-steps, want 1", tr.SubSteps())
	}
	start, mean := tr.starts[1], tr.SubStates(1)[0]
	if d := cmp.Diff(start.B, mean.B); d != "" {
		t.Errorf("no exposure, yet the mean is not the start: %s", d)
	}
	near(t, "x", mean.XUm, start.XUm, 1e-12)
	near(t, "y", mean.YUm, start.YUm, 1e-12)
	near(t, "angle", mean.AngleRad, start.AngleRad, 0)
}

func TestNewTrackRefuses(t *testing.T) {
	c := actin(t, func(o *Options) { o.Modes = 2 })
	good := TrackOptions{Frames: 2, IntervalS: 0.1, ExposureS: 0.05, Rand: seeded(1)}
	for name, change := range map[string]func(*TrackOptions){
		"frames":   func(o *TrackOptions) { o.Frames = 0 },
		"interval": func(o *TrackOptions) { o.IntervalS = math.NaN() },
		"exposure": func(o *TrackOptions) { o.ExposureS = 0.2 },
		"substeps": func(o *TrackOptions) { o.SubSteps = -1 },
		"rand":     func(o *TrackOptions) { o.Rand = nil },
	} {
		o := good
		change(&o)
		if _, err := c.NewTrack(o); !errors.Is(err, ErrOptions) {
			t.Errorf("%s: error %v, want ErrOptions", name, err)
		}
	}
}

func BenchmarkSubCurves(b *testing.B) {
	c := actin(b, nil)
	tr, err := c.NewTrack(TrackOptions{Frames: 4, IntervalS: 0.1, ExposureS: 0.05, Rand: seeded(1)})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		tr.SubCurves(1)
	}
}
