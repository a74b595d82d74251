package ridge

import (
	"errors"
	"math"
	"math/rand/v2"
	"sync"
	"testing"

	"wend/imaging"
)

// noiseFrame is white Gaussian noise of the given standard deviation (counts).
func noiseFrame(width, height int, sd float64, seed uint64) imaging.Frame {
	rng := rand.New(rand.NewPCG(seed, 1))
	f := imaging.NewFrame(width, height)
	for i := range f.Pix {
		f.Pix[i] = float32(sd * rng.NormFloat64())
	}
	return f
}

// addLine adds an endless line of Gaussian profile: peak counts, standard deviation s (px),
// normal at angle theta, through the point (x0, y0).
func addLine(f imaging.Frame, peak, s, theta, x0, y0 float64) {
	for y := range f.Height {
		for x := range f.Width {
			d := (float64(x)-x0)*math.Cos(theta) + (float64(y)-y0)*math.Sin(theta)
			f.Pix[y*f.Width+x] += float32(peak * math.Exp(-d*d/(2*s*s)))
		}
	}
}

// crowdedFrame is noise with a few lines.
func crowdedFrame(width, height int, seed uint64) imaging.Frame {
	f := noiseFrame(width, height, 3, seed)
	w, h := float64(width), float64(height)
	addLine(f, 60, 1.3, 0.3, 0.4*w, 0.5*h)
	addLine(f, 25, 1.1, 1.4, 0.3*w, 0.7*h)
	addLine(f, 10, 1.7, -0.8, 0.6*w, 0.2*h)
	return f
}

// angleBetween is the angle between two lines, 0 to π/2.
func angleBetween(a, b float64) float64 { return math.Abs(math.Remainder(a-b, math.Pi)) }

// engines are what Compute runs in this build and its plain twin: one and the same without OpenCV.
var engines = map[string]*engine{"active": active, "plain": plain}

// Truth is known: a Gaussian line keeps its shape under a Gaussian filter, variances add up. So on
// its crest the second derivative is A·s/(s²+σ²)^{3/2}, and a continuous filter turns white
// noise of 1 count into a second derivative of standard deviation √(3/(16π))/σ³, from
// ∫g″² = 3/(8√π σ⁵) and ∫g² = 1/(2√π σ).
func TestLineIsMeasured(t *testing.T) {
	const peak, noise = 100.0, 2.0
	for name, e := range engines {
		for _, tc := range []struct{ s, sigma, theta, x0, y0 float64 }{
			{1.2, 1.5, 0, 40.37, 30},
			{1.2, 1.5, math.Pi / 2, 40, 24.71},
			{1.5, 1.5, 0.6, 37.21, 28.43},
			{1.3, 1.6, -0.9, 39.77, 29.68},
			{1.2, 1.5, 1.3, 40.13, 30.41},
		} {
			f := imaging.NewFrame(81, 58) // oblong: swapped axes cannot pass
			addLine(f, peak, tc.s, tc.theta, tc.x0, tc.y0)
			var m Map
			if err := e.compute(f, Options{SigmaPx: tc.sigma, NoiseCounts: noise, Floor: 5}, &m); err != nil {
				t.Fatal(err)
			}
			unit := noise * math.Sqrt(3/(16*math.Pi)) / math.Pow(tc.sigma, 3)
			width2 := tc.s*tc.s + tc.sigma*tc.sigma
			crestStrength := peak * tc.s / math.Pow(width2, 1.5) / unit
			seen := 0
			for y := 10; y < f.Height-10; y++ {
				for x := 10; x < f.Width-10; x++ {
					d := (float64(x)-tc.x0)*math.Cos(tc.theta) + (float64(y)-tc.y0)*math.Sin(tc.theta)
					if math.Abs(d) > 0.5 {
						continue
					}
					seen++
					i := y*f.Width + x
					theta, offset := float64(m.Theta[i]), float64(m.Offset[i])
					if a := angleBetween(theta, tc.theta); !(a <= 2e-3) {
						t.Fatalf("%s %+v: normal at (%d, %d) is %.4f, want %.4f", name, tc, x, y, theta, tc.theta)
					}
					// The normal may point either way; the crest it leads to is the same.
					if math.Cos(theta-tc.theta) < 0 {
						offset = -offset
					}
					if !(math.Abs(offset+d) <= 0.02) {
						t.Errorf("%s %+v: offset at (%d, %d) is %.4f, want %.4f", name, tc, x, y, offset, -d)
					}
					want := crestStrength * (1 - d*d/width2) * math.Exp(-d*d/(2*width2))
					// Sampling g″ at whole pixels costs up to 1 % in its noise at σ = 1.5.
					if got := float64(m.Strength[i]); !(math.Abs(got/want-1) <= 0.01) {
						t.Errorf("%s %+v: strength at (%d, %d) is %.2f, want %.2f", name, tc, x, y, got, want)
					}
				}
			}
			if seen < 35 {
				t.Fatalf("%s %+v: %d pixels on the line, want at least 35", name, tc, seen)
			}
		}
	}
}

