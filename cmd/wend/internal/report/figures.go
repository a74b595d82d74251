package report

import (
	"fmt"
	"html/template"
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wend/cmd/wend/internal/job"
	"wend/modes"
)

// errNothing says that there is nothing to draw.
var errNothing = fmt.Errorf("report: no points to draw")

// theoryVariance is the variance (µm) of a cosine mode of wavelength λ (µm) in equilibrium, 1/(q²·Lp), q = 2π/λ.
func theoryVariance(wavelengthUm, lpUm float64) float64 {
	q := 2 * math.Pi / wavelengthUm
	return 1 / (q * q * lpUm)
}

// modeFigure shows the variance of each mode with theory and noise.
func modeFigure(f *job.Filament) (template.HTML, error) {
	n := len(f.Modes)
	raw := points(true, true, n, func(i int) (float64, float64) { return float64(f.Modes[i].Mode), f.Modes[i].Variance })
	if len(raw) == 0 {
		return "", errNothing
	}
	p := newPlot("mode number n", "variance of mode amplitude (µm)")
	p.Y.Tick.Marker = decades{}
	low, high := math.Inf(1), math.Inf(-1)
	include := func(v float64) {
		if positive(v) {
			low, high = math.Min(low, v), math.Max(high, v)
		}
	}
	last := 1
	for _, m := range f.Modes {
		include(m.Variance)
		include(m.NoiseVariance)
		include(m.ThermalVariance)
		last = max(last, m.Mode)
	}
	low, high = low/1.8, high*8 // room for the legend
	var ticks []plot.Tick
	for m := 1; m <= last; m++ {
		label := ""
		if m <= 5 || m == 7 || m%10 == 0 {
			label = fmt.Sprint(m)
		}
		ticks = append(ticks, plot.Tick{Value: math.Log10(float64(m)), Label: label})
	}
	p.X.Tick.Marker = plot.ConstantTicks(ticks)
	p.X.Min, p.X.Max = math.Log10(0.85), math.Log10(float64(last)*1.15)

	clip := func(v float64) float64 { return math.Max(low, math.Min(high, v)) }
	line := func(lp float64) plotter.XYs {
		return points(true, true, n, func(i int) (float64, float64) {
			return float64(f.Modes[i].Mode), clip(theoryVariance(f.Modes[i].WavelengthUm, lp))
		})
	}
	if positive(f.LpLowUm) && positive(f.LpHighUm) {
		up, down := line(f.LpLowUm), line(f.LpHighUm)
		ring := append(plotter.XYs{}, up...)
		for i := len(down) - 1; i >= 0; i-- {
			ring = append(ring, down[i])
		}
		if len(ring) > 3 {
			p.Add(&plotter.Polygon{XYs: []plotter.XYs{ring}, Color: band})
		}
	}
	if positive(f.LpUm) {
		addLine(p, line(f.LpUm), petrol, 1.4, nil, "theory at the Lp given")
	} else if positive(f.LpLowUm) {
		addLine(p, line(f.LpLowUm), petrol, 1.4, dashed, "theory at the lower bound")
	}
	addLine(p, points(true, true, n, func(i int) (float64, float64) { return float64(f.Modes[i].Mode), f.Modes[i].NoiseVariance }), soft, 1.2, dotted, "noise floor")
	addPoints(p, raw, draw.CrossGlyph{}, soft, 2, "as measured")
	for _, used := range []bool{false, true} {
		var xys plotter.XYs
		var lo, hi []float64
		for _, m := range f.Modes {
			if m.Used != used || !positive(m.ThermalVariance) || m.Mode < 1 {
				continue
			}
			xys = append(xys, plotter.XY{X: math.Log10(float64(m.Mode)), Y: math.Log10(clip(m.ThermalVariance))})
			l, h := low, clip(m.ThermalVariance)
			if positive(m.LpHighUm) {
				l = clip(theoryVariance(m.WavelengthUm, m.LpHighUm))
			}
			if positive(m.LpLowUm) {
				h = clip(theoryVariance(m.WavelengthUm, m.LpLowUm))
			}
			lo, hi = append(lo, math.Log10(l)), append(hi, math.Log10(h))
		}
		if used {
			addBars(p, xys, lo, hi, ink)
			addPoints(p, xys, draw.CircleGlyph{}, ink, 2.6, "corrected, used")
		} else {
			addPoints(p, xys, draw.RingGlyph{}, ink, 2.6, "corrected, not used")
		}
	}
	p.Y.Min, p.Y.Max = math.Log10(low), math.Log10(high)
	p.Legend.Top = true
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: variance of the tangent-angle modes against the mode number, with theory and noise floor", f.ID))
}

