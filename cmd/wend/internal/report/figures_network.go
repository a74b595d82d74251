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
	"wend/modes"
)

// contoursLaid is how many contours are laid over each other.
const contoursLaid = 80

// tubeFigure lays the contours over each other, drift taken off, with the tube along its axis.
func tubeFigure(f *job.Filament) (template.HTML, error) {
	t := &f.Tube
	n := len(t.Axis.XUm)
	if n < 3 {
		return "", errNothing
	}
	p := newPlot("along the line between the axis's ends (µm)", "across it (µm)")
	// Turned so that the axis lies along the page.
	sin, cos := math.Sincos(math.Atan2(t.Axis.YUm[n-1]-t.Axis.YUm[0], t.Axis.XUm[n-1]-t.Axis.XUm[0]))
	turned := func(x, y float64) (float64, float64) {
		x, y = x-t.Axis.XUm[0], y-t.Axis.YUm[0]
		return x*cos + y*sin, -(y*cos - x*sin)
	}
	lowX, highX, lowY, highY := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
	see := func(x, y float64) {
		lowX, highX, lowY, highY = math.Min(lowX, x), math.Max(highX, x), math.Min(lowY, y), math.Max(highY, y)
	}
	side := func(offset float64) plotter.XYs {
		var xys plotter.XYs
		for i := range n {
			a, b := max(0, i-1), min(n-1, i+1)
			dx, dy := t.Axis.XUm[b]-t.Axis.XUm[a], t.Axis.YUm[b]-t.Axis.YUm[a]
			h := math.Hypot(dx, dy)
			x, y := t.Axis.XUm[i]-offset*dy/h, t.Axis.YUm[i]+offset*dx/h
			x, y = turned(x, y)
			xys = append(xys, plotter.XY{X: x, Y: y})
			see(x, y)
		}
		return xys
	}
	if positive(t.RmsUm) {
		band1, band2 := side(t.RmsUm), side(-t.RmsUm)
		ring := append(plotter.XYs{}, band1...)
		for i := len(band2) - 1; i >= 0; i-- {
			ring = append(ring, band2[i])
		}
		if poly, err := plotter.NewPolygon(ring); err == nil {
			poly.Color, poly.LineStyle.Width = band, 0
			p.Add(poly)
			p.Legend.Add("one rms to each side", poly)
		}
	}
	used := 0
	for i := range f.Contours {
		if f.Contours[i].Used() {
			used++
		}
	}
	stride, k := max(1, used/contoursLaid), -1
	for i := range f.Contours {
		c := &f.Contours[i]
		if !c.Used() {
			continue
		}
		k++
		if k%stride != 0 || k >= len(t.DriftXUm) {
			continue
		}
		var xys plotter.XYs
		for _, q := range c.Line() {
			x, y := turned(q.XUm-t.DriftXUm[k], q.YUm-t.DriftYUm[k])
			xys = append(xys, plotter.XY{X: x, Y: y})
			see(x, y)
		}
		// From light to dark in time.
		share := float64(k) / float64(max(1, used-1))
		shade := func(a, b uint8) uint8 { return uint8(float64(a) + share*(float64(b)-float64(a))) }
		addLine(p, xys, color.NRGBA{shade(0xb9, 0x1c), shade(0xa5, 0x27), shade(0x7a, 0x33), 0x90}, 0.5, nil, "")
	}
	addLine(p, side(0), rust, 1.2, []vg.Length{vg.Points(5), vg.Points(3)}, "axis of the tube")
	// One scale for both directions.
	width, height := highX-lowX, highY-lowY
	pad := 0.4
	aspect := float64(wideWidth-2.2*vg.Centimeter) / float64(wideHeight-1.8*vg.Centimeter)
	if (width+2*pad)/(height+2*pad) > aspect {
		extra := (width+2*pad)/aspect - height
		lowY, highY = lowY-extra/2, highY+extra/2
		lowX, highX = lowX-pad, highX+pad
	} else {
		extra := (height+2*pad)*aspect - width
		lowX, highX = lowX-extra/2, highX+extra/2
		lowY, highY = lowY-pad, highY+pad
	}
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = lowX, highX, lowY, highY
	p.X.Tick.Marker, p.Y.Tick.Marker = steps{9}, steps{6}
	p.Legend.Top = true
	return render(p, wideWidth, wideHeight, fmt.Sprintf("Filament %d: contours of the movie laid over each other with the tube's axis", f.ID))
}

// tubeSpectrumFigure compares the normal modes with theory, free and in the tube.
func tubeSpectrumFigure(f *job.Filament) (template.HTML, error) {
	s := f.Tube.Spectrum
	if len(s) < 3 {
		return "", errNothing
	}
	rigid := 0
	for rigid < len(s) && s[rigid].WavenumberPerUm == 0 {
		rigid++
	}
	at := func(value func(m modes.TubeMode) float64) plotter.XYs {
		return points(false, true, len(s), func(i int) (float64, float64) { return float64(i - rigid + 1), value(s[i]) })
	}
	p := newPlot("mode of the rod (−1, 0: shift and turn)", "variance of amplitude (µm³)")
	addLine(p, at(func(m modes.TubeMode) float64 { return m.FreeTheory }), soft, 1.2, []vg.Length{vg.Points(5), vg.Points(3)}, "free, same stiffness")
	addLine(p, at(func(m modes.TubeMode) float64 { return m.TubeTheory }), petrol, 1.4, nil, "in the tube")
	addLine(p, at(func(m modes.TubeMode) float64 { return m.NoiseVariance }), soft, 0.9, []vg.Length{vg.Points(1), vg.Points(2)}, "noise")
	addPoints(p, at(func(m modes.TubeMode) float64 { return m.Variance }), draw.CrossGlyph{}, soft, 2.4, "as measured")
	addPoints(p, at(func(m modes.TubeMode) float64 { return m.TubeVariance }), draw.CircleGlyph{}, ink, 2.2, "corrected")
	p.Y.Tick.Marker = decades{}
	p.Legend.Top = true
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: variance of the normal modes against theory, free and in a tube", f.ID))
}

