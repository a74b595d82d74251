package trace

import (
	"math"
	"sort"

	"wend/imaging/ridge"
)

// candidate is a line found in a ridge map, before it is fitted.
type candidate struct {
	path    []xy
	tangled bool // its pixels branch, cross or close on themselves
	spot    bool // too short to be a filament
}

// detector turns a ridge map into candidates. It keeps its memory; not for concurrent use.
type detector struct {
	walker
	mask, near []bool
	stack      []int
}

// find returns the candidates of a ridge map, in the order of their first pixel. scale is the line
// width and gap the longest gap to bridge, both in pixels.
func (d *detector) find(m *ridge.Map, low, high, scale, gap, minLength float64) []candidate {
	w, h := m.Width, m.Height
	d.begin(w, w*h)
	if len(d.mask) != w*h {
		d.mask, d.near = make([]bool, w*h), make([]bool, w*h)
	}
	for y := 1; y < h-1; y++ {
		row := m.Strength[y*w : (y+1)*w]
		for x := 1; x < w-1; x++ {
			d.mask[y*w+x] = float64(row[x]) > low
		}
	}
	var out []candidate
	for i := range d.mask {
		if !d.mask[i] || d.near[i] {
			continue
		}
		if c, ok := d.component(m, i, high, scale); ok {
			out = append(out, c)
		}
	}
	clear(d.mask)
	clear(d.near)
	out = bridge(out, m, gap, scale)
	for i := range out {
		if arcLengths(out[i].path)[len(out[i].path)-1] < minLength {
			out[i].spot = true
		}
	}
	grow(out, m, scale)
	return out
}

// component collects the connected pixels around start, marks them in near, thins them and takes
// the longest path. It is ok if strong and long enough to be worth a look.
func (d *detector) component(m *ridge.Map, start int, high, scale float64) (candidate, bool) {
	w := d.width
	peak := float32(0)
	d.stack = append(d.stack[:0], start)
	d.near[start] = true
	var list []int
	for len(d.stack) > 0 {
		i := d.stack[len(d.stack)-1]
		d.stack = d.stack[:len(d.stack)-1]
		list = append(list, i)
		peak = max(peak, m.Strength[i])
		for _, k := range [8]int{i - w - 1, i - w, i - w + 1, i - 1, i + 1, i + w - 1, i + w, i + w + 1} {
			if d.mask[k] && !d.near[k] {
				d.near[k] = true
				d.stack = append(d.stack, k)
			}
		}
	}
	if float64(peak) < high || float64(len(list)) < 4*scale {
		for _, i := range list {
			d.mask[i] = false
		}
		return candidate{}, false
	}
	list = d.crest(m, list)
	list = thin(d.mask, w, list)
	if len(list) == 0 { // a blob of four pixels thins to nothing
		return candidate{}, false
	}
	pixels := d.longest(d.mask, list[0])
	c := candidate{tangled: d.leftover(list, pixels, scale)}
	for _, i := range list {
		d.mask[i] = false
	}
	c.path = make([]xy, len(pixels))
	for k, i := range pixels {
		c.path[k] = centred(m, i)
	}
	c.path = smooth(c.path, 1.2*scale)
	return c, true
}

// crest keeps, of a component, the pixels connected to the strongest one through pixels of at least a
// tenth of the strength that is usual in it: around a bright line the map is above the noise far out,
// where its directions mean nothing. The others leave the mask. The result is in ascending order.
func (d *detector) crest(m *ridge.Map, list []int) []int {
	strength := make([]float64, len(list))
	strongest := list[0]
	for k, i := range list {
		strength[k] = float64(m.Strength[i])
		if m.Strength[i] > m.Strength[strongest] {
			strongest = i
		}
	}
	usual := quantile(strength, 0.8)
	for _, i := range list {
		d.mask[i] = float64(m.Strength[i]) >= usual/10
	}
	d.farthest(d.mask, strongest)
	kept := list[:0]
	for _, i := range list {
		if d.mask[i] && d.seen[i] == d.search {
			kept = append(kept, i)
		} else {
			d.mask[i] = false
		}
	}
	sort.Ints(kept)
	return kept
}

