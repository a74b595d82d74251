package report

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg/draw"
	"pgregory.net/rapid"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables/tablestest"
	"wend/modes"
	"wend/trace"
)

// The line in the figure is the equilibrium variance (L/nπ)²/Lp of Gittes et al., J. Cell Biol. 120:923 (1993),
// written there with the mode number, here with the wavelength 2L/n.
func TestTheoryVariance(t *testing.T) {
	const length, lp = 12.3, 17.0
	for n := 1.0; n < 12; n++ {
		want := math.Pow(length/(n*math.Pi), 2) / lp
		if got := theoryVariance(2*length/n, lp); !(math.Abs(got/want-1) < 1e-12) {
			t.Errorf("mode %v: %v, want %v", n, got, want)
		}
	}
}

// Whatever the numbers, a figure is drawn or there is nothing to draw; gonum never panics.
func TestFiguresTakeAnyNumber(t *testing.T) {
	special := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, -1, 1e-300, 1e300, 5}
	number := rapid.OneOf(rapid.SampledFrom(special), rapid.Float64Range(1e-6, 100))
	rapid.Check(t, func(t *rapid.T) {
		f := &job.Filament{}
		f.ID, f.LpFrom = 1, "likelihood"
		f.LpUm, f.LpLowUm, f.LpHighUm, f.LengthUm = number.Draw(t, "lp"), number.Draw(t, "low"), number.Draw(t, "high"), number.Draw(t, "length")
		f.TangentFitLpUm, f.TangentFitIntercept = number.Draw(t, "fit"), number.Draw(t, "intercept")
		for i := range rapid.IntRange(0, 4).Draw(t, "modes") {
			f.Modes = append(f.Modes, modes.Mode{Mode: i, WavelengthUm: number.Draw(t, "λ"), Variance: number.Draw(t, "v"), NoiseVariance: number.Draw(t, "noise"),
				ThermalVariance: number.Draw(t, "thermal"), LpLowUm: number.Draw(t, "l"), LpHighUm: number.Draw(t, "h"), Used: i%2 == 0})
		}
		for i := range rapid.IntRange(0, 4).Draw(t, "separations") {
			f.Tangent = append(f.Tangent, modes.Separation{SeparationUm: number.Draw(t, "s"), CosMean: number.Draw(t, "cos"), CosLow: number.Draw(t, "l"), CosHigh: number.Draw(t, "h"), Used: i%2 == 0})
			f.Estimates = append(f.Estimates, modes.Estimate{Quantity: "lp_um", Method: "m", Value: number.Draw(t, "e"), Low: number.Draw(t, "l"), High: number.Draw(t, "h")})
			f.Contours = append(f.Contours, trace.Contour{Frame: i, LengthUm: number.Draw(t, "length"), Points: []trace.Point{
				{XUm: number.Draw(t, "x"), YUm: number.Draw(t, "y")}, {XUm: number.Draw(t, "x"), YUm: number.Draw(t, "y")}}})
		}
		r := &job.Result{TimesS: []float64{number.Draw(t, "t0"), number.Draw(t, "t1"), number.Draw(t, "t2"), number.Draw(t, "t3")}}
		_, err1 := modeFigure(f)
		_, err2 := tangentFigure(f)
		_, err3 := methodFigure(f)
		_, err4 := shapesFigure(f)
		_, _, err5 := lengthFigure(r, f)
		for i, err := range []error{err1, err2, err3, err4, err5} {
			if err != nil && err != errNothing {
				t.Fatalf("figure %d: %v", i+1, err)
			}
		}
	})
}

type bomb struct{}

func (bomb) Plot(draw.Canvas, *plot.Plot) { panic("boom") }

func TestRenderTurnsPanicsIntoErrors(t *testing.T) {
	p := newPlot("x", "y")
	p.Add(bomb{}, &plotter.Scatter{})
	svg, err := render(p, figureWidth, figureHeight, "a test")
	if err == nil || svg != "" || !strings.Contains(err.Error(), "boom") {
		t.Errorf("error %v with %d bytes, want boom and none", err, len(svg))
	}
}