// Identity: the filters reproduce the derivatives of any parabola exactly, also off the
// diagonal and for wide and narrow filters, up to float32 rounding.
func TestParabolaIsExact(t *testing.T) {
	for name, e := range engines {
		for _, sigma := range []float64{0.5, 1.3, 4} {
			f := imaging.NewFrame(57, 45)
			for y := range f.Height {
				for x := range f.Width {
					u, v := float64(x)-28, float64(y)-22
					f.Pix[y*f.Width+x] = float32(3 + 0.5*u - 0.25*v - 0.125*u*u + 0.0625*v*v + 0.375*u*v)
				}
			}
			ws, k := e.newWorkspace(), newKernel(sigma)
			defer ws.close()
			if err := ws.load(f, k); err != nil {
				t.Fatal(err)
			}
			for y := range f.Height {
				xx, yy, xy := ws.hessian(y)
				for x := range f.Width {
					if x < k.radius || y < k.radius || x >= f.Width-k.radius || y >= f.Height-k.radius {
						continue
					}
					gx, gy := ws.gradient(x, y)
					u, v := float64(x)-28, float64(y)-22
					got := [5]float64{float64(xx[x]), float64(yy[x]), float64(xy[x]), float64(gx), float64(gy)}
					want := [5]float64{-0.25, 0.125, 0.375, 0.5 - 0.25*u + 0.375*v, -0.25 + 0.125*v + 0.375*u}
					for i := range got {
						// Largest pixel about 400, so float32 leaves about 400·6e-8·(sum of |taps|, up to 4·1) each.
						if !(math.Abs(got[i]-want[i]) <= 5e-4) {
							t.Fatalf("%s σ=%g pixel (%d, %d) derivative %d: %g, want %g", name, sigma, x, y, i, got[i], want[i])
						}
					}
				}
			}
		}
	}
}

