package movie

import (
	"errors"
	"hash/fnv"
	"math"
	"sync"
	"testing"

	"wend/imaging"
	"wend/imaging/synth"
	"wend/modes/chain"
)

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol) {
		t.Errorf("%s = %.10g, want %.10g within %.2g", what, got, want, tol)
	}
}

func small(change func(*Options)) Options {
	o := DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx, o.LengthUm = 6, 190, 150, 6
	if change != nil {
		change(&o)
	}
	return o
}

func mustNew(t testing.TB, o Options) *Movie {
	t.Helper()
	m, err := New(o)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func fingerprint(m *Movie, frames []int) map[int]uint64 {
	sums := map[int]uint64{}
	var f imaging.Frame
	for _, t := range frames {
		m.Frame(t, &f)
		h := fnv.New64a()
		for _, v := range f.Pix {
			h.Write([]byte{byte(uint16(v)), byte(uint16(v) >> 8)})
		}
		sums[t] = h.Sum64()
	}
	return sums
}

func TestSameSeedSameCounts(t *testing.T) {
	busy := func(o *Options) {
		o.Filaments, o.LengthUm, o.Spots, o.HotPixels, o.Flicker, o.BleachTo, o.DyePerUm, o.Uneven = 2, 4, 3, 2, 0.05, 0.6, 50, 0.3
	}
	forward := fingerprint(mustNew(t, small(busy)), []int{0, 1, 2, 3, 4, 5})
	m := mustNew(t, small(busy))
	backward := map[int]uint64{}
	var mu sync.Mutex
	var wg sync.WaitGroup
	for f := 5; f >= 0; f-- {
		wg.Go(func() {
			sum := fingerprint(m, []int{f})[f]
			mu.Lock()
			backward[f] = sum
			mu.Unlock()
		})
	}
	wg.Wait()
	seen := map[uint64]bool{}
	for f := range 6 {
		if forward[f] != backward[f] {
			t.Errorf("frame %d depends on the order in which frames are made", f)
		}
		seen[forward[f]] = true
	}
	if len(seen) != 6 {
		t.Errorf("%d different frames of 6", len(seen))
	}
	other := fingerprint(mustNew(t, small(func(o *Options) { busy(o); o.Seed = 2 })), []int{0})
	if other[0] == forward[0] {
		t.Error("another seed gave the same frame")
	}
}

// The light in the image against what the options ask for, and its centre of mass against
// the truth: neither knows how the image was drawn.
func TestFramesHoldTheTruth(t *testing.T) {
	o := small(func(o *Options) {
		o.Noiseless, o.BackgroundPerPx, o.BleachTo, o.ExposureS = true, 0, 0.5, 0
	})
	m := mustNew(t, o)
	var f imaging.Frame
	for frame := range m.Frames() {
		m.Frame(frame, &f)
		truth := m.Truth(frame)
		if len(truth) != 1 {
			t.Fatalf("%d true contours, want 1", len(truth))
		}
		if m.LeavesField(truth[0]) {
			t.Fatalf("frame %d: filament left the field", frame)
		}
		var photons, x, y float64
		for j := range f.Height {
			for i := range f.Width {
				p := (float64(f.At(i, j)) - o.Offset) / o.Gain
				photons, x, y = photons+p, x+p*float64(i)*o.PixelUm, y+p*float64(j)*o.PixelUm
			}
		}
		light := math.Pow(0.5, float64(frame)/5)
		near(t, "photons/want", photons/(o.PhotonsPerUm*o.LengthUm*light), 1, 1e-5)
		// Points of the contour are equally far apart along it, so their trapezoid mean is its
		// centre.
		c := truth[0]
		n := len(c.SUm) - 1
		var cx, cy float64
		for k := range c.SUm {
			w := 1 / float64(n)
			if k == 0 || k == n {
				w /= 2
			}
			cx, cy = cx+w*c.XUm[k], cy+w*c.YUm[k]
		}
		near(t, "centre x (µm)", x/photons, cx, 2e-4)
		near(t, "centre y (µm)", y/photons, cy, 2e-4)
		near(t, "first s", c.SUm[0], 0, 0)
		if l := c.SUm[n]; !(l <= o.LengthUm+1e-9 && l > 0.97*o.LengthUm) {
			t.Errorf("true length %.4f µm of a filament of %g µm", l, o.LengthUm)
		}
	}
}

// With a long exposure the image's centre is the mean of the centres, and its ridge lies on
// the true contour: profiles across the contour have their centroids on it.
func TestExposureShowsTheTruth(t *testing.T) {
	o := small(func(o *Options) {
		o.Noiseless, o.BackgroundPerPx, o.LengthUm, o.ExposureS, o.Frames = true, 0, 9, 0.1, 4
	})
	m := mustNew(t, o)
	var im synth.Image
	for frame := range m.Frames() {
		m.Expect(frame, &im)
		var photons, x, y, meanX, meanY float64
		for i, p := range im.Pix {
			photons += p
			x, y = x+p*float64(i%im.Width)*o.PixelUm, y+p*float64(i/im.Width)*o.PixelUm
		}
		states := m.Track(0).SubStates(frame)
		for _, s := range states {
			meanX, meanY = meanX+s.XUm/float64(len(states)), meanY+s.YUm/float64(len(states))
		}
		near(t, "mean centre x (µm)", x/photons, meanX, 2e-4)
		near(t, "mean centre y (µm)", y/photons, meanY, 2e-4)

		c := m.Truth(frame)[0]
		if l := c.SUm[len(c.SUm)-1]; !(l < 9.01 && l > 8.7) {
			t.Errorf("frame %d: true length %.3f µm of a filament of 9 µm", frame, l)
		}
		sum, n := 0.0, 0
		for k := 8; k < len(c.SUm)-8; k++ {
			tx, ty := c.XUm[k+1]-c.XUm[k-1], c.YUm[k+1]-c.YUm[k-1]
			norm := math.Hypot(tx, ty)
			nx, ny := -ty/norm, tx/norm
			var w, first float64
			for u := -0.6; u <= 0.6001; u += 0.02 {
				v := bilinear(&im, (c.XUm[k]+u*nx)/o.PixelUm, (c.YUm[k]+u*ny)/o.PixelUm)
				w, first = w+v, first+u*v
			}
			sum, n = sum+math.Pow(first/w, 2), n+1
		}
		if n < 60 {
			t.Fatalf("%d profiles, want 60 or more", n)
		}
		// The point-spread function smooths bends by σ²/2 times their curvature, some
		// nanometres at 0.3/µm.
		if rms := math.Sqrt(sum / float64(n)); !(rms < 0.005) {
			t.Errorf("frame %d: ridge %.1f nm rms off the true contour, want below 5", frame, 1e3*rms)
		}
	}
}

func bilinear(im *synth.Image, x, y float64) float64 {
	i, j := int(x), int(y)
	fx, fy := x-float64(i), y-float64(j)
	at := func(i, j int) float64 { return im.Pix[j*im.Width+i] }
	return (1-fy)*((1-fx)*at(i, j)+fx*at(i+1, j)) + fy*((1-fx)*at(i, j+1)+fx*at(i+1, j+1))
}

func TestFixedCurves(t *testing.T) {
	c := synth.Sinusoid(3, 7, 10, 0.5, 5, 0.1)
	o := small(func(o *Options) { o.Fixed, o.Frames = []synth.Curve{c}, 2 })
	m := mustNew(t, o)
	a, b := m.Truth(0), m.Truth(1)
	if len(a) != 1 || len(a[0].XUm) < 90 {
		t.Fatalf("%d contours, want one of 100 points or more", len(a))
	}
	for k := range a[0].XUm {
		if a[0].XUm[k] != b[0].XUm[k] || a[0].YUm[k] != b[0].YUm[k] {
			t.Fatal("a fixed curve moved")
		}
	}
	near(t, "length", a[0].SUm[len(a[0].SUm)-1], c.Length(), 1e-9)
	if d := m.Describe(0); d.LpUm != 0 || d.LengthUm != c.Length() {
		t.Errorf("described as %+v", d)
	}
}

// Mean and variance of each pixel over many frames of a still filament: the camera's gain
// from the images alone.
func TestPixelNoiseOverFrames(t *testing.T) {
	o := small(func(o *Options) {
		o.Fixed, o.Frames, o.WidthPx, o.HeightPx = []synth.Curve{synth.Sinusoid(1, 2, 4, 0.2, 5, 0)}, 150, 60, 40
	})
	m := mustNew(t, o)
	n := o.WidthPx * o.HeightPx
	s1, s2 := make([]float64, n), make([]float64, n)
	var f imaging.Frame
	for frame := range o.Frames {
		m.Frame(frame, &f)
		for i, v := range f.Pix {
			s1[i] += float64(v)
			s2[i] += float64(v) * float64(v)
		}
	}
	frames := float64(o.Frames)
	ratio := 0.0
	for i := range s1 {
		mean := s1[i] / frames
		variance := (s2[i] - frames*mean*mean) / (frames - 1)
		ratio += variance / m.Camera().Variance(mean) / float64(n)
	}
	near(t, "variance/model", ratio, 1, 4*math.Sqrt(2/(frames-1)/float64(n)))
}

func TestPlacementApart(t *testing.T) {
	o := small(func(o *Options) {
		o.Filaments, o.LengthUm, o.LengthSpread, o.WidthPx, o.HeightPx, o.Frames = 8, 4, 0.25, 400, 300, 1
	})
	m := mustNew(t, o)
	truth := m.Truth(0)
	if len(truth) != 8 || m.Filaments() != 8 {
		t.Fatalf("%d filaments, want 8", len(truth))
	}
	lengths := map[float64]bool{}
	for i, a := range truth {
		d := m.Describe(i)
		if !(d.LengthUm >= 3 && d.LengthUm <= 5) {
			t.Errorf("length %g µm, want 3 to 5", d.LengthUm)
		}
		lengths[d.LengthUm] = true
		if m.LeavesField(a) {
			t.Errorf("filament %d starts outside", i+1)
		}
		for _, b := range truth[:i] {
			for k := range a.XUm {
				for l := range b.XUm {
					// The start is 10 σ apart; the first exposure moves little.
					if math.Hypot(a.XUm[k]-b.XUm[l], a.YUm[k]-b.YUm[l]) < 6*o.PSFUm {
						t.Fatalf("filament %d starts too near another", i+1)
					}
				}
			}
		}
	}
	if len(lengths) != 8 {
		t.Errorf("%d different lengths of 8", len(lengths))
	}
}

func TestNewRefuses(t *testing.T) {
	for name, change := range map[string]func(*Options){
		"frames":      func(o *Options) { o.Frames = 0 },
		"size":        func(o *Options) { o.WidthPx = 1 << 25; o.HeightPx = 1 << 25 },
		"pixel":       func(o *Options) { o.PixelUm = math.NaN() },
		"exposure":    func(o *Options) { o.ExposureS = 2 * o.IntervalS },
		"temperature": func(o *Options) { o.TemperatureC = 150 },
		"length":      func(o *Options) { o.LengthUm = 0 },
		"no place":    func(o *Options) { o.LengthUm = 40 },
		"crowded":     func(o *Options) { o.Filaments = 30 },
		"psf":         func(o *Options) { o.PSFUm = 0 },
		"bleach":      func(o *Options) { o.BleachTo = 0 },
		"gain":        func(o *Options) { o.Gain = math.Inf(1) },
		"fixed":       func(o *Options) { o.Fixed = []synth.Curve{{X: []float64{1}, Y: []float64{1}}} },
		"uneven":      func(o *Options) { o.Uneven = 1.1 },
	} {
		if m, err := New(small(change)); !errors.Is(err, ErrOptions) || m != nil {
			t.Errorf("%s: error %v, want ErrOptions and no movie", name, err)
		}
	}
}

func TestTubeKeepsFilamentInPlace(t *testing.T) {
	o := small(func(o *Options) { o.TubeRmsUm, o.Frames, o.IntervalS, o.ExposureS, o.WanderUm = 0.08, 200, 2, 0, 0.1 })
	m := mustNew(t, o)
	c := m.Chain(0)
	// Displacement across the tube's axis at the middle of the filament against the exact
	// modes: odd bending modes and the rigid shift.
	kTOverGamma := math.Pow(chain.TubeStiffness(0.08, o.LpUm, o.TempK())/chain.KT(o.TempK()), -1) * 1e18
	want := kTOverGamma / o.LengthUm
	for n := 1; n <= 60; n += 2 {
		if n <= c.Options().Modes {
			want += c.Variance(n) * math.Pow(chain.BeamMode(n, 0.5), 2) / o.LengthUm
		}
	}
	home := c.Options().Home
	sin, cos := math.Sincos(home.AngleRad)
	sum := 0.0
	for frame := range o.Frames {
		curve := m.Track(0).SubCurves(frame)[0]
		k := len(curve.X) / 2
		w := (curve.Y[k]-home.YUm)*cos - (curve.X[k]-home.XUm)*sin
		sum += w * w
	}
	// Frames 2 s apart are independent in this tube.
	near(t, "variance across/want", sum/float64(o.Frames)/want, 1, 4*math.Sqrt(2/float64(o.Frames)))
}

func BenchmarkFrame(b *testing.B) {
	m := mustNew(b, DefaultOptions())
	var f imaging.Frame
	t := 0
	for b.Loop() {
		m.Frame(t%m.Frames(), &f)
		t++
	}
}
