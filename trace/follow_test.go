package trace

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"

	"wend/imaging"
)

// strand makes a contour of a bent filament about (x, y), seen from one end or the other, µm.
func strand(frame int, x, y, length, bend, angle float64, backwards bool) Contour {
	c := Contour{Frame: frame, LengthUm: length, LengthSEUm: 0.05, PhotonsPerUm: 600, Ends: [2]End{EndFree, EndFree}}
	n := int(length/0.1) + 1
	sin, cos := math.Sincos(angle)
	for i := range n {
		s := -length/2 + 0.1*float64(i)
		u, v := s, bend*s*s
		c.Points = append(c.Points, Point{SUm: 0.1 * float64(i), XUm: x + u*cos - v*sin, YUm: y + u*sin + v*cos, SEUm: 0.01})
	}
	if backwards {
		c = turned(c)
	}
	return c
}

// Two fluctuating, drifting filaments near each other keep their identity and their ends, whichever end they are traced
// from and in whichever order they come; one that is lost for ten frames is found again, one that is seen in two pieces for a frame too.
func TestFollowKeepsIdentityAndEnds(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	const frames = 120
	var all [][]Contour
	starts := make(map[[2]int]xy) // true s = 0 end by filament and frame
	for f := range frames {
		var list []Contour
		for k := range 2 {
			x, y := 10+0.01*float64(f), 8+4*float64(k)+0.3*math.Sin(float64(f)/7)
			length := 8 + 2*float64(k)
			c := strand(f, x, y, length, 0.03*rng.NormFloat64(), 0.1*rng.NormFloat64(), false)
			starts[[2]int{k, f}] = xy{c.Points[0].XUm, c.Points[0].YUm}
			switch {
			case k == 0 && f >= 40 && f < 50: // lost
				continue
			case k == 1 && f == 70: // in two pieces
				half := len(c.Points) / 2
				a, b := c, c
				a.Points, b.Points = c.Points[:half-3], c.Points[half+3:]
				a.LengthUm, b.LengthUm = length/2-0.3, length/2-0.3
				list = append(list, a, b)
				continue
			}
			if rng.IntN(2) == 0 {
				c = turned(c)
			}
			list = append(list, c)
		}
		rng.Shuffle(len(list), func(i, j int) { list[i], list[j] = list[j], list[i] })
		all = append(all, list)
	}
	got := Follow(all, 0, Options{})
	if len(got) != 2 {
		t.Fatalf("%d filaments, want 2", len(got))
	}
	for _, f := range got {
		k := 0
		if f.Contours[0].LengthUm > 9 {
			k = 1
		}
		if f.First != 0 || f.Last != frames-1 || len(f.Contours) != frames {
			t.Fatalf("filament %d: frames %d to %d in %d entries", f.ID, f.First, f.Last, len(f.Contours))
		}
		used := 0
		first := xy{f.Contours[0].Points[0].XUm, f.Contours[0].Points[0].YUm}
		same := first.distance(starts[[2]int{k, 0}]) < 1
		for i, c := range f.Contours {
			if c.Frame != i {
				t.Fatalf("entry %d is of frame %d", i, c.Frame)
			}
			if !c.Used() {
				continue
			}
			used++
			if math.Abs(c.LengthUm-(8+2*float64(k))) > 0.5 {
				t.Errorf("filament %d frame %d: length %.1f, another one's", f.ID, i, c.LengthUm)
			}
			p := xy{c.Points[0].XUm, c.Points[0].YUm}
			if (p.distance(starts[[2]int{k, i}]) < 1) != same {
				t.Errorf("filament %d frame %d: ends swapped", f.ID, i)
			}
		}
		if want := frames - 10; k == 0 && (used != want || f.Contours[44].Reason != ReasonMissing) {
			t.Errorf("the lost filament was used in %d frames, want %d; reason %q while lost", used, want, f.Contours[44].Reason)
		}
		if k == 1 && (used != frames-1 || f.Contours[70].Used()) {
			t.Errorf("the broken filament was used in %d frames, want %d; reason %q while broken", used, frames-1, f.Contours[70].Reason)
		}
	}
}