// On white noise a second derivative in a fixed direction must have the standard deviation 1 in
// units of the map, and hardly any pixel may pass 5.
func TestNoiseIsCalibrated(t *testing.T) {
	const sd = 7.0
	f := noiseFrame(512, 480, sd, 3)
	for name, e := range engines {
		ws, k := e.newWorkspace(), newKernel(1.5)
		defer ws.close()
		if err := ws.load(f, k); err != nil {
			t.Fatal(err)
		}
		var sum [3]float64
		n := 0
		for y := range f.Height {
			xx, yy, xy := ws.hessian(y)
			if y < k.radius || y >= f.Height-k.radius { // mirrored margins repeat their noise
				continue
			}
			for x := k.radius; x < f.Width-k.radius; x++ {
				diagonal := (xx[x]+yy[x])/2 + xy[x] // second derivative at 45°
				for i, v := range [3]float32{xx[x], yy[x], diagonal} {
					s := float64(v) / (k.noise * sd)
					sum[i] += s * s
				}
				n++
			}
		}
		// A response is correlated over about 4πσ²/3 ≈ 10 pixels, so there are about 24 000
		// independent ones and the standard deviation is known to 1/√(2·24 000) = 0.5 %;
		// four of these are allowed.
		for i, s := range sum {
			if got := math.Sqrt(s / float64(n)); !(math.Abs(got-1) <= 0.02) {
				t.Errorf("%s: standard deviation of response %d is %.4f, want 1", name, i, got)
			}
		}
		var m Map
		if err := e.compute(f, Options{SigmaPx: 1.5, NoiseCounts: sd, Floor: 3}, &m); err != nil {
			t.Fatal(err)
		}
		over3, over5 := 0, 0
		for _, s := range m.Strength {
			if s > 0 && s < 3 {
				t.Fatalf("%s: strength %g below the floor 3", name, s)
			}
			if s >= 3 {
				over3++
			}
			if s > 5 {
				over5++
			}
		}
		t.Logf("%s: %d of %d pixels over 3, %d over 5", name, over3, len(m.Strength), over5)
		// A single direction passes 5 with 3e-7; the smallest of all directions more often.
		if got := float64(over5) / float64(len(m.Strength)); got > 1e-4 {
			t.Errorf("%s: %d of %d noise pixels over 5", name, over5, len(m.Strength))
		}
	}
}

// What the eigenvalue does to the tail, from the joint distribution of the three second
// derivatives (variances 1, 1, 1/3, covariance of the first two 1/3: ratios of Gaussian
// integrals), without any image.
func TestTailAgreesWithTheory(t *testing.T) {
	const draws, floor, sd = 400_000, 2.5, 1.0
	rng := rand.New(rand.NewPCG(11, 2))
	want := 0
	for range draws {
		common, diff := math.Sqrt(2.0/3)*rng.NormFloat64(), math.Sqrt(1.0/3)*rng.NormFloat64()
		c := math.Sqrt(1.0/3) * rng.NormFloat64()
		if common < 0 && math.Hypot(diff, c)-common > floor { // a, b = common ± diff
			want++
		}
	}
	f := noiseFrame(512, 480, sd, 5)
	var m Map
	if err := Compute(f, Options{SigmaPx: 2, NoiseCounts: sd, Floor: floor}, &m); err != nil {
		t.Fatal(err)
	}
	got := 0
	for _, s := range m.Strength {
		if s > 0 {
			got++
		}
	}
	p := float64(want) / draws
	ratio := float64(got) / float64(len(m.Strength)) / p
	t.Logf("share above %g: %.5f, theory %.5f", floor, p*ratio, p)
	// Blobs above 2.5 hold about 8 pixels at σ = 2: about 900 of them in the frame.
	independent := float64(len(m.Strength)) * p / 8
	if !(math.Abs(ratio-1) <= 4/math.Sqrt(independent)) {
		t.Errorf("share of noise pixels above %g is %.3f times that of theory", floor, ratio)
	}
}