// tangentFigure shows the tangent correlation with its fit.
func tangentFigure(f *job.Filament) (template.HTML, error) {
	shown := thin(f.Tangent, 50)
	low, high, far := 1.0, 1.0, 0.0
	for _, s := range shown {
		for _, v := range []float64{s.CosMean, s.CosLow} {
			if finite(v) {
				low = math.Min(low, v)
			}
		}
		if finite(s.SeparationUm) {
			far = math.Max(far, s.SeparationUm)
		}
	}
	if !(far > 0) || !(low < 1) {
		return "", errNothing
	}
	low = math.Max(low, -1)
	pad := 0.06 * (high - low)
	low, high = low-pad, high+pad
	p := newPlot("separation along the filament (µm)", "mean cos of the angle between tangents")
	p.X.Tick.Marker, p.Y.Tick.Marker = steps{6}, steps{5}
	if lp := f.TangentFitLpUm; positive(lp) && finite(f.TangentFitIntercept) {
		var xys plotter.XYs
		for i := 0; i <= 60; i++ {
			s := far * float64(i) / 60
			if y := math.Exp(-s/(2*lp) - f.TangentFitIntercept); y >= low && y <= high {
				xys = append(xys, plotter.XY{X: s, Y: y})
			}
		}
		addLine(p, xys, petrol, 1.4, nil, fmt.Sprintf("fit, Lp = %s µm", digits(lp, 3)))
	}
	for _, used := range []bool{false, true} {
		var xys plotter.XYs
		var lo, hi []float64
		for _, s := range shown {
			if s.Used != used || !finite(s.CosMean) || !finite(s.SeparationUm) {
				continue
			}
			xys = append(xys, plotter.XY{X: s.SeparationUm, Y: s.CosMean})
			l, h := s.CosLow, s.CosHigh
			if !finite(l) || !finite(h) {
				l, h = s.CosMean, s.CosMean
			}
			lo, hi = append(lo, math.Max(l, low)), append(hi, math.Min(h, high))
		}
		if used {
			addBars(p, xys, lo, hi, ink)
			addPoints(p, xys, draw.CircleGlyph{}, ink, 2.2, "used")
		} else {
			addBars(p, xys, lo, hi, soft)
			addPoints(p, xys, draw.RingGlyph{}, soft, 2.2, "not used")
		}
	}
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = 0, far*1.03, low, high
	p.Legend.Left, p.Legend.XOffs, p.Legend.YOffs = true, vg.Points(4), vg.Points(3)
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: mean cosine of the angle between tangents against their separation, with the fitted decay", f.ID))
}

