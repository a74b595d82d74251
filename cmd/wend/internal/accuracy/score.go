package main

import (
	"fmt"
	"io"
	"math"
	"slices"

	"wend/cmd/wend/internal/job"
	"wend/trace"
)

type point struct{ x, y float64 }

// place is a filament (from 0) in a frame.
type place struct{ filament, frame int }

// truth is what is true of a movie.
type truth struct {
	contours map[place][]point
	lpUm     []float64
}

// score collects how a case went.
type score struct {
	name                   string
	frames                 int // of one movie
	filaments, falseOnes   int
	possible, used         int // filament-frames
	squares                float64
	points                 int
	predicted              []float64 // median standard error of a filament's points, nm
	length                 []float64 // measured over true contour length, minus 1
	logRatio, logSE        []float64
	held, bounds, refusals int
	byMethod               map[string][]float64
	lines                  []string
}

func (s *score) add(o *score) {
	s.filaments += o.filaments
	s.falseOnes += o.falseOnes
	s.possible += o.possible
	s.used += o.used
	s.squares += o.squares
	s.points += o.points
	s.predicted = append(s.predicted, o.predicted...)
	s.length = append(s.length, o.length...)
	s.logRatio = append(s.logRatio, o.logRatio...)
	s.logSE = append(s.logSE, o.logSE...)
	s.held += o.held
	s.bounds += o.bounds
	s.refusals += o.refusals
	if s.byMethod == nil {
		s.byMethod = make(map[string][]float64)
	}
	for m, v := range o.byMethod {
		s.byMethod[m] = append(s.byMethod[m], v...)
	}
	s.lines = append(s.lines, o.lines...)
}

// compare adds a result. A measured filament is the true one that its contours lie nearest to; one that
// lies on none within half a µm, or on one that is taken, is false.
func (s *score) compare(r *job.Result, t truth) {
	s.filaments = len(t.lpUm)
	s.possible = s.filaments * s.frames
	s.byMethod = make(map[string][]float64)
	taken := make(map[int]bool)
	for i := range r.Filaments {
		f := &r.Filaments[i]
		id := nearestFilament(f, t)
		if id < 0 || taken[id] {
			s.falseOnes++
			s.lines = append(s.lines, fmt.Sprintf("    %2d false: frames %d to %d, %d used, %.1f µm, on filament %d", f.ID, f.First, f.Last, f.FramesUsed, f.LengthUm, id+1))
			continue
		}
		taken[id] = true
		s.used += f.FramesUsed
		squares, points := 0.0, 0
		for _, c := range f.Contours {
			if !c.Used() {
				continue
			}
			line := t.contours[place{id, c.Frame}]
			for _, p := range c.Line() {
				squares += square(distance(point{p.XUm, p.YUm}, line))
				points++
			}
			s.length = append(s.length, c.LengthUm/lengthOf(line)-1)
		}
		s.squares += squares
		s.points += points
		s.predicted = append(s.predicted, 1000*f.LocalisationUm)
		s.stiffness(f, t.lpUm[id])
		s.lines = append(s.lines, fmt.Sprintf("    %2d frames %3d/%3d rms %5.1f nm (predicted %4.1f)  Lp %6.2f true %6.2f [%6.2f, %6.2f] %s %v",
			f.ID, f.FramesUsed, s.frames, 1000*math.Sqrt(squares/float64(points)), 1000*f.LocalisationUm,
			f.LpUm, t.lpUm[id], f.LpLowUm, f.LpHighUm, f.LpFrom, f.Flags))
	}
}

func (s *score) stiffness(f *job.Filament, lpUm float64) {
	if f.LpLowUm <= lpUm && lpUm <= f.LpHighUm {
		s.held++
	}
	switch {
	case f.LpFrom == "bound":
		s.bounds++
	case math.IsNaN(f.LpUm):
		s.refusals++
	default:
		s.logRatio = append(s.logRatio, math.Log(f.LpUm/lpUm))
		s.logSE = append(s.logSE, math.Log(f.LpHighUm/f.LpLowUm)/(2*1.96))
	}
	for _, e := range f.Estimates {
		if e.Quantity == "lp_um" && e.Method != "likelihood" && e.Value > 0 {
			s.byMethod[e.Method] = append(s.byMethod[e.Method], math.Log(e.Value/lpUm))
		}
	}
}