// The twins must agree wherever both see something.
func TestTwinsAgree(t *testing.T) {
	if active == plain {
		t.Skip("build without OpenCV: only one implementation")
	}
	f := crowdedFrame(203, 151, 7)
	noise := make([]float32, len(f.Pix))
	for i := range noise {
		noise[i] = 3 + 0.01*float32(i%f.Width)
	}
	for _, o := range []Options{
		{SigmaPx: 0.8, NoiseCounts: 3},
		{SigmaPx: 1.5, NoiseCounts: 3, Floor: 4},
		{SigmaPx: 1.5, Noise: noise, Floor: 4},
		{SigmaPx: 5, NoiseCounts: 3, Floor: 10},
	} {
		var a, b Map
		if err := active.compute(f, o, &a); err != nil {
			t.Fatal(err)
		}
		if err := plain.compute(f, o, &b); err != nil {
			t.Fatal(err)
		}
		both := 0
		for i := range a.Strength {
			sa, sb := float64(a.Strength[i]), float64(b.Strength[i])
			if sa == 0 || sb == 0 {
				if s := max(sa, sb); s > o.Floor+1e-4*(1+o.Floor) {
					t.Errorf("%+v pixel %d: strengths %g and %g", o.SigmaPx, i, sa, sb)
				}
				continue
			}
			both++
			if !(math.Abs(sa-sb) <= 1e-4*max(1, sb)) {
				t.Errorf("σ=%g pixel %d: strength %g, plain Go %g", o.SigmaPx, i, sa, sb)
			}
			if sb < 4 {
				continue // direction and offset of next to nothing
			}
			if d := angleBetween(float64(a.Theta[i]), float64(b.Theta[i])); !(d <= 1e-2) {
				t.Errorf("σ=%g pixel %d: normals %g and %g", o.SigmaPx, i, a.Theta[i], b.Theta[i])
			} else if d < 1e-4 && !(math.Abs(float64(a.Offset[i]-b.Offset[i])) <= 1e-3) &&
				math.Abs(float64(a.Theta[i])) < 1.57 {
				t.Errorf("σ=%g pixel %d: offsets %g and %g", o.SigmaPx, i, a.Offset[i], b.Offset[i])
			}
		}
		if both < 300 {
			t.Errorf("σ=%g: only %d pixels in common", o.SigmaPx, both)
		}
	}
}

// Noise per pixel scales the strength of that pixel and nothing else.
func TestNoisePerPixel(t *testing.T) {
	f := crowdedFrame(90, 70, 9)
	noise := make([]float32, len(f.Pix))
	for i := range noise {
		noise[i] = 2
		if i%f.Width >= 45 {
			noise[i] = 8
		}
	}
	var one, each Map
	if err := Compute(f, Options{SigmaPx: 1.5, NoiseCounts: 2, Floor: 4}, &one); err != nil {
		t.Fatal(err)
	}
	if err := Compute(f, Options{SigmaPx: 1.5, Noise: noise, Floor: 1}, &each); err != nil {
		t.Fatal(err)
	}
	compared := 0
	for i, s := range one.Strength {
		if s == 0 {
			continue
		}
		compared++
		want := float64(s) * 2 / float64(noise[i])
		if !(math.Abs(float64(each.Strength[i])/want-1) <= 1e-5) || each.Theta[i] != one.Theta[i] || each.Offset[i] != one.Offset[i] {
			t.Fatalf("pixel %d: strength %g, want %g", i, each.Strength[i], want)
		}
	}
	if compared < 200 {
		t.Fatalf("only %d pixels compared", compared)
	}
}

// A dark line is not a ridge, and an even frame has none.
func TestNothingBright(t *testing.T) {
	f := imaging.NewFrame(50, 40)
	addLine(f, -80, 1.5, 0, 25.2, 20)
	var m Map
	if err := Compute(f, Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: 0}, &m); err != nil {
		t.Fatal(err)
	}
	for y := range f.Height {
		for x := 24; x <= 26; x++ {
			if s := m.Strength[y*f.Width+x]; s != 0 {
				t.Fatalf("strength %g at (%d, %d) on a dark line", s, x, y)
			}
		}
	}
	for i := range f.Pix {
		f.Pix[i] = 12
	}
	if err := Compute(f, Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: 0.1}, &m); err != nil {
		t.Fatal(err)
	}
	for i, s := range m.Strength {
		if s != 0 || m.Theta[i] != 0 || m.Offset[i] != 0 {
			t.Fatalf("pixel %d of an even frame: strength %g", i, s)
		}
	}
}