// methodFigure shows the persistence length by every method, each with its interval.
func methodFigure(f *job.Filament) (template.HTML, error) {
	var rows []modes.Estimate
	low, high := math.Inf(1), math.Inf(-1)
	for _, e := range f.Estimates {
		if e.Quantity != "lp_um" || !positive(e.Value) && !positive(e.Low) {
			continue
		}
		rows = append(rows, e)
		for _, v := range []float64{e.Value, e.Low, e.High} {
			if positive(v) {
				low, high = math.Min(low, v), math.Max(high, v)
			}
		}
	}
	if len(rows) == 0 {
		return "", errNothing
	}
	low, high = low/1.25, high*1.25
	p := newPlot("persistence length (µm)", "")
	p.X.Tick.Marker = decades{plain: true}
	if high/low < 3 { // wide enough for two labels
		mid := math.Sqrt(low * high)
		low, high = mid/1.8, mid*1.8
	}
	if positive(f.LpLowUm) {
		right := high
		if positive(f.LpHighUm) {
			right = math.Min(f.LpHighUm, high)
		}
		left := math.Max(f.LpLowUm, low)
		y0, y1 := -0.6, float64(len(rows))-0.4
		if left, right := math.Log10(left), math.Log10(right); right > left {
			p.Add(&plotter.Polygon{XYs: []plotter.XYs{{{X: left, Y: y0}, {X: right, Y: y0}, {X: right, Y: y1}, {X: left, Y: y1}}}, Color: band})
		}
	}
	var ticks []plot.Tick
	for i, e := range rows {
		y := float64(len(rows) - 1 - i)
		ticks = append(ticks, plot.Tick{Value: y, Label: e.Method})
		left, right := e.Low, e.High
		if !positive(left) {
			left = low
		}
		if !positive(right) {
			right = high
		}
		left, right = math.Log10(left), math.Log10(right)
		if positive(e.Low) || positive(e.High) || math.IsInf(e.High, 1) {
			addLine(p, plotter.XYs{{X: left, Y: y}, {X: right, Y: y}}, ink, 1.1, nil, "")
			for _, end := range []float64{e.Low, e.High} {
				if end := math.Log10(end); finite(end) {
					addLine(p, plotter.XYs{{X: end, Y: y - 0.09}, {X: end, Y: y + 0.09}}, ink, 1.1, nil, "")
				}
			}
		}
		if math.IsInf(e.High, 1) {
			addPoints(p, plotter.XYs{{X: math.Log10(high), Y: y}}, arrow{}, ink, 3.2, "")
		}
		shape := draw.GlyphDrawer(hollow{})
		if e.Method == f.LpFrom {
			shape = draw.CircleGlyph{}
		}
		if positive(e.Value) {
			addPoints(p, plotter.XYs{{X: math.Log10(e.Value), Y: y}}, shape, ink, 3, "")
		}
	}
	p.Y.Tick.Marker = plot.ConstantTicks(ticks)
	p.Y.LineStyle.Width, p.Y.Tick.LineStyle.Width = 0, 0
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = math.Log10(low), math.Log10(high), -0.6, float64(len(rows))-0.4
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: persistence length by each method with its 95 %% interval", f.ID))
}

// hollow is a circle filled with white, so that the bar behind it does not show through.
type hollow struct{}

func (hollow) DrawGlyph(c *draw.Canvas, s draw.GlyphStyle, at vg.Point) {
	c.SetColor(color.White)
	draw.CircleGlyph{}.DrawGlyph(c, s, at)
	c.SetColor(s.Color)
	draw.RingGlyph{}.DrawGlyph(c, s, at)
}

// arrow is a triangle that points to the right: the interval goes on.
type arrow struct{}

func (arrow) DrawGlyph(c *draw.Canvas, s draw.GlyphStyle, at vg.Point) {
	c.SetColor(s.Color)
	var p vg.Path
	p.Move(vg.Point{X: at.X - s.Radius, Y: at.Y - s.Radius})
	p.Line(vg.Point{X: at.X + s.Radius*0.8, Y: at.Y})
	p.Line(vg.Point{X: at.X - s.Radius, Y: at.Y + s.Radius})
	p.Close()
	c.Fill(p)
}

// thin keeps at most n of s, evenly chosen, the first and the last among them.
func thin[T any](s []T, n int) []T {
	if len(s) <= n {
		return s
	}
	kept := make([]T, n)
	for i := range kept {
		kept[i] = s[i*(len(s)-1)/(n-1)]
	}
	return kept
}