// centred is the place of the ridge's crest near pixel i.
func centred(m *ridge.Map, i int) xy {
	p := xy{float64(i % m.Width), float64(i / m.Width)}
	if t := float64(m.Offset[i]); math.Abs(t) <= 1 {
		sin, cos := math.Sincos(float64(m.Theta[i]))
		p = p.plus(xy{cos, sin}.times(t))
	}
	return p
}

// leftover tells whether thinned pixels away from the path are more than a short spur.
func (d *detector) leftover(list, path []int, scale float64) bool {
	w := d.width
	r := int(math.Ceil(2.5 * scale))
	left := 0
	for _, i := range list {
		x, y := i%w, i/w
		close := false
		// The nearest path pixel is looked for in full: lists are a few hundred pixels long.
		for _, k := range path {
			dx, dy := k%w-x, k/w-y
			if dx*dx+dy*dy <= r*r {
				close = true
				break
			}
		}
		if !close {
			left++
		}
	}
	if float64(left) > 3*scale {
		return true
	}
	// A loop that closes leaves nothing over, but its path turns back to its own beginning.
	a, b := path[0], path[len(path)-1]
	dx, dy := a%w-b%w, a/w-b/w
	return len(path) > 6*r && dx*dx+dy*dy <= r*r
}

// bridge joins candidates across dark gaps: ends that face one another, nearest first.
func bridge(list []candidate, m *ridge.Map, gap, scale float64) []candidate {
	type link struct {
		a, b       int // candidate*2 + end
		separation float64
	}
	outward := func(c candidate, end int) (at, direction xy) {
		p := c.path
		back := min(len(p)-1, int(math.Ceil(6*scale)))
		if end == 0 {
			return p[0], p[0].minus(p[back]).unit()
		}
		return p[len(p)-1], p[len(p)-1].minus(p[len(p)-1-back]).unit()
	}
	var links []link
	for a := 0; a < 2*len(list); a++ {
		pa, ta := outward(list[a/2], a%2)
		for b := a + 1; b < 2*len(list); b++ {
			if a/2 == b/2 {
				continue
			}
			pb, tb := outward(list[b/2], b%2)
			v := pb.minus(pa)
			l := v.length()
			if l > gap || l == 0 {
				continue
			}
			const facing = 0.82 // cosine of 35°
			if v.dot(ta)/l < facing || -v.dot(tb)/l < facing || -ta.dot(tb) < facing {
				continue
			}
			if !lit(m, pa, pb) {
				continue
			}
			links = append(links, link{a, b, l})
		}
	}
	sort.SliceStable(links, func(i, j int) bool { return links[i].separation < links[j].separation })
	partner := make([]int, 2*len(list))
	for i := range partner {
		partner[i] = -1
	}
	for _, l := range links {
		if partner[l.a] < 0 && partner[l.b] < 0 {
			partner[l.a], partner[l.b] = l.b, l.a
		}
	}
	done := make([]bool, len(list))
	var out []candidate
	for i := range list {
		if done[i] {
			continue
		}
		// Go to one end of the chain, then collect it from there.
		at, steps := 2*i, 0
		for partner[at] >= 0 && steps <= len(list) {
			at = partner[at] ^ 1
			steps++
		}
		var c candidate
		for !done[at/2] {
			done[at/2] = true
			p := list[at/2].path
			if at%2 == 1 {
				p = reversed(p)
			}
			c.path = append(c.path, p...)
			c.tangled = c.tangled || list[at/2].tangled
			if next := partner[at^1]; next >= 0 {
				at = next
			}
		}
		out = append(out, c)
	}
	return out
}

// lit tells whether the ridge map between two places speaks for a line rather than for nothing.
func lit(m *ridge.Map, a, b xy) bool {
	n := max(2, int(a.distance(b)))
	sum, count := 0.0, 0
	for i := 1; i < n; i++ {
		p := a.plus(b.minus(a).times(float64(i) / float64(n)))
		if min(p.distance(a), p.distance(b)) < 2 { // the ends' own light
			continue
		}
		x, y := int(math.Round(p.x)), int(math.Round(p.y))
		best := float32(0)
		for dy := -1; dy <= 1; dy++ {
			for dx := -1; dx <= 1; dx++ {
				if x+dx >= 0 && y+dy >= 0 && x+dx < m.Width && y+dy < m.Height {
					best = max(best, m.Strength[(y+dy)*m.Width+x+dx])
				}
			}
		}
		sum += float64(best)
		count++
	}
	return count == 0 || sum/float64(count) >= 1
}
