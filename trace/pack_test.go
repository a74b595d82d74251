package trace

import (
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
)

// Packing changes nothing that the tables would print: what comes back is what rounding gives, to the bit.
func TestPack(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 9))
	for range 200 {
		c := Contour{Ends: [2]End{EndFree, EndBorder}}
		s := 0.0
		for range 2 + rng.IntN(90) {
			p := Point{SUm: s, XUm: 200 * rng.Float64(), YUm: 200*rng.Float64() - 3, SEUm: 0.3 * rng.Float64()}
			if rng.IntN(9) == 0 {
				p.SEUm = math.NaN()
			}
			c.Points = append(c.Points, p)
			s += 0.2 * rng.Float64()
		}
		if rng.IntN(2) == 0 {
			c = turned(c)
		}
		want := Contour{Points: append([]Point(nil), c.Points...)}
		want.quantise()
		c.pack()
		if c.Points != nil || c.Count() != len(want.Points) || !c.Used() {
			t.Fatalf("%d points packed, want %d", c.Count(), len(want.Points))
		}
		got := c.Line()
		for i, p := range got {
			if q := want.Points[i]; math.Float64bits(p.SUm) != math.Float64bits(q.SUm) || p.XUm != q.XUm || p.YUm != q.YUm ||
				p.SEUm != q.SEUm && !(math.IsNaN(p.SEUm) && math.IsNaN(q.SEUm)) {
				t.Fatalf("point %d is %v, want %v", i, p, q)
			}
		}
		// Turned round twice it is the same again.
		twice := turned(turned(c))
		if !reflect.DeepEqual(twice.packed, c.packed) || twice.Points != nil || twice.Ends != c.Ends {
			t.Fatal("turned twice a packed contour is another")
		}
	}
}
