package trace

import (
	"math"
	"slices"
	"sort"
)

const (
	// firstGateUm is how far a filament may move between frames before its own motion is known.
	firstGateUm = 1.5
	// lastGateUm bounds how far a filament may have gone while it was lost.
	lastGateUm = 3.0
	// pieceUm is how near to a filament a contour must lie to be a piece of it or to hold it, µm.
	pieceUm = 0.6
	// lookBack is over how many frames a filament's recent length and motion are judged.
	lookBack = 50
	// rivalRatio is how much farther away the second-best match must be for the best to count.
	rivalRatio = 1.25
)

// track is a filament being followed.
type track struct {
	contours []Contour // found ones, in order of frames
	steps    []float64 // mean displacement between successive frames, µm
}

func (k *track) last() *Contour { return &k.contours[len(k.contours)-1] }

// settled tells whether the track has been followed long enough to be taken for a filament.
func (k *track) settled() bool { return len(k.contours) >= 5 }

// whole is the last contour that shows the filament whole, as far as its length tells.
func (k *track) whole() *Contour {
	lengths := make([]float64, 0, lookBack)
	first := max(0, len(k.contours)-lookBack)
	for _, c := range k.contours[first:] {
		lengths = append(lengths, c.LengthUm)
	}
	usual := median(lengths)
	for i := len(k.contours) - 1; i >= first; i-- {
		if c := &k.contours[i]; math.Abs(c.LengthUm-usual) < 0.15*usual {
			return c
		}
	}
	return k.last()
}

// gate is how far the track's filament may be found after gap frames, µm.
func (k *track) gate(gap int) float64 {
	g := firstGateUm
	if len(k.steps) >= 8 {
		g = max(0.4, 5*median(k.steps[max(0, len(k.steps)-lookBack):]))
	}
	return min(g*math.Sqrt(float64(gap)), lastGateUm)
}

// Follow links the contours of successive frames into filaments, every end kept in its place, and
// gives the frames that must not be used their reason. frames[i] holds the contours of frame
// first+i. Lines that were seen too rarely to be a filament are left out.
func Follow(frames [][]Contour, first int, o Options) []Filament {
	o = o.withDefaults()
	var tracks []*track
	for i, contours := range frames {
		tracks = link(tracks, contours, first+i)
	}
	least := min(len(frames), min(max(3, len(frames)/10), 10))
	var out []Filament
	for _, k := range tracks {
		if len(k.contours) < least {
			continue
		}
		markLength(k.contours)
		used := 0
		var lengths []float64
		for _, c := range k.contours {
			lengths = append(lengths, c.LengthUm)
			if c.Used() {
				used++
			}
		}
		// A line that could never be used is a filament only if it was there most of the time.
		if median(lengths) < o.MinLengthUm || used == 0 && len(k.contours)*2 < len(frames) {
			continue
		}
		out = append(out, k.filament(frames, first, len(out)+1))
	}
	return out
}

// match is a possible continuation of a track.
type match struct {
	track, contour int
	cost           float64
	distance       float64
}

// link continues the tracks with the contours of one frame and begins new ones.
func link(tracks []*track, contours []Contour, frame int) []*track {
	var matches []match
	lines := make([][]Point, len(contours))
	for b := range contours {
		lines[b] = contours[b].Line()
	}
	for a, k := range tracks {
		before := k.whole()
		beforeLine := before.Line()
		gap := frame - before.Frame
		gate := k.gate(gap)
		for b := range contours {
			c := &contours[b]
			d := separation(beforeLine, lines[b], 2*gate)
			mismatch := math.Abs(c.LengthUm - before.LengthUm)
			if gap > 3 && mismatch > 0.15*before.LengthUm {
				continue
			}
			if d <= gate {
				matches = append(matches, match{a, b, d + 0.3*mismatch, d})
			}
		}
	}
	// A filament that has been followed goes before a line that has just turned up: a broken piece.
	sort.SliceStable(matches, func(i, j int) bool {
		a, b := tracks[matches[i].track].settled(), tracks[matches[j].track].settled()
		if a != b {
			return a
		}
		return matches[i].cost < matches[j].cost
	})
	trackDone, contourDone := make([]bool, len(tracks)), make([]bool, len(contours))
	for i, m := range matches {
		if trackDone[m.track] || contourDone[m.contour] {
			continue
		}
		trackDone[m.track], contourDone[m.contour] = true, true
		c := contours[m.contour]
		for _, rival := range matches[i+1:] {
			free := rival.track == m.track && !contourDone[rival.contour] ||
				rival.contour == m.contour && !trackDone[rival.track]
			if free && c.Reason == "" && tracks[rival.track].settled() && rival.cost < rivalRatio*m.cost {
				c.Reason = ReasonAmbiguous
			}
		}
		k := tracks[m.track]
		if backwards(k.whole().Line(), lines[m.contour]) {
			c = turned(c)
		}
		if frame-k.last().Frame == 1 {
			k.steps = append(k.steps, m.distance)
		}
		k.contours = append(k.contours, c)
	}
	for b := range contours {
		if contourDone[b] || contours[b].Reason == ReasonFit {
			continue
		}
		if onFilament(tracks, lines[b], frame) {
			if contours[b].Reason == "" {
				contours[b].Reason = ReasonCrossing
			}
			continue
		}
		c := contours[b]
		p, q := lines[b][0], lines[b][len(lines[b])-1]
		if q.XUm < p.XUm || q.XUm == p.XUm && q.YUm < p.YUm {
			c = turned(c)
		}
		tracks = append(tracks, &track{contours: []Contour{c}})
	}
	return tracks
}

