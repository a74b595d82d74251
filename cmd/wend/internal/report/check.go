package report

import (
	"bytes"
	"fmt"
	"html"
	"image/color"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"

	"wend/cmd/wend/internal/check"
	"wend/cmd/wend/internal/tables"
)

// CheckPicture is the figure of a check as an image file.
const CheckPicture = "check.png"

// The place in a report that a check fills, and a later check fills anew.
const (
	checkStart = "<!-- check -->"
	checkEnd   = "<!-- end of check -->"
)

// AddCheck puts what a check found into the report in dir, in the place of an earlier check's, and writes check.png. The report without a place for it is an error.
func AddCheck(dir string, outcomes []check.Outcome) error {
	path := filepath.Join(dir, File)
	page, err := os.ReadFile(path)
	if err != nil {
		return fmt.Errorf("report: %w", err)
	}
	start, end := bytes.Index(page, []byte(checkStart)), bytes.Index(page, []byte(checkEnd))
	if start < 0 || end < start {
		return fmt.Errorf("report: %s has no place for a check: measure the stack again with --redo", path)
	}
	figure := checkFigure(outcomes)
	const alt = "Measured persistence lengths over the true one, with their intervals, of the synthetic movies of each filament"
	width, height := wideWidth, wideHeight
	svg, err := render(figure, width, height, alt)
	if err != nil {
		return err
	}
	var b bytes.Buffer
	b.WriteString(checkStart + "<section aria-labelledby=\"check\">\n<h2 id=\"check\">Synthetic movies at this movie's own conditions</h2>\n")
	for _, o := range outcomes {
		fmt.Fprintf(&b, "<p><b>Filament %d:</b> %s</p>\n", o.Filament, html.EscapeString(CheckSentence(o)))
	}
	fmt.Fprintf(&b, "<figure>%s\n<figcaption><b>Check.</b> One mark a movie: measured over true persistence length, with its 95 %% interval; the dashed line is the truth. The same as an image file: <a href=\"%s\">%s</a>. Numbers: <a href=\"%s\">%s</a></figcaption></figure>\n",
		svg, CheckPicture, CheckPicture, check.File, check.File)
	b.WriteString("<p>The movies have the length, light, line width, frames, interval, exposure and drag found here, and this filament's estimate as their truth. They cannot show what they do not hold: spots, uneven light, drifting focus, other filaments.</p>\n</section>\n")
	var out bytes.Buffer
	out.Write(page[:start])
	out.Write(b.Bytes())
	out.Write(page[end:])
	err = tables.WriteFile(dir, CheckPicture, func(w io.Writer) error {
		c := vgimg.NewWith(vgimg.UseWH(width, height), vgimg.UseDPI(200), vgimg.UseBackgroundColor(color.White))
		checkFigure(outcomes).Draw(draw.New(c))
		_, err := vgimg.PngCanvas{Canvas: c}.WriteTo(w)
		return err
	})
	if err != nil {
		return err
	}
	return tables.WriteFile(dir, File, func(w io.Writer) error {
		_, err := w.Write(out.Bytes())
		return err
	})
}

// RemoveCheck removes the files of a check whose results are about to be replaced.
func RemoveCheck(dir string) error {
	for _, name := range []string{check.File, CheckPicture} {
		if err := os.Remove(filepath.Join(dir, name)); err != nil && !os.IsNotExist(err) {
			return err
		}
	}
	return nil
}

// CheckSentence says what the movies of one filament gave.
func CheckSentence(o check.Outcome) string {
	of := "of " + digits(o.TrueUm, 3) + " µm"
	if o.OfBound {
		of = "at the lower bound of " + digits(o.TrueUm, 3) + " µm"
	}
	s := fmt.Sprintf("%s %s: ", plural(o.Movies, "movie", "movies"), of)
	if finite(o.Bias) {
		s += fmt.Sprintf("bias %s ± %s, ", percent(o.Bias), strings.TrimPrefix(percent(o.BiasSE), "+"))
	}
	s += fmt.Sprintf("%d of %d intervals held the truth", o.Held, o.Answered+o.Bounds)
	if finite(o.Scatter) {
		s += fmt.Sprintf(", scatter %s where the intervals say %s; one such filament against another shows a ratio of %s or more (80 %% power)",
			strings.TrimPrefix(percent(o.Scatter), "+"), strings.TrimPrefix(percent(o.Predicted), "+"), digits(o.SmallestRatio, 3))
	}
	if o.Bounds > 0 {
		s += fmt.Sprintf("; %d gave only a lower bound", o.Bounds)
	}
	if o.Refused > 0 {
		s += fmt.Sprintf("; %d gave nothing", o.Refused)
	}
	if o.ThermalNo+o.Confined > 0 {
		s += fmt.Sprintf("; %d wrongly called not thermal, %d confined or stuck", o.ThermalNo, o.Confined)
	}
	return s + "."
}

// percent is a logarithm of a ratio as a signed percentage.
func percent(ln float64) string {
	return fmt.Sprintf("%+.3g %%", 100*math.Expm1(ln))
}

// checkFigure shows every movie's estimate over the truth, filament beside filament.
func checkFigure(outcomes []check.Outcome) *plot.Plot {
	p := newPlot("synthetic movie, filament by filament", "measured / true")
	at, lowest, highest := 0.0, 0.7, 1.4
	var ticks []plot.Tick
	for _, o := range outcomes {
		start := at
		for _, e := range o.Estimates {
			at++
			if !(e.LowUm > 0) {
				continue
			}
			high := e.HighUm
			if math.IsInf(high, 1) {
				high = math.Max(3*o.TrueUm, 2*e.LowUm)
			}
			held := e.LowUm <= o.TrueUm && o.TrueUm <= e.HighUm
			c, shape := color.Color(petrol), draw.GlyphDrawer(draw.CircleGlyph{})
			if !held {
				c, shape = rust, draw.PyramidGlyph{}
			}
			addBars(p, plotter.XYs{{X: at, Y: 0}}, []float64{math.Log10(e.LowUm / o.TrueUm)}, []float64{math.Log10(high / o.TrueUm)}, c)
			if e.LpUm > 0 {
				addPoints(p, plotter.XYs{{X: at, Y: math.Log10(e.LpUm / o.TrueUm)}}, shape, c, 2.2, "")
			}
			lowest, highest = math.Min(lowest, e.LowUm/o.TrueUm), math.Max(highest, high/o.TrueUm)
		}
		ticks = append(ticks, plot.Tick{Value: (start + at + 1) / 2, Label: fmt.Sprint(o.Filament)})
		at++
	}
	addLine(p, plotter.XYs{{X: 0, Y: 0}, {X: at, Y: 0}}, ink, 0.8, []vg.Length{vg.Points(4), vg.Points(3)}, "")
	p.X.Min, p.X.Max = 0, at
	p.X.Tick.Marker = plot.ConstantTicks(ticks)
	p.Y.Min, p.Y.Max = math.Log10(lowest)-0.02, math.Log10(highest)+0.02
	var y []plot.Tick
	for _, v := range []float64{0.1, 0.2, 0.3, 0.5, 0.7, 0.8, 0.9, 1, 1.1, 1.2, 1.4, 2, 3, 5, 10} {
		if l := math.Log10(v); l >= p.Y.Min && l <= p.Y.Max {
			y = append(y, plot.Tick{Value: l, Label: fmt.Sprint(v)})
		}
	}
	p.Y.Tick.Marker = plot.ConstantTicks(y)
	return p
}
