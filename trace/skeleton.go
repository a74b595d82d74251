package trace

// thin reduces each set of pixels in mask (row-major, width wide) to lines one pixel wide, by the
// two-step removal of Zhang & Suen, Commun. ACM 27:236 (1984), with the least count of three neighbours of
// Lü & Wang, Commun. ACM 29:239 (1986) (both cited from memory): with two, a diagonal two pixels wide is
// eaten up from its ends. list holds the
// set pixels; the ones that stay are returned. Pixels on the image's border must not be set.
func thin(mask []bool, width int, list []int) []int {
	neighbours := [8]int{-width, -width + 1, 1, width + 1, width, width - 1, -1, -width - 1}
	var remove []int
	for {
		removed := false
		for half := 0; half < 2; half++ {
			remove = remove[:0]
			for _, i := range list {
				var p [8]bool
				count, rises := 0, 0
				for k, d := range neighbours {
					p[k] = mask[i+d]
					if p[k] {
						count++
					}
				}
				for k := range p {
					if !p[k] && p[(k+1)%8] {
						rises++
					}
				}
				if count < 3 || count > 6 || rises != 1 {
					continue
				}
				n, e, s, w := p[0], p[2], p[4], p[6]
				if half == 0 && (n && e && s || e && s && w) || half == 1 && (n && e && w || n && s && w) {
					continue
				}
				remove = append(remove, i)
			}
			for _, i := range remove {
				mask[i] = false
				removed = true
			}
			kept := list[:0]
			for _, i := range list {
				if mask[i] {
					kept = append(kept, i)
				}
			}
			list = kept
		}
		if !removed {
			return list
		}
	}
}

// walker finds paths through thinned pixels. order and from hold, per image pixel, the search
// number and the pixel it was reached from; they are reused between searches.
type walker struct {
	width  int
	seen   []int32
	from   []int32
	search int32
	queue  []int32
}

func (w *walker) begin(width, pixels int) {
	w.width = width
	if len(w.seen) != pixels {
		w.seen, w.from, w.search = make([]int32, pixels), make([]int32, pixels), 0
	}
}

// farthest returns the pixel of mask that is the most steps away from start, with the way to
// it recorded, and how many pixels it met. A diagonal costs no more than a side step, and side steps are tried first.
func (w *walker) farthest(mask []bool, start int) (last, met int) {
	w.search++
	w.queue = append(w.queue[:0], int32(start))
	w.seen[start], w.from[start] = w.search, -1
	steps := [8]int{-w.width, 1, w.width, -1, -w.width + 1, w.width + 1, w.width - 1, -w.width - 1}
	for head := 0; head < len(w.queue); head++ {
		i := int(w.queue[head])
		for _, d := range steps {
			if k := i + d; mask[k] && w.seen[k] != w.search {
				w.seen[k], w.from[k] = w.search, int32(i)
				w.queue = append(w.queue, int32(k))
			}
		}
	}
	return int(w.queue[len(w.queue)-1]), len(w.queue)
}

// longest returns the longest of the shortest paths through the connected pixels of mask around start.
func (w *walker) longest(mask []bool, start int) []int {
	a, _ := w.farthest(mask, start)
	b, _ := w.farthest(mask, a)
	var path []int
	for i := int32(b); i >= 0; i = w.from[i] {
		path = append(path, int(i))
	}
	return path
}