// A length that jumps is marked, a line that comes up for a moment is no filament, two equally near candidates are neither.
func TestFollowMarks(t *testing.T) {
	var all [][]Contour
	for f := range 60 {
		c := strand(100+f, 10, 10, 8+0.02*float64(f%3), 0, 0, false)
		if f == 30 {
			c = strand(100+f, 9, 10, 6, 0, 0, false)
		}
		list := []Contour{c}
		if f == 10 || f == 11 {
			list = append(list, strand(100+f, 30, 30, 5, 0, 0, false))
		}
		if f == 45 {
			list = []Contour{strand(100+f, 10, 9.7, 8, 0, 0, false), strand(100+f, 10, 10.3, 8, 0, 0, false)}
		}
		all = append(all, list)
	}
	got := Follow(all, 100, Options{})
	if len(got) != 1 {
		t.Fatalf("%d filaments, want 1", len(got))
	}
	if r := got[0].Contours[30].Reason; r != ReasonLength {
		t.Errorf("a jump of the length has the reason %q", r)
	}
	if r := got[0].Contours[45].Reason; r != ReasonAmbiguous {
		t.Errorf("two candidates alike have the reason %q", r)
	}
	for _, i := range []int{0, 29, 31, 44, 59} {
		if !got[0].Contours[i].Used() {
			t.Errorf("frame %d is not used: %q", i, got[0].Contours[i].Reason)
		}
	}
}

// fakeMovie is a movie of two lines that sway, drawn ahead.
type fakeMovie struct {
	frames []imaging.Frame
	broken int // frame that cannot be read, -1 for none
}

var errBroken = errors.New("broken frame")

func (m fakeMovie) Frames() int { return len(m.frames) }

func (m fakeMovie) ReadFrame(t int, dst *imaging.Frame) error {
	if t == m.broken {
		return errBroken
	}
	dst.Resize(m.frames[t].Width, m.frames[t].Height)
	copy(dst.Pix, m.frames[t].Pix)
	return nil
}

func swaying(frames int, gain, offset, read float64, seed uint64) fakeMovie {
	rng := rand.New(rand.NewPCG(seed, 1))
	m := fakeMovie{broken: -1}
	for range frames {
		d := newDrawing(110, 90, testSigmaPx, 8)
		for k := range 2 {
			d.line(sine(14.3, 24.7+38*float64(k)+0.5*rng.NormFloat64(), 76, 0.02*rng.NormFloat64(), 3*rng.NormFloat64(), 0.7), 900*testPixelUm)
		}
		f := d.exposed(rng, read)
		for i, v := range f.Pix {
			f.Pix[i] = float32(math.Round(offset + gain*float64(v)))
		}
		m.frames = append(m.frames, f)
	}
	return m
}

var noHint = CameraHint{GainCounts: math.NaN(), OffsetCounts: math.NaN(), MaxCount: 65535}