// displacementFigure shows the displacements across the axis against a Gaussian of the same variance.
func displacementFigure(f *job.Filament) (template.HTML, error) {
	d := f.Tube.DisplacementUm
	if len(d) < 30 {
		return "", errNothing
	}
	sd := 0.0
	for _, x := range d {
		sd += x * x / float64(len(d))
	}
	sd = math.Sqrt(sd)
	const bins = 31
	count := make([]float64, bins)
	for _, x := range d {
		if i := int((x/sd + 4) / 8 * bins); i >= 0 && i < bins {
			count[i]++
		}
	}
	width := 8 * sd / bins
	p := newPlot("displacement across the axis (µm)", "density (1/µm), log scale")
	var curve plotter.XYs
	lowest := math.Log10(0.3 / (float64(len(d)) * width))
	for i := range 161 {
		x := (float64(i)/80 - 1) * 4 * sd
		y := math.Log10(math.Exp(-x*x/(2*sd*sd)) / (sd * math.Sqrt(2*math.Pi)))
		if y >= lowest {
			curve = append(curve, plotter.XY{X: x, Y: y})
		}
	}
	addLine(p, curve, petrol, 1.4, nil, "Gaussian of that variance")
	addPoints(p, points(false, true, bins, func(i int) (float64, float64) {
		return (float64(i)+0.5)*width - 4*sd, count[i] / (float64(len(d)) * width)
	}), draw.CircleGlyph{}, ink, 2.2, "measured, noise included")
	p.Y.Tick.Marker, p.X.Tick.Marker = decades{}, steps{5}
	p.Legend.Top = true
	p.Y.Max += 0.35 * (p.Y.Max - p.Y.Min)
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: distribution of the displacement across the tube's axis", f.ID))
}

// lagFigure shows the mean-square displacements over lag time.
func lagFigure(f *job.Filament) (template.HTML, error) {
	l := f.Tube.Lags
	if len(l) < 3 {
		return "", errNothing
	}
	p := newPlot("lag (s), log scale", "mean-square displacement (µm²), log scale")
	at := func(value func(l modes.Lag) float64) plotter.XYs {
		return points(true, true, len(l), func(i int) (float64, float64) { return l[i].LagS, value(l[i]) })
	}
	across := at(func(l modes.Lag) float64 { return l.TransverseMSDUm2 })
	addPoints(p, across, draw.CircleGlyph{}, ink, 2.2, "across the axis")
	addPoints(p, at(func(l modes.Lag) float64 { return l.LongitudinalMSDUm2 }), draw.TriangleGlyph{}, rust, 2.4, "along the axis")
	if positive(f.Tube.RmsUm) && len(across) > 1 {
		y := math.Log10(2 * f.Tube.RmsUm * f.Tube.RmsUm)
		addLine(p, plotter.XYs{{X: across[0].X, Y: y}, {X: across[len(across)-1].X, Y: y}}, petrol, 1.2, []vg.Length{vg.Points(5), vg.Points(3)}, "2·rms²")
	}
	if len(across) > 1 {
		end := math.Min(across[0].X+0.8, across[len(across)-1].X)
		addLine(p, plotter.XYs{{X: across[0].X, Y: across[0].Y + 0.15}, {X: end, Y: across[0].Y + 0.15 + 0.75*(end-across[0].X)}}, soft, 0.9, nil, "slope ¾")
	}
	p.X.Tick.Marker, p.Y.Tick.Marker = decades{}, decades{}
	p.Legend.Top, p.Legend.Left = true, true
	p.Y.Max += 0.4 * (p.Y.Max - p.Y.Min)
	return render(p, figureWidth, figureHeight, fmt.Sprintf("Filament %d: mean-square displacement against lag, across and along the tube", f.ID))
}

// widthFigure shows the width along the axis.
func widthFigure(f *job.Filament) (template.HTML, error) {
	w := f.Tube.Places
	if len(w) < 3 {
		return "", errNothing
	}
	p := newPlot("along the axis (µm)", "rms displacement (µm)")
	xys := points(false, false, len(w), func(i int) (float64, float64) { return w[i].SUm, w[i].RmsUm })
	var low, high []float64
	for _, place := range w {
		low, high = append(low, place.RmsLowUm), append(high, place.RmsHighUm)
	}
	first, last := w[0].SUm, w[len(w)-1].SUm
	if positive(f.Tube.RmsUm) {
		addLine(p, plotter.XYs{{X: first, Y: f.Tube.RmsUm}, {X: last, Y: f.Tube.RmsUm}}, petrol, 1.2, nil, "bulk rms")
	}
	addBars(p, xys, low, high, ink)
	addPoints(p, xys, draw.CircleGlyph{}, ink, 2, "place")
	addLine(p, points(false, false, len(w), func(i int) (float64, float64) { return w[i].SUm, w[i].NoiseUm }), soft, 0.9, []vg.Length{vg.Points(1), vg.Points(2)}, "noise")
	p.Y.Min = 0
	p.X.Tick.Marker = steps{9}
	p.Legend.Top = true
	return render(p, wideWidth, wideHeight, fmt.Sprintf("Filament %d: width of the tube along its axis", f.ID))
}