func TestRefusals(t *testing.T) {
	good := Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: 3}
	frame := func(v float32) imaging.Frame {
		f := imaging.NewFrame(20, 15)
		f.Pix[33] = v
		return f
	}
	nan, inf := math.NaN(), math.Inf(1)
	for name, tc := range map[string]struct {
		f    imaging.Frame
		o    Options
		want error
	}{
		"empty":          {imaging.Frame{}, good, ErrFrame},
		"negative sides": {imaging.Frame{Width: -4, Height: -5, Pix: make([]float32, 20)}, good, ErrFrame},
		"pixels missing": {imaging.Frame{Width: 20, Height: 15, Pix: make([]float32, 299)}, good, ErrFrame},
		"vast":           {imaging.Frame{Width: math.MaxInt, Height: 2}, good, ErrFrame},
		"narrow":         {imaging.NewFrame(6, 40), good, ErrFrame},
		"low":            {imaging.NewFrame(40, 6), good, ErrFrame},
		"NaN":            {frame(float32(nan)), good, ErrFrame},
		"+Inf":           {frame(float32(inf)), good, ErrFrame},
		"-Inf":           {frame(float32(-inf)), good, ErrFrame},
		"huge":           {frame(1e30), good, ErrFrame},
		"sigma 0":        {frame(0), Options{NoiseCounts: 1}, ErrOptions},
		"sigma NaN":      {frame(0), Options{SigmaPx: nan, NoiseCounts: 1}, ErrOptions},
		"sigma Inf":      {frame(0), Options{SigmaPx: inf, NoiseCounts: 1}, ErrOptions},
		"no noise":       {frame(0), Options{SigmaPx: 1.5}, ErrOptions},
		"noise NaN":      {frame(0), Options{SigmaPx: 1.5, NoiseCounts: nan}, ErrOptions},
		"floor NaN":      {frame(0), Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: nan}, ErrOptions},
		"floor Inf":      {frame(0), Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: inf}, ErrOptions},
		"floor below 0":  {frame(0), Options{SigmaPx: 1.5, NoiseCounts: 1, Floor: -1}, ErrOptions},
		"Noise short":    {frame(0), Options{SigmaPx: 1.5, Noise: make([]float32, 7)}, ErrOptions},
		"Noise zero":     {frame(0), Options{SigmaPx: 1.5, Noise: make([]float32, 300)}, ErrOptions},
	} {
		m := Map{Width: 77}
		if err := Compute(tc.f, tc.o, &m); !errors.Is(err, tc.want) {
			t.Errorf("%s: error %v, want %v", name, err, tc.want)
		}
		if m.Width != 77 {
			t.Errorf("%s: the map was changed", name)
		}
	}
	// The smallest frame that fits must work, mirrored margins and all.
	f := imaging.NewFrame(7, 7)
	f.Pix[24] = 100
	var m Map
	if err := Compute(f, good, &m); err != nil || !(m.Strength[24] > 3) {
		t.Errorf("frame of 7×7: strength %v, error %v", m.Strength, err)
	}
}

// Many goroutines, frames of several sizes and filters: the same maps as one after the other.
func TestConcurrentCalls(t *testing.T) {
	type job struct {
		f    imaging.Frame
		o    Options
		want Map
	}
	jobs := make([]job, 6)
	for i := range jobs {
		jobs[i].f = crowdedFrame(60+7*i, 80-5*i, uint64(i))
		jobs[i].o = Options{SigmaPx: 1.2 + 0.4*float64(i%3), NoiseCounts: 3, Floor: 4}
		if err := Compute(jobs[i].f, jobs[i].o, &jobs[i].want); err != nil {
			t.Fatal(err)
		}
	}
	var wg sync.WaitGroup
	for g := range 8 {
		wg.Go(func() {
			var m Map
			for n := range 24 {
				j := &jobs[(n+g)%len(jobs)]
				if err := Compute(j.f, j.o, &m); err != nil {
					t.Error(err)
					return
				}
				for i, s := range m.Strength {
					if s != j.want.Strength[i] || m.Theta[i] != j.want.Theta[i] || m.Offset[i] != j.want.Offset[i] {
						t.Errorf("call %d of goroutine %d: pixel %d differs", n, g, i)
						return
					}
				}
				if n == 11 {
					Drain()
				}
			}
		})
	}
	wg.Wait()
	Drain()
	if n := len(active.idle); n != 0 {
		t.Errorf("%d workspaces left after Drain", n)
	}
}
