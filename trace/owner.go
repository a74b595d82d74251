package trace

import (
	"math"

	"wend/imaging"
)

// ownerMap says which candidate each pixel belongs to: the nearest within reach. What belongs to
// another line, to a bright spot or is saturated is left out of a line's fit.
type ownerMap struct {
	width, height int
	owner         []int32   // candidate + 1; 0 nobody; -1 saturated
	distance      []float32 // squared, pixels², where owner is above 0
	dirty         []int     // pixels set
}

func (m *ownerMap) assign(list []candidate, frame imaging.Frame, c Conditions) {
	n := frame.Width * frame.Height
	if len(m.owner) != n {
		m.owner, m.distance, m.dirty = make([]int32, n), make([]float32, n), nil
	}
	for _, i := range m.dirty {
		m.owner[i] = 0
	}
	m.dirty = m.dirty[:0]
	m.width, m.height = frame.Width, frame.Height
	r := reach * c.WidthPx
	for k, cand := range list {
		// Every other point suffices: they are about a pixel apart.
		for j := 0; j < len(cand.path); j += 2 {
			p := cand.path[j]
			m.each(p, r, func(i int, d2 float64) {
				if o := m.owner[i]; o == 0 || o > 0 && float32(d2) < m.distance[i] {
					if o == 0 {
						m.dirty = append(m.dirty, i)
					}
					m.owner[i], m.distance[i] = int32(k+1), float32(d2)
				}
			})
		}
	}
	if !math.IsInf(c.MaxCount, 1) && !math.IsNaN(c.MaxCount) {
		for _, i := range m.dirty {
			if float64(frame.Pix[i]) >= c.MaxCount {
				m.owner[i] = -1
			}
		}
	}
}

func (m *ownerMap) each(p xy, r float64, do func(i int, d2 float64)) {
	x0, x1 := max(0, int(math.Ceil(p.x-r))), min(m.width-1, int(math.Floor(p.x+r)))
	y0, y1 := max(0, int(math.Ceil(p.y-r))), min(m.height-1, int(math.Floor(p.y+r)))
	for y := y0; y <= y1; y++ {
		for x := x0; x <= x1; x++ {
			if d2 := sq(float64(x)-p.x) + sq(float64(y)-p.y); d2 <= r*r {
				do(y*m.width+x, d2)
			}
		}
	}
}

// foreign tells whether a pixel must be left out of the fit of candidate k.
func (m *ownerMap) foreign(pixel, k int) bool {
	o := m.owner[pixel]
	return o != 0 && o != int32(k+1)
}

// saturated is the share of the pixels within one line width of the points that are saturated.
func (m *ownerMap) saturated(points []xy, c Conditions) float64 {
	all, bad := 0, 0
	for _, p := range points {
		m.each(p, c.WidthPx, func(i int, _ float64) {
			all++
			if m.owner[i] == -1 {
				bad++
			}
		})
	}
	if all == 0 {
		return 0
	}
	return float64(bad) / float64(all)
}
