package trace

import (
	"math"
	"math/rand/v2"
	"testing"
)

// From which end a line was traced makes no difference to what is followed.
func TestFollowDoesNotMindTheDirection(t *testing.T) {
	rng := rand.New(rand.NewPCG(81, 82))
	var forward, mixed [][]Contour
	for f := range 40 {
		var a, b []Contour
		for k := range 3 {
			c := strand(f, 9+0.02*float64(f), 6+5*float64(k), 7+float64(k), 0.03*rng.NormFloat64(), 0.1*rng.NormFloat64(), false)
			c.EndsSEUm = [2]float64{0.05, 0.07}
			a = append(a, c)
			if rng.IntN(2) == 0 {
				c = turned(c)
			}
			b = append(b, c)
		}
		forward, mixed = append(forward, a), append(mixed, b)
	}
	want, got := Follow(forward, 0, Options{}), Follow(mixed, 0, Options{})
	if len(want) != 3 || len(got) != 3 {
		t.Fatalf("%d and %d filaments, want 3", len(want), len(got))
	}
	for k := range want {
		for f, c := range want[k].Contours {
			d := got[k].Contours[f]
			if c.Reason != d.Reason || c.EndsSEUm != d.EndsSEUm || len(c.Points) != len(d.Points) {
				t.Fatalf("filament %d frame %d: reason %q, ends %v, turned %q, %v", k, f, c.Reason, c.EndsSEUm, d.Reason, d.EndsSEUm)
			}
			for i, p := range c.Points {
				q := d.Points[i]
				if p.XUm != q.XUm || p.YUm != q.YUm || math.Abs(p.SUm-q.SUm) > 1e-12 {
					t.Fatalf("filament %d frame %d point %d: %v, turned %v", k, f, i, p, q)
				}
			}
		}
	}
}

// Two filaments that meet are one tangle for a while: neither is used then, both with the reason
// crossing, and afterwards each is what it was.
func TestFollowThroughACrossing(t *testing.T) {
	var all [][]Contour
	for f := range 40 {
		gap := 4 * math.Abs(float64(f)-20) / 20
		a := strand(f, 10, 10-gap/2, 6, 0, 0, false)
		b := strand(f, 10.2, 10+gap/2, 8, 0, 0, false)
		list := []Contour{a, b}
		if f >= 18 && f <= 22 {
			tangle := strand(f, 10.1, 10, 8.4, 0, 0, false)
			tangle.Reason = ReasonCrossing
			list = []Contour{tangle}
		}
		all = append(all, list)
	}
	got := Follow(all, 0, Options{})
	if len(got) != 2 {
		t.Fatalf("%d filaments, want 2", len(got))
	}
	for _, f := range got {
		want := 6.0
		if f.Contours[0].LengthUm > 7 {
			want = 8
		}
		if f.First != 0 || f.Last != 39 || len(f.Contours) != 40 {
			t.Fatalf("filament %d: frames %d to %d in %d entries", f.ID, f.First, f.Last, len(f.Contours))
		}
		for i, c := range f.Contours {
			switch {
			case i >= 18 && i <= 22:
				if c.Reason != ReasonCrossing {
					t.Errorf("filament of %g µm, frame %d: reason %q, want crossing", want, i, c.Reason)
				}
			case !c.Used() || c.LengthUm != want:
				t.Errorf("filament of %g µm, frame %d: length %g, reason %q", want, i, c.LengthUm, c.Reason)
			}
		}
	}
}