// Points on a straight line, whatever its direction, lie along the axis with s = 0 at the left.
func TestLay(t *testing.T) {
	for angle := 0.1; angle < 2*math.Pi; angle += 0.5 {
		var pts []trace.Point
		for k := 0; k < 9; k++ {
			pts = append(pts, trace.Point{XUm: 3 + float64(k)*math.Cos(angle), YUm: 7 + float64(k)*math.Sin(angle)})
		}
		along, across := lay(pts)
		for k := range pts {
			if !(math.Abs(along[k]-float64(k-4)) < 1e-9 && math.Abs(across[k]) < 1e-9) {
				t.Fatalf("angle %.1f point %d: (%v, %v), want (%d, 0)", angle, k, along[k], across[k], k-4)
			}
		}
	}
	// Image y runs down, the figure's up: a bump to the top of the image is a bump to the top here.
	_, across := lay([]trace.Point{{XUm: 0}, {XUm: 1, YUm: -0.5}, {XUm: 2}})
	if !(across[1] > 0) {
		t.Errorf("a bump upwards lies at %v", across[1])
	}
}

func TestTicks(t *testing.T) {
	labels := func(ticks []plot.Tick) string {
		var s []string
		for _, k := range ticks {
			if k.Label != "" {
				s = append(s, k.Label)
			}
		}
		return strings.Join(s, " ")
	}
	for _, tc := range []struct{ got, want string }{
		{labels(decades{}.Ticks(math.Log10(3e-4), math.Log10(30))), "10⁻³ 0.01 0.1 1 10"},
		{labels(decades{plain: true}.Ticks(math.Log10(7), math.Log10(70))), "10 20 50"},
		{labels(decades{plain: true}.Ticks(math.Log10(9.9), math.Log10(31))), "10 20 30"},
		{labels(steps{5}.Ticks(0.7, 1.01)), "0.7 0.8 0.9 1.0"},
		{labels(steps{4}.Ticks(-0.5, 12)), "0 5 10"},
	} {
		if tc.got != tc.want {
			t.Errorf("labels %q, want %q", tc.got, tc.want)
		}
	}
}

func TestThinKeepsBothEnds(t *testing.T) {
	s := make([]int, 1000)
	for i := range s {
		s[i] = i
	}
	got := thin(s, 7)
	if len(got) != 7 || got[0] != 0 || got[6] != 999 {
		t.Errorf("thin kept %v", got)
	}
	for i := 1; i < len(got); i++ {
		if got[i] <= got[i-1] {
			t.Errorf("thin kept %v, not in order", got)
		}
	}
}

// The picture's traces lie where the contours are: half a pixel from the corner is the centre of pixel 0.
func TestPictureCoordinates(t *testing.T) {
	r := tablestest.Result(1, 4)
	c := &r.Filaments[0].Contours[r.PictureFrame]
	c.Points, c.Reason = []trace.Point{{XUm: 0, YUm: 0}, {XUm: 10 * r.Settings.PixelUm, YUm: 5 * r.Settings.PixelUm}}, ""
	o, absent := overlay(r)
	if len(absent) != 0 || len(o.Traces) != 1 {
		t.Fatalf("%d traces, absent %v", len(o.Traces), absent)
	}
	scale := float64(o.Scale)
	tr := o.Traces[0]
	if math.Abs(tr.X[0]-scale/2)+math.Abs(tr.Y[0]-scale/2)+math.Abs(tr.X[1]-10.5*scale)+math.Abs(tr.Y[1]-5.5*scale) > 1e-9 {
		t.Errorf("trace at %v, %v with scale %v", tr.X, tr.Y, scale)
	}
	c.Points = nil
	if _, absent := overlay(r); len(absent) != 1 || absent[0] != 1 {
		t.Errorf("absent %v, want filament 1", absent)
	}
}
