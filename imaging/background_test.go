package imaging

import (
	"math"
	"math/rand/v2"
	"testing"
)

// unevenFrame is the background 200 + slopes + a broad hump, white noise of sd counts, and straight
// filaments of peak counts and standard deviation 1.3 px, every `spacing` px across a slanted direction;
// the truth of its background comes with it. Spacing 0 leaves the filaments out.
func unevenFrame(width, height int, sd, peak, spacing float64, seed uint64) (f, truth Frame) {
	rng := rand.New(rand.NewPCG(seed, 8))
	f, truth = NewFrame(width, height), NewFrame(width, height)
	for y := range height {
		for x := range width {
			u, v := float64(x)/float64(width)-0.4, float64(y)/float64(height)-0.6
			b := 200 + 30*u - 20*v + 40*math.Exp(-4*(u*u+v*v))
			i := y*width + x
			truth.Pix[i] = float32(b)
			if spacing > 0 {
				d := math.Remainder(0.8*float64(x)+0.6*float64(y), spacing)
				b += peak * math.Exp(-d*d/(2*1.3*1.3))
			}
			f.Pix[i] = float32(b + sd*rng.NormFloat64())
		}
	}
	return f, truth
}

// Filaments 40 px apart cover, four standard deviations wide (±2 each side), 13 % of every block.
func TestBackgroundIsRecovered(t *testing.T) {
	const sd = 6.0
	for _, peak := range []float64{0, 6, 20, 60, 400} {
		spacing := 40.0
		if peak == 0 {
			spacing = 0
		}
		bias, square, n := 0.0, 0.0, 0
		for seed := range uint64(4) {
			f, truth := unevenFrame(420, 310, sd, peak, spacing, seed)
			var bg Frame
			EstimateBackground(f, 32, &bg)
			if bg.Width != 420 || bg.Height != 310 || len(bg.Pix) != len(f.Pix) {
				t.Fatalf("background of %d×%d", bg.Width, bg.Height)
			}
			for i, v := range bg.Pix {
				d := float64(v-truth.Pix[i]) / sd
				bias += d
				square += d * d
				n++
			}
		}
		bias /= float64(n)
		rms := math.Sqrt(square / float64(n))
		t.Logf("peak %g: bias %.3f, rms %.3f noise standard deviations", peak, bias, rms)
		// A block's 150 pixels leave about 1/√150 = 0.08 each; the hump is curved within a block,
		// which alone is −0.07; the rest is what filaments do.
		if !(math.Abs(bias) <= 0.1) || !(rms <= 0.2) {
			t.Errorf("peak %g: bias %.3f, rms %.3f noise standard deviations, want at most 0.1, 0.2", peak, bias, rms)
		}
	}
}

// Limits that need no stored number: a plane without noise comes back exactly, at the borders
// too, and adding a constant or scaling a frame does the same to its background.
func TestBackgroundOfAPlane(t *testing.T) {
	for _, size := range [][2]int{{256, 192}, {201, 77}, {60, 300}} {
		f := NewFrame(size[0], size[1])
		for i := range f.Pix {
			f.Pix[i] = 100
		}
		var bg Frame
		EstimateBackground(f, 32, &bg)
		for i, v := range bg.Pix {
			if v != 100 {
				t.Fatalf("%v: background %g at pixel %d of an even frame, want 100", size, v, i)
			}
		}
		for i := range f.Pix {
			f.Pix[i] = 100 + 0.25*float32(i%f.Width) - 0.125*float32(i/f.Width)
		}
		EstimateBackground(f, 32, &bg)
		for i, v := range bg.Pix {
			// A block spans 8 counts; an evenly spread part of its pixels finds its middle to a few per cent
			// of that, extrapolated by half a block.
			if d := v - f.Pix[i]; !(d <= 0.6 && d >= -0.6) {
				t.Fatalf("%v: background of a plane off by %g counts at pixel (%d, %d)", size, d, i%f.Width, i/f.Width)
			}
		}
	}
	f, _ := unevenFrame(130, 90, 4, 50, 30, 3)
	g := NewFrame(130, 90)
	for i, v := range f.Pix {
		g.Pix[i] = 2*v + 64
	}
	var a, b Frame
	EstimateBackground(f, 32, &a)
	EstimateBackground(g, 32, &b)
	for i := range a.Pix {
		if d := b.Pix[i] - 2*a.Pix[i] - 64; !(math.Abs(float64(d)) <= 0.05) {
			t.Fatalf("pixel %d: %g for the scaled frame, want %g", i, b.Pix[i], 2*a.Pix[i]+64)
		}
	}
}

