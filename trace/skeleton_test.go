package trace

import (
	"math"
	"testing"
)

// picture is a set of pixels drawn by a test.
type picture struct {
	width, height int
	mask          []bool
}

func newPicture(w, h int) picture { return picture{w, h, make([]bool, w*h)} }

// brush sets the pixels within radius of the straight piece from a to b.
func (p picture) brush(a, b xy, radius float64) {
	v := b.minus(a)
	for y := 1; y < p.height-1; y++ {
		for x := 1; x < p.width-1; x++ {
			q := xy{float64(x), float64(y)}
			u := 0.0
			if l := v.dot(v); l > 0 {
				u = min(max(q.minus(a).dot(v)/l, 0), 1)
			}
			if q.distance(a.plus(v.times(u))) <= radius {
				p.mask[y*p.width+x] = true
			}
		}
	}
}

func (p picture) list() []int {
	var out []int
	for i, v := range p.mask {
		if v {
			out = append(out, i)
		}
	}
	return out
}

// degree is how many of the eight neighbours of pixel i are set.
func (p picture) degree(i int) int {
	n := 0
	for dy := -1; dy <= 1; dy++ {
		for dx := -1; dx <= 1; dx++ {
			if (dx != 0 || dy != 0) && p.mask[i+dy*p.width+dx] {
				n++
			}
		}
	}
	return n
}

func TestThinMakesOnePathOfABar(t *testing.T) {
	for _, angle := range []float64{0, 0.3, math.Pi / 4, 1.1, math.Pi / 2, 2.5} {
		for _, radius := range []float64{0.8, 1.6, 3} {
			p := newPicture(71, 63)
			sin, cos := math.Sincos(angle)
			a := xy{35.3 - 22*cos, 31.6 - 22*sin}
			b := xy{35.3 + 22*cos, 31.6 + 22*sin}
			p.brush(a, b, radius)
			before := p.list()
			kept := thin(p.mask, p.width, before)
			if len(kept) != len(p.list()) {
				t.Fatalf("angle %g radius %g: %d pixels returned, %d in the mask", angle, radius, len(kept), len(p.list()))
			}
			var w walker
			w.begin(p.width, p.width*p.height)
			if _, met := w.farthest(p.mask, kept[0]); met != len(kept) {
				t.Errorf("angle %g radius %g: thinning broke the bar: %d of %d pixels connected", angle, radius, met, len(kept))
			}
			for _, i := range kept {
				// A block of four would be two pixels wide.
				if p.mask[i+1] && p.mask[i+p.width] && p.mask[i+p.width+1] {
					t.Errorf("angle %g radius %g: a block of four is left at %d, %d", angle, radius, i%p.width, i/p.width)
				}
				q := xy{float64(i % p.width), float64(i / p.width)}
				if d := math.Abs(q.minus(a).dot(xy{-sin, cos})); d > 1.5 {
					t.Errorf("angle %g radius %g: pixel %v lies %.2f off the middle, want at most 1.5", angle, radius, q, d)
				}
			}
			path := w.longest(p.mask, kept[0])
			first, last := path[0], path[len(path)-1]
			span := math.Hypot(float64(first%p.width-last%p.width), float64(first/p.width-last/p.width))
			// Thinning eats up to twice the bar's radius at each end, of which one lies beyond 44, and a pixel each of raster; [extent] gives it back.
			if span < 44-2*radius-2 || span > 44+2*radius+2 {
				t.Errorf("angle %g radius %g: longest path spans %.1f pixels of a bar of 44", angle, radius, span)
			}
			for k := 1; k < len(path); k++ {
				if dx, dy := path[k]%p.width-path[k-1]%p.width, path[k]/p.width-path[k-1]/p.width; max(dx, -dx) > 1 || max(dy, -dy) > 1 {
					t.Fatalf("angle %g radius %g: the path jumps by %d, %d", angle, radius, dx, dy)
				}
			}
		}
	}
}

func TestThinKeepsTheTopologyOfShapes(t *testing.T) {
	ring := func(p picture) {
		for i := range 60 {
			s0, c0 := math.Sincos(2 * math.Pi * float64(i) / 60)
			s1, c1 := math.Sincos(2 * math.Pi * float64(i+1) / 60)
			p.brush(xy{40 + 20*c0, 30 + 20*s0}, xy{40 + 20*c1, 30 + 20*s1}, 2.2)
		}
	}
	for _, tc := range []struct {
		name string
		draw func(p picture)
		ends int // pixels with one neighbour
	}{
		{"ring", ring, 0},
		{"T", func(p picture) {
			p.brush(xy{10, 15}, xy{70, 15}, 2)
			p.brush(xy{40, 15}, xy{40, 50}, 2)
		}, 3},
		{"X", func(p picture) {
			p.brush(xy{15, 10}, xy{65, 50}, 2)
			p.brush(xy{15, 50}, xy{65, 10}, 2)
		}, 4},
	} {
		p := newPicture(81, 61)
		tc.draw(p)
		kept := thin(p.mask, p.width, p.list())
		ends := 0
		for _, i := range kept {
			if p.degree(i) == 1 {
				ends++
			}
		}
		if ends != tc.ends {
			t.Errorf("%s: %d free ends, want %d", tc.name, ends, tc.ends)
		}
	}
}

func TestLongestPathPassesBranches(t *testing.T) {
	p := newPicture(60, 40)
	for x := 5; x <= 50; x++ {
		p.mask[20*60+x] = true
	}
	for y := 12; y < 20; y++ { // a branch of 8
		p.mask[y*60+30] = true
	}
	var w walker
	w.begin(60, 60*40)
	for _, start := range []int{20*60 + 5, 20*60 + 33, 12*60 + 30} {
		path := w.longest(p.mask, start)
		if len(path) != 46 || min(path[0], path[45]) != 20*60+5 || max(path[0], path[45]) != 20*60+50 {
			t.Errorf("from %d: %d pixels from %d to %d, want the 46 of the long bar", start, len(path), path[0], path[len(path)-1])
		}
	}
}

// A cross and a ring are tangled, whatever path is the longest; an open bow is not.
func TestLeftoverOfCrossAndRing(t *testing.T) {
	ring := func(p picture, turns float64) {
		const pieces = 60
		at := func(i int) xy {
			sin, cos := math.Sincos(2 * math.Pi * turns * float64(i) / pieces)
			return xy{40 + 20*cos, 30 + 20*sin}
		}
		for i := range pieces {
			p.brush(at(i), at(i+1), 1.2)
		}
	}
	for _, tc := range []struct {
		name string
		draw func(p picture)
		want bool
	}{
		{"cross", func(p picture) {
			p.brush(xy{15, 10}, xy{65, 50}, 1.2)
			p.brush(xy{15, 50}, xy{65, 10}, 1.2)
		}, true},
		{"ring", func(p picture) { ring(p, 1) }, true},
		{"half a ring", func(p picture) { ring(p, 0.5) }, false},
		{"three quarters of a ring", func(p picture) { ring(p, 0.75) }, false},
	} {
		p := newPicture(81, 61)
		tc.draw(p)
		var d detector
		d.begin(p.width, p.width*p.height)
		list := thin(p.mask, p.width, p.list())
		if got := d.leftover(list, d.longest(p.mask, list[0]), 1.3); got != tc.want {
			t.Errorf("%s: tangled is %v, want %v", tc.name, got, tc.want)
		}
	}
}