func nearestFilament(f *job.Filament, t truth) int {
	votes := make([]int, len(t.lpUm))
	for _, c := range f.Contours {
		if !c.Used() {
			continue
		}
		best, at := 0.5, -1
		for id := range votes {
			if d := meanDistance(c, t.contours[place{id, c.Frame}]); d < best {
				best, at = d, id
			}
		}
		if at >= 0 {
			votes[at]++
		}
	}
	best := -1
	for id, v := range votes {
		if v > 0 && (best < 0 || v > votes[best]) {
			best = id
		}
	}
	return best
}

func meanDistance(c trace.Contour, line []point) float64 {
	sum, n := 0.0, 0
	points := c.Line()
	for i := 0; i < len(points); i += 5 {
		sum += distance(point{points[i].XUm, points[i].YUm}, line)
		n++
	}
	return sum / float64(n)
}

// distance is from p to the nearest place on the line.
func distance(p point, line []point) float64 {
	best := math.Inf(1)
	for i := 0; i+1 < len(line); i++ {
		a, b := line[i], line[i+1]
		dx, dy := b.x-a.x, b.y-a.y
		u := 0.0
		if l := dx*dx + dy*dy; l > 0 {
			u = min(max(((p.x-a.x)*dx+(p.y-a.y)*dy)/l, 0), 1)
		}
		best = min(best, math.Hypot(p.x-a.x-u*dx, p.y-a.y-u*dy))
	}
	return best
}

func lengthOf(line []point) float64 {
	l := 0.0
	for i := 1; i < len(line); i++ {
		l += math.Hypot(line[i].x-line[i-1].x, line[i].y-line[i-1].y)
	}
	return l
}

func square(x float64) float64 { return x * x }

const header = `traced: filament-frames used; false: filaments that are none; rms: distance of contour points from the true
centreline, and the median standard error predicted; length: mean error; ln Lp: mean of ln(measured/true) ± its
standard error, and the scatter over filaments against the mean one predicted; held: 95 % intervals with the truth.

case                  filaments  traced  false  rms nm  predicted  length   ln Lp            scatter  predicted  held    bounds  refused  |  modes   tangent  distance
`

func (s *score) print(w, details io.Writer) {
	mean, sd := moments(s.logRatio)
	length, _ := moments(s.length)
	se, _ := moments(s.logSE)
	methods := ""
	for _, m := range []string{"modes", "tangent", "distance"} {
		v, _ := moments(s.byMethod[m])
		methods += fmt.Sprintf("  %+6.3f", v)
	}
	measured := len(s.logRatio) + s.bounds
	fmt.Fprintf(w, "%-20s  %9d  %5.1f%%  %5d  %6.1f  %9.1f  %+5.2f%%  %+.3f ± %.3f  %7.3f  %9.3f  %3d/%-3d  %6d  %7d  |%s\n", s.name,
		s.filaments, 100*float64(s.used)/float64(s.possible), s.falseOnes, 1000*math.Sqrt(s.squares/float64(s.points)), middle(s.predicted),
		100*length, mean, sd/math.Sqrt(float64(len(s.logRatio))), sd, se, s.held, measured, s.bounds, s.refusals, methods)
	if details != nil {
		for _, l := range s.lines {
			fmt.Fprintln(details, l)
		}
	}
}

// moments are the mean and the standard deviation of v.
func moments(v []float64) (mean, sd float64) {
	for _, x := range v {
		mean += x / float64(len(v))
	}
	for _, x := range v {
		sd += square(x - mean)
	}
	return mean, math.Sqrt(sd / float64(len(v)-1))
}

func middle(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	s := slices.Clone(v)
	slices.Sort(s)
	return s[len(s)/2]
}