func TestBackgroundOfOddFrames(t *testing.T) {
	var bg Frame
	EstimateBackground(Frame{}, 32, &bg)
	if len(bg.Pix) != 0 {
		t.Errorf("%d pixels of an empty frame", len(bg.Pix))
	}
	f := NewFrame(70, 1)
	f.Pix[3], f.Pix[9] = float32(math.NaN()), float32(math.Inf(-1))
	EstimateBackground(f, 32, &bg)
	for i, v := range bg.Pix {
		if v != 0 {
			t.Errorf("background %g at pixel %d of a dark row with bad pixels, want 0", v, i)
		}
	}
}

// The noise of a known background, with bright filaments, hot and dead pixels, and in whole counts,
// where rounding adds 1/12 count² (the variance of a uniform distribution of width 1).
func TestNoiseStd(t *testing.T) {
	for _, tc := range []struct {
		name              string
		sd, peak, spacing float64
		hot, whole        bool
	}{
		{name: "plain", sd: 5},
		{name: "faint filaments", sd: 5, peak: 10, spacing: 40},
		{name: "bright filaments", sd: 5, peak: 500, spacing: 40},
		{name: "hot pixels", sd: 5, hot: true},
		{name: "whole counts", sd: 0.8, whole: true},
		{name: "all", sd: 3, peak: 60, spacing: 40, hot: true, whole: true},
	} {
		f, _ := unevenFrame(420, 310, tc.sd, tc.peak, tc.spacing, 6)
		if tc.hot {
			for i := 0; i < len(f.Pix); i += 997 {
				f.Pix[i] = 4000 * float32(i%2)
			}
		}
		want := tc.sd
		if tc.whole {
			for i, v := range f.Pix {
				f.Pix[i] = float32(math.Round(float64(v)))
			}
			want = math.Sqrt(tc.sd*tc.sd + 1.0/12)
		}
		var bg Frame
		EstimateBackground(f, 32, &bg)
		got := NoiseStd(f, bg)
		t.Logf("%s: %.3f, want %.3f", tc.name, got, want)
		// 16 000 differences give 1/√32 000 = 0.6 %; five of these.
		if !(math.Abs(got/want-1) <= 0.03) {
			t.Errorf("%s: %.3f counts, want %.3f", tc.name, got, want)
		}
	}
	one := NewFrame(1, 5)
	if got := NoiseStd(one, one); !math.IsNaN(got) {
		t.Errorf("noise of a single column is %g, want NaN", got)
	}
	even := NewFrame(9, 5)
	if got := NoiseStd(even, even); got != 0 {
		t.Errorf("noise of an even frame is %g, want 0", got)
	}
}

func BenchmarkEstimateBackground(b *testing.B) {
	f, _ := unevenFrame(512, 512, 6, 60, 40, 1)
	var bg Frame
	b.ReportAllocs()
	for b.Loop() {
		EstimateBackground(f, 32, &bg)
	}
}

func BenchmarkNoiseStd(b *testing.B) {
	f, _ := unevenFrame(512, 512, 6, 60, 40, 1)
	var bg Frame
	EstimateBackground(f, 32, &bg)
	b.ReportAllocs()
	for b.Loop() {
		NoiseStd(f, bg)
	}
}