// separation is the mean distance between two contours: of points of each to the nearest of the
// other, the two directions averaged. +Inf where they lie farther apart than limit everywhere.
func separation(a, b []Point, limit float64) float64 {
	if len(a) == 0 || len(b) == 0 {
		return math.Inf(1)
	}
	loA, hiA := bounds(a)
	loB, hiB := bounds(b)
	if loA.x > hiB.x+limit || loB.x > hiA.x+limit || loA.y > hiB.y+limit || loB.y > hiA.y+limit {
		return math.Inf(1)
	}
	return (toward(a, b) + toward(b, a)) / 2
}

// toward is the mean distance of the points of a to the nearest of b, µm.
func toward(a, b []Point) float64 {
	stepA, stepB := max(1, len(a)/20), max(1, len(b)/60)
	sum, n := 0.0, 0
	for i := 0; i < len(a); i += stepA {
		best := math.Inf(1)
		for j := 0; j < len(b); j += stepB {
			best = min(best, sq(a[i].XUm-b[j].XUm)+sq(a[i].YUm-b[j].YUm))
		}
		sum += math.Sqrt(best)
		n++
	}
	return sum / float64(n)
}

// onFilament tells whether a contour lies on a filament that is being followed, or that one on it: then it is a
// piece of it, or it joined to another, and no filament of its own.
func onFilament(tracks []*track, line []Point, frame int) bool {
	for _, k := range tracks {
		before := k.whole()
		if !k.settled() || frame-before.Frame > lookBack {
			continue
		}
		other := before.Line()
		near := min(max(pieceUm, k.gate(frame-before.Frame)), 2.5*pieceUm) // it may have moved since
		if separation(line, other, 2*near) < math.Inf(1) && min(toward(line, other), toward(other, line)) < near {
			return true
		}
	}
	return false
}

// backwards tells whether b fits a better from its other end.
func backwards(a, b []Point) bool {
	same, turned := 0.0, 0.0
	const stops = 16
	for i := range stops {
		p := a[i*(len(a)-1)/(stops-1)]
		k := i * (len(b) - 1) / (stops - 1)
		q, r := b[k], b[len(b)-1-k]
		same += sq(p.XUm-q.XUm) + sq(p.YUm-q.YUm)
		turned += sq(p.XUm-r.XUm) + sq(p.YUm-r.YUm)
	}
	return turned < same
}

// turned returns c from its other end.
func turned(c Contour) Contour {
	points := slices.Clone(c.Line())
	end := points[len(points)-1].SUm
	slices.Reverse(points)
	for i := range points {
		points[i].SUm = end - points[i].SUm
	}
	repack := c.packed != nil
	c.Points, c.packed = points, nil
	c.Ends[0], c.Ends[1] = c.Ends[1], c.Ends[0]
	c.EndsSEUm[0], c.EndsSEUm[1] = c.EndsSEUm[1], c.EndsSEUm[0]
	if repack {
		c.pack()
	}
	return c
}

// markLength gives contours whose length jumped away from the track's median the reason length.
func markLength(contours []Contour) {
	var lengths, errs []float64
	for _, c := range contours {
		if c.Reason == "" {
			lengths = append(lengths, c.LengthUm)
			errs = append(errs, c.LengthSEUm)
		}
	}
	if len(lengths) < 3 {
		return
	}
	m := median(lengths)
	se := median(errs)
	limit := max(5*min(max(spread(lengths), se), 1.5*se), 0.03*m)
	for i := range contours {
		if c := &contours[i]; c.Reason == "" && math.Abs(c.LengthUm-m) > limit {
			c.Reason = ReasonLength
		}
	}
}

// filament fills the frames between those in which the track was found.
func (k *track) filament(frames [][]Contour, first, id int) Filament {
	f := Filament{ID: id, First: k.contours[0].Frame, Last: k.last().Frame}
	for i, c := range k.contours {
		if i > 0 {
			before := k.contours[i-1]
			for t := before.Frame + 1; t < c.Frame; t++ {
				f.Contours = append(f.Contours, lost(before, frames[t-first], t, k.gate(t-before.Frame)))
			}
		}
		f.Contours = append(f.Contours, c)
	}
	return f
}

// lost is the entry of a frame in which the filament was not found: hidden in a tangle if there is
// one where it was last seen.
func lost(before Contour, contours []Contour, frame int, gate float64) Contour {
	nan := math.NaN()
	c := Contour{Frame: frame, Reason: ReasonMissing, LengthUm: nan, LengthSEUm: nan, EndsSEUm: [2]float64{nan, nan},
		PhotonsPerUm: nan, BackgroundPerUm2: nan, SNR: nan, WidthUm: nan, NoiseUm3: nan}
	for _, other := range contours {
		if other.Reason == ReasonCrossing && nearerThan(before.Line(), other.Line(), gate) {
			c.Reason = ReasonCrossing
		}
	}
	return c
}