// The survey finds the camera's gain, the level without light (below the offset by the read noise, which it cannot tell from light) and
// the line's width, whatever the camera. Sixteen lines know the gain to about 5 %.
func TestSurvey(t *testing.T) {
	for i, tc := range []struct{ gain, offset, read float64 }{{2, 100, 1.5}, {0.5, 200, 1}, {5, 100, 3}} {
		m := swaying(8, tc.gain, tc.offset, tc.read, uint64(20+i))
		c, err := Survey(m, 0, 7, Options{PixelUm: testPixelUm}, noHint)
		if err != nil {
			t.Fatal(err)
		}
		if r := c.Camera.GainCounts / tc.gain; !(math.Abs(r-1) < 0.15) {
			t.Errorf("gain %.3g, want %g", c.Camera.GainCounts, tc.gain)
		}
		zero := tc.offset - tc.gain*tc.read*tc.read
		// The level is reached by going down from the background, (8 + read²) electrons, along the fitted line.
		if d := (c.Camera.OffsetCounts - zero) / tc.gain; !(math.Abs(d) < 0.2*(8+tc.read*tc.read)) {
			t.Errorf("gain %g: level without light %.1f, want %.1f", tc.gain, c.Camera.OffsetCounts, zero)
		}
		if r := c.WidthPx / testWidthPx; !(math.Abs(r-1) < 0.03) {
			t.Errorf("gain %g: width %.3f pixels, want %.3f", tc.gain, c.WidthPx, testWidthPx)
		}
		if !(c.KnotWidths >= finestKnots && c.KnotWidths < coarsestKnots) || !(math.Abs(c.Misfit-1) < 0.1) {
			t.Errorf("gain %g: knots %g widths apart, χ² per pixel %.2f", tc.gain, c.KnotWidths, c.Misfit)
		}
	}
	m := swaying(3, 2, 100, 1.5, 9)
	c, err := Survey(m, 0, 2, Options{PixelUm: testPixelUm}, CameraHint{GainCounts: 3, OffsetCounts: 90, MaxCount: 65535})
	if err != nil || c.Camera.GainCounts != 3 || c.Camera.OffsetCounts != 90 {
		t.Errorf("a camera that is known is not kept: %+v, %v", c.Camera, err)
	}
	if _, err := Survey(m, 2, 1, Options{PixelUm: testPixelUm}, noHint); !errors.Is(err, ErrNoFrames) {
		t.Errorf("no frames: %v", err)
	}
}

// A movie gives the same for any number of workers, counts its frames, passes an error on, and stops when told.
func TestMovie(t *testing.T) {
	m := swaying(10, 2, 100, 1.5, 40)
	o := Options{PixelUm: testPixelUm}
	var done []int
	_, one, err := Movie(context.Background(), m, 2, 9, o, noHint, 1, func(n int) { done = append(done, n) })
	if err != nil {
		t.Fatal(err)
	}
	if len(one) != 2 || one[0].First != 2 || one[0].Last != 9 {
		t.Fatalf("%d filaments", len(one))
	}
	if want := []int{1, 2, 3, 4, 5, 6, 7, 8}; !reflect.DeepEqual(done, want) {
		t.Errorf("progress %v, want %v", done, want)
	}
	_, four, err := Movie(context.Background(), m, 2, 9, o, noHint, 4, nil)
	if err != nil || !reflect.DeepEqual(one, four) {
		t.Errorf("four workers give another result, %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, _, err := Movie(ctx, m, 0, 9, o, noHint, 2, nil); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
	m.broken = 5
	if _, _, err := Movie(context.Background(), m, 0, 9, o, noHint, 2, nil); !errors.Is(err, errBroken) {
		t.Errorf("a broken frame: %v", err)
	}
}

// Two filaments whose ends touch for a while look like one long one: it is no third filament, and neither of the two is used then.
func TestFollowJoined(t *testing.T) {
	var all [][]Contour
	for f := range 60 {
		y := 10 + 0.2*math.Sin(float64(f))
		a, b := strand(f, 8, y, 7, 0, 0, false), strand(f, 15.6, y, 7, 0, 0, false)
		if f >= 20 && f < 32 {
			joined := strand(f, 11.8, y, 14.6, 0, 0, false)
			all = append(all, []Contour{joined})
			continue
		}
		all = append(all, []Contour{a, b})
	}
	got := Follow(all, 0, Options{})
	if len(got) != 2 {
		t.Fatalf("%d filaments, want 2", len(got))
	}
	for _, f := range got {
		if len(f.Contours) != 60 {
			t.Fatalf("filament %d: %d frames, want 60", f.ID, len(f.Contours))
		}
		for _, c := range f.Contours {
			if joined := c.Frame >= 20 && c.Frame < 32; joined == c.Used() {
				t.Errorf("filament %d frame %d: used is %v, reason %q", f.ID, c.Frame, c.Used(), c.Reason)
			}
		}
	}
}
