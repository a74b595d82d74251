package trace

import (
	"math"

	"wend/imaging/ridge"
)

const (
	// The mean strength that carries a line on beyond where the map falls below its threshold is
	// growShare of what is usual along the line, but at least growLeast and at most growMost, which
	// noise does not reach for long. What is grown too far, the light along the path takes away again.
	growShare, growLeast, growMost = 0.5, 2.0, 3.5
	// growSteps is how many steps of a pixel a line may grow at an end.
	growSteps = 24
	// growWindow is over how many steps the strength is averaged.
	growWindow = 5
)

// grow makes each candidate go on from both ends along the crest of the map, while there is a faint one
// and no other candidate is near.
func grow(list []candidate, m *ridge.Map, scale float64) {
	for i := range list {
		if list[i].tangled || list[i].spot {
			continue
		}
		for range 2 {
			p := list[i].path
			// A piece that grows to twice its own length was noise or a spot to begin with.
			list[i].path = reversed(append(p, walkOn(list, i, m, scale)...))
		}
	}
}

// walkOn returns the pixels that continue candidate i beyond its last point.
func walkOn(list []candidate, i int, m *ridge.Map, scale float64) []xy {
	path := list[i].path
	back := min(len(path)-1, int(math.Ceil(4*scale)))
	at := path[len(path)-1]
	heading := math.Atan2(at.y-path[len(path)-1-back].y, at.x-path[len(path)-1-back].x)
	var along []float64
	for _, p := range path {
		along = append(along, strengthAt(m, p))
	}
	least := min(max(growLeast, growShare*median(along)), growMost)
	var out []xy
	var strengths []float64
	for range min(growSteps, len(path)/2) {
		best, turn := -1.0, 0.0
		// Look two pixels ahead, up to 45° aside, straight on first among equals.
		for _, d := range [5]float64{0, -0.4, 0.4, -0.8, 0.8} {
			sin, cos := math.Sincos(heading + d)
			s := (strengthAt(m, at.plus(xy{cos, sin})) + strengthAt(m, at.plus(xy{2 * cos, 2 * sin}))) / 2
			if s > best {
				best, turn = s, d
			}
		}
		heading += turn / 2
		sin, cos := math.Sincos(heading)
		at = at.plus(xy{cos, sin})
		strengths = append(strengths, best)
		recent := strengths[max(0, len(strengths)-growWindow):]
		mean := 0.0
		for _, s := range recent {
			mean += s / float64(len(recent))
		}
		if mean < least || taken(list, i, at, 3*scale) {
			break
		}
		out = append(out, at)
	}
	return out
}

// strengthAt is the map's strength at p, linear between pixels, and 0 outside.
func strengthAt(m *ridge.Map, p xy) float64 {
	x, y := int(math.Floor(p.x)), int(math.Floor(p.y))
	if x < 0 || y < 0 || x+1 >= m.Width || y+1 >= m.Height {
		return 0
	}
	u, v := p.x-float64(x), p.y-float64(y)
	row, next := m.Strength[y*m.Width+x:], m.Strength[(y+1)*m.Width+x:]
	return (1-v)*((1-u)*float64(row[0])+u*float64(row[1])) + v*((1-u)*float64(next[0])+u*float64(next[1]))
}

// taken tells whether a candidate other than i has a point within limit of p.
func taken(list []candidate, i int, p xy, limit float64) bool {
	for k := range list {
		if k == i {
			continue
		}
		for _, q := range list[k].path {
			if sq(p.x-q.x)+sq(p.y-q.y) < limit*limit {
				return true
			}
		}
	}
	return false
}
