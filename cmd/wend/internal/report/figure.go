package report

import (
	"bytes"
	"fmt"
	"html"
	"html/template"
	"image/color"
	"math"
	"regexp"
	"strconv"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Colours of the figures. Whatever they tell apart differs in shape or dash as well.
var (
	ink    = color.NRGBA{0x1c, 0x27, 0x33, 0xff}
	soft   = color.NRGBA{0x7b, 0x86, 0x92, 0xff}
	petrol = color.NRGBA{0x0b, 0x5c, 0x74, 0xff}
	rust   = color.NRGBA{0xb4, 0x4d, 0x12, 0xff}
	band   = color.NRGBA{0xd3, 0xe4, 0xea, 0xff}
)

// Sizes of the figures in the page's own units; the page scales them to the column.
const (
	figureWidth  = 9.4 * vg.Centimeter
	figureHeight = 7.0 * vg.Centimeter
	wideWidth    = 19.2 * vg.Centimeter
	wideHeight   = 5.6 * vg.Centimeter
)

// sans is the face of all text in the figures.
func sans(size float64) font.Font {
	return font.Font{Typeface: "Liberation", Variant: "Sans", Size: vg.Length(size)}
}

// newPlot is an empty figure in the page's style.
func newPlot(x, y string) *plot.Plot {
	p := plot.New()
	p.X.Label.Text, p.Y.Label.Text = x, y
	for _, axis := range []*plot.Axis{&p.X, &p.Y} {
		axis.Label.TextStyle.Font, axis.Label.TextStyle.Color = sans(9), ink
		axis.Label.Padding = vg.Points(3)
		axis.Tick.Label.Font, axis.Tick.Label.Color = sans(8.5), ink
		axis.Tick.Length = vg.Points(3.5)
		axis.LineStyle = draw.LineStyle{Color: ink, Width: vg.Points(0.7)}
		axis.Tick.LineStyle = draw.LineStyle{Color: ink, Width: vg.Points(0.6)}
		axis.Padding = vg.Points(3)
	}
	p.X.Tick.Label.YAlign = draw.YTop
	p.Legend.TextStyle.Font, p.Legend.TextStyle.Color = sans(8), ink
	p.Legend.ThumbnailWidth = vg.Points(20)
	p.Legend.Padding = vg.Points(1.5)
	p.BackgroundColor = color.Transparent
	return p
}

// render draws p as inline SVG with alt as its text for those who do not see it. What gonum cannot draw gives an
// error, also where it panics.
func render(p *plot.Plot, width, height vg.Length, alt string) (svg template.HTML, err error) {
	defer func() {
		if v := recover(); v != nil {
			svg, err = "", fmt.Errorf("report: drawing %q: %v", alt, v)
		}
	}()
	c := vgsvg.New(width, height)
	p.Draw(draw.New(c))
	var b bytes.Buffer
	if _, err := c.WriteTo(&b); err != nil {
		return "", fmt.Errorf("report: drawing %q: %w", alt, err)
	}
	return inline(b.Bytes(), alt), nil
}

var svgTag = regexp.MustCompile(`(?s)<svg [^>]*>`)
var viewBox = regexp.MustCompile(`viewBox="[^"]*"`)
var longNumber = regexp.MustCompile(`-?\d+\.\d{3,}`)

// inline turns an SVG file into an element for the page: no prolog, no size of its own, two decimals.
func inline(file []byte, alt string) template.HTML {
	tag := svgTag.FindIndex(file)
	if tag == nil {
		return ""
	}
	box := viewBox.Find(file[tag[0]:tag[1]])
	body := longNumber.ReplaceAllFunc(file[tag[1]:], func(n []byte) []byte {
		v, err := strconv.ParseFloat(string(n), 64)
		if err != nil {
			return n
		}
		return strconv.AppendFloat(nil, math.Round(v*100)/100, 'f', -1, 64)
	})
	return template.HTML(`<svg ` + string(box) + ` role="img" aria-label="` + html.EscapeString(alt) + `">` + string(bytes.TrimSpace(body)))
}

// points collects those of pairs that a figure can show. A log axis shows positive values only, as their
// decimal logarithm: the axis itself is linear, because gonum reserves the wrong room for the label of its own
// log axis and panics at values that are not positive.
func points(logX, logY bool, n int, at func(i int) (x, y float64)) plotter.XYs {
	var xys plotter.XYs
	for i := range n {
		x, y := at(i)
		if finite(x) && finite(y) && (!logX || x > 0) && (!logY || y > 0) {
			if logX {
				x = math.Log10(x)
			}
			if logY {
				y = math.Log10(y)
			}
			xys = append(xys, plotter.XY{X: x, Y: y})
		}
	}
	return xys
}

// addPoints adds markers and a line in the legend; nothing for no points.
func addPoints(p *plot.Plot, xys plotter.XYs, shape draw.GlyphDrawer, c color.Color, radius float64, legend string) {
	if len(xys) == 0 {
		return
	}
	s := &plotter.Scatter{XYs: xys, GlyphStyle: draw.GlyphStyle{Shape: shape, Color: c, Radius: vg.Points(radius)}}
	p.Add(s)
	if legend != "" {
		p.Legend.Add(legend, s)
	}
}

// addLine adds a line, dashed where dashes are given; nothing for fewer than two points.
func addLine(p *plot.Plot, xys plotter.XYs, c color.Color, width float64, dashes []vg.Length, legend string) {
	if len(xys) < 2 {
		return
	}
	l := &plotter.Line{XYs: xys, LineStyle: draw.LineStyle{Color: c, Width: vg.Points(width), Dashes: dashes}}
	p.Add(l)
	if legend != "" {
		p.Legend.Add(legend, l)
	}
}

// addBars adds vertical error bars from low to high.
func addBars(p *plot.Plot, xys plotter.XYs, low, high []float64, c color.Color) {
	for i, xy := range xys {
		l := &plotter.Line{XYs: plotter.XYs{{X: xy.X, Y: low[i]}, {X: xy.X, Y: high[i]}}, LineStyle: draw.LineStyle{Color: c, Width: vg.Points(0.8)}}
		p.Add(l)
	}
}

var (
	dashed = []vg.Length{vg.Points(4), vg.Points(2.5)}
	dotted = []vg.Length{vg.Points(1), vg.Points(2)}
)

// decades marks an axis of decimal logarithms: powers of ten get a label, on a short axis other multiples too.
type decades struct{ plain bool }

func (t decades) Ticks(min, max float64) []plot.Tick {
	var ticks []plot.Tick
	labelled := "1"
	switch span := max - min; {
	case !(span > 0) || span > 30:
		return nil
	case span < 0.75:
		labelled = "1234568"
	case span < 1.8:
		labelled = "125"
	}
	for e := int(math.Floor(min)); e <= int(math.Ceil(max)); e++ {
		for m := 1; m < 10; m++ {
			v := float64(e) + math.Log10(float64(m))
			if v < min-1e-9 || v > max+1e-9 {
				continue
			}
			label := ""
			if digit := strconv.Itoa(m); strings.Contains(labelled, digit) {
				label = strconv.FormatFloat(float64(m)*math.Pow(10, float64(e)), 'g', 3, 64)
				if !t.plain && (e < -2 || e > 3) {
					label = "10" + superscript(e)
					if m > 1 {
						label = digit + "×" + label
					}
				}
			}
			ticks = append(ticks, plot.Tick{Value: v, Label: label})
		}
	}
	return ticks
}

// steps marks a linear axis at about n round values.
type steps struct{ n float64 }

func (t steps) Ticks(min, max float64) []plot.Tick {
	if !(max > min) {
		return nil
	}
	raw := (max - min) / t.n
	p := math.Pow(10, math.Floor(math.Log10(raw)))
	step := 10 * p
	for _, m := range []float64{1, 2, 5} {
		if m*p >= raw*(1-1e-9) {
			step = m * p
			break
		}
	}
	decimals := 0
	if step < 1 {
		decimals = int(math.Ceil(-math.Log10(step) - 1e-9))
	}
	var ticks []plot.Tick
	for i := math.Ceil(min/step - 1e-9); i*step <= max+1e-9*step && len(ticks) < 50; i++ {
		ticks = append(ticks, plot.Tick{Value: i * step, Label: roundTo(i*step, decimals)})
	}
	return ticks
}
