package trace

import "math"

// packedPoint is a point as the tables print it: position in units of 10⁻⁵ µm, step along the line from the
// point before in 10⁻⁴ µm, standard error in 0.01 nm. The points of a long movie are most of its memory.
type packedPoint struct {
	x, y int32
	step uint16
	se   uint16 // seUnknown for NaN; larger errors are kept as the largest
}

const (
	seUnknown = math.MaxUint16
	seLargest = seUnknown - 1
)

// pack keeps the contour's points rounded to what the tables print, in little memory. [Contour.Line] gives
// them back; Points is nil afterwards.
func (c *Contour) pack() {
	if len(c.Points) == 0 {
		return
	}
	c.packed = make([]packedPoint, len(c.Points))
	last := 0.0
	for i, p := range c.Points {
		q := packedPoint{x: int32(math.Round(p.XUm * pow10[DecimalsPositionUm])), y: int32(math.Round(p.YUm * pow10[DecimalsPositionUm])), se: seUnknown}
		s := math.Round(p.SUm * pow10[DecimalsArcUm])
		q.step = uint16(min(max(s-last, 0), math.MaxUint16))
		last += float64(q.step)
		if !math.IsNaN(p.SEUm) {
			q.se = uint16(min(math.Round(p.SEUm*1000*pow10[DecimalsErrorNm]), seLargest))
		}
		c.packed[i] = q
	}
	c.Points = nil
}

// Count is the number of points of the contour.
func (c Contour) Count() int { return max(len(c.Points), len(c.packed)) }

// Line returns the points of the contour, from s = 0: Points, or what was made of them to save memory.
func (c Contour) Line() []Point {
	if c.packed == nil {
		return c.Points
	}
	out := make([]Point, len(c.packed))
	s := 0.0
	for i, q := range c.packed {
		s += float64(q.step)
		out[i] = Point{SUm: s / pow10[DecimalsArcUm], XUm: float64(q.x) / pow10[DecimalsPositionUm], YUm: float64(q.y) / pow10[DecimalsPositionUm], SEUm: math.NaN()}
		if q.se != seUnknown {
			out[i].SEUm = float64(q.se) / pow10[DecimalsErrorNm] / 1000
		}
	}
	return out
}
