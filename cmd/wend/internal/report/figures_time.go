package report

import (
	"fmt"
	"html/template"
	"image/color"
	"math"

	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wend/cmd/wend/internal/job"
	"wend/trace"
)

const (
	maxUsedShown   = 250
	maxUnusedShown = 80
	shapesShown    = 10
)

// lengthFigure shows the traced length over time, and says how many of the frames of each kind it shows.
func lengthFigure(r *job.Result, f *job.Filament) (svg template.HTML, note string, err error) {
	var used, unused, lost []trace.Contour
	low, high := math.Inf(1), math.Inf(-1)
	for _, c := range f.Contours {
		switch {
		case !finite(c.LengthUm) || c.Count() == 0:
			lost = append(lost, c)
			continue
		case c.Used():
			used = append(used, c)
		default:
			unused = append(unused, c)
		}
		low, high = math.Min(low, c.LengthUm), math.Max(high, c.LengthUm)
	}
	if len(used)+len(unused) == 0 {
		return "", "", errNothing
	}
	if len(used) > maxUsedShown || len(unused) > maxUnusedShown || len(lost) > maxUnusedShown {
		note = fmt.Sprintf("Of %d used and %d unused frames at most %d and twice %d are shown, evenly chosen.",
			len(used), len(unused)+len(lost), maxUsedShown, maxUnusedShown)
	}
	used, unused, lost = thin(used, maxUsedShown), thin(unused, maxUnusedShown), thin(lost, maxUnusedShown)
	pad := math.Max(0.15*(high-low), 0.02*high)
	low, high = math.Max(0, low-1.6*pad), high+1.6*pad
	at := func(cs []trace.Contour, y func(c trace.Contour) float64) plotter.XYs {
		return points(false, false, len(cs), func(i int) (float64, float64) { return timeOf(r, cs[i].Frame), y(cs[i]) })
	}
	length := func(c trace.Contour) float64 { return c.LengthUm }
	p := newPlot("time (s)", "contour length (µm)")
	p.X.Tick.Marker, p.Y.Tick.Marker = steps{9}, steps{4}
	first, last := timeOf(r, f.First), timeOf(r, f.Last)
	if !finite(first) || !finite(last) || !(last > first) {
		first, last = 0, math.Max(1, last)
	}
	if positive(f.LengthUm) {
		addLine(p, plotter.XYs{{X: first, Y: f.LengthUm}, {X: last, Y: f.LengthUm}}, petrol, 1.2, nil, "median of used frames")
	}
	addPoints(p, at(used, length), draw.CircleGlyph{}, ink, 1.7, "used")
	addPoints(p, at(unused, length), draw.CrossGlyph{}, rust, 2.6, "traced, not used")
	addPoints(p, at(lost, func(trace.Contour) float64 { return low + 0.05*(high-low) }), draw.PlusGlyph{}, soft, 2.6, "not found")
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = first, last, low, high
	margin := 0.012 * (last - first)
	p.X.Min, p.X.Max = first-margin, last+margin
	p.Legend.Top, p.Legend.XOffs = true, vg.Points(-2)
	p.Y.Max = high + 0.55*(high-low) // room for the legend
	svg, err = render(p, wideWidth, wideHeight, fmt.Sprintf("Filament %d: contour length over time, used and unused frames marked", f.ID))
	return svg, note, err
}

func timeOf(r *job.Result, frame int) float64 {
	if frame < 0 || frame >= len(r.TimesS) {
		return math.NaN()
	}
	return r.TimesS[frame]
}

// shapesFigure lays some used contours, evenly chosen in time, along their own direction over each other.
func shapesFigure(f *job.Filament) (template.HTML, error) {
	var used []trace.Contour
	for _, c := range f.Contours {
		if c.Used() {
			used = append(used, c)
		}
	}
	if len(used) == 0 {
		return "", errNothing
	}
	used = thin(used, shapesShown)
	p := newPlot("along the filament (µm)", "across (µm), scale stretched")
	p.X.Tick.Marker, p.Y.Tick.Marker = steps{6}, steps{5}
	widest, left, right := 0.0, math.Inf(1), math.Inf(-1)
	for i, c := range used {
		along, across := lay(c.Line())
		xys := points(false, false, len(along), func(k int) (float64, float64) { return along[k], across[k] })
		xys = thin(xys, 60)
		for _, q := range xys {
			widest = math.Max(widest, math.Abs(q.Y))
			left, right = math.Min(left, q.X), math.Max(right, q.X)
		}
		addLine(p, xys, shade(float64(i)/math.Max(1, float64(len(used)-1))), 0.9, nil, "")
	}
	if !(right > left) {
		return "", errNothing
	}
	widest = 1.15 * math.Max(widest, 0.01)
	margin := 0.03 * (right - left)
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = left-margin, right+margin, -widest, widest
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: %d of its shapes laid over each other", f.ID, len(used)))
}

// shade goes from light (early) to dark (late).
func shade(u float64) color.Color {
	mix := func(a, b uint8) uint8 { return uint8(math.Round(float64(a) + (float64(b)-float64(a))*u)) }
	return color.NRGBA{mix(0x9d, 0x10), mix(0xc3, 0x2c), mix(0xd0, 0x3a), 0xff}
}

// lay gives points in the frame of their principal axis, the mean at the origin, s = 0 at the left.
func lay(pts []trace.Point) (along, across []float64) {
	n := float64(len(pts))
	var mx, my, xx, xy, yy float64
	for _, p := range pts {
		mx += p.XUm / n
		my += p.YUm / n
	}
	for _, p := range pts {
		dx, dy := p.XUm-mx, p.YUm-my
		xx, xy, yy = xx+dx*dx, xy+dx*dy, yy+dy*dy
	}
	angle := 0.5 * math.Atan2(2*xy, xx-yy)
	cos, sin := math.Cos(angle), math.Sin(angle)
	first, last := pts[0], pts[len(pts)-1]
	if (last.XUm-first.XUm)*cos+(last.YUm-first.YUm)*sin < 0 {
		cos, sin = -cos, -sin
	}
	for _, p := range pts {
		dx, dy := p.XUm-mx, p.YUm-my
		along, across = append(along, dx*cos+dy*sin), append(across, dx*sin-dy*cos)
	}
	return along, across
}
