package imaging

import (
	"image"
	"image/color"
	"math"
	"slices"
	"testing"
)

// luminance and contrast are those of the Web Content Accessibility Guidelines 2.1, "relative luminance" and
// "contrast ratio" (W3C Recommendation, 2018).
func luminance(c color.NRGBA) float64 {
	linear := func(v uint8) float64 {
		u := float64(v) / 255
		if u <= 0.03928 {
			return u / 12.92
		}
		return math.Pow((u+0.055)/1.055, 2.4)
	}
	return 0.2126*linear(c.R) + 0.7152*linear(c.G) + 0.0722*linear(c.B)
}

func contrast(a, b color.NRGBA) float64 {
	x, y := luminance(a), luminance(b)
	return (math.Max(x, y) + 0.05) / (math.Min(x, y) + 0.05)
}

func TestContrastFormula(t *testing.T) {
	// Black on white is 21:1 by the guidelines' definition.
	if got := contrast(color.NRGBA{0, 0, 0, 255}, color.NRGBA{255, 255, 255, 255}); math.Abs(got-21) > 1e-9 {
		t.Errorf("black on white %v, want 21", got)
	}
}

// Graphics need 3:1 against what they lie on, small text 4.5:1 (the same guidelines, 1.4.11 and 1.4.3).
func TestOverlayColoursStandOut(t *testing.T) {
	if len(OverlayColours) < 5 {
		t.Fatalf("%d colours, want 5 or more", len(OverlayColours))
	}
	grey := color.NRGBA{110, 110, 110, 255} // brighter than the background of a stretched dim frame
	for i, c := range OverlayColours {
		if got := contrast(c, grey); got < 2.5 {
			t.Errorf("colour %d on mid-grey: %.2f, want 2.5", i, got)
		}
		if got := contrast(c, overlayInk); got < 7 {
			t.Errorf("colour %d on its outline: %.2f, want 7", i, got)
		}
	}
}

func TestStretchIgnoresOutliers(t *testing.T) {
	f := NewFrame(100, 60)
	for i := range f.Pix {
		f.Pix[i] = 100 + float32(i%50)
	}
	f.Pix[7], f.Pix[8] = 60000, float32(math.NaN())
	g := Stretch(f, 0.01, 0.998)
	if lo, hi := slices.Min(g.Pix), slices.Max(g.Pix); lo != 0 || hi != 225 {
		t.Errorf("grey from %d to %d, want 0 (not a number) to 225", lo, hi)
	}
	// 100 + 25 of 0 to 49 counts lies near the middle whatever the one hot pixel.
	if got := g.Pix[25]; got < 105 || got > 135 {
		t.Errorf("a middle count is grey %d, want about 120", got)
	}
	if flat := Stretch(NewFrame(3, 2), 0.01, 0.998); flat.Pix[0] != 118 {
		t.Errorf("a flat frame is %d, want 118", flat.Pix[0])
	}
}

// A trace along y = 4 µm of 0.5 µm pixels lies on pixel row 8 of the frame, whose centre is 8.5 pixels down.
func TestOverlayDrawsWhereTheTraceIs(t *testing.T) {
	f := NewFrame(60, 40)
	line := OverlayLine{Label: "1"}
	for i := 0; i <= 20; i++ {
		line.XUm, line.YUm = append(line.XUm, 5+float64(i)), append(line.YUm, 4)
	}
	o := NewOverlay(f, []OverlayLine{line}, 0.5, "frame 0")
	img := o.Image().(*image.RGBA)
	if o.Scale != 8 || img.Bounds().Dx() != 480 || img.Bounds().Dy() != 320+overlayStrip {
		t.Fatalf("scale %d, picture %v", o.Scale, img.Bounds())
	}
	// Centroid of the trace's colour across a column in its middle.
	var sum, weight float64
	for y := 0; y < 320; y++ {
		c := img.RGBAAt(240, y)
		if w := float64(c.R) - float64(c.B); w > 0 {
			sum += w * (float64(y) + 0.5)
			weight += w
		}
	}
	if got := sum / weight; !(math.Abs(got-8.5*8) < 0.05) {
		t.Errorf("the trace lies at %.3f, want %.1f", got, 8.5*8)
	}
	if c := img.RGBAAt(240, 68); c.R < 250 {
		t.Errorf("the middle of the trace is %v, want the first colour in full", c)
	}
	// The scale bar is as long as it says.
	bar, run := 0, 0
	for x := 0; x < 480; x++ {
		if img.RGBAAt(x, 320+overlayStrip/2).G > 0xf0 {
			run++
			bar = max(bar, run)
		} else {
			run = 0
		}
	}
	if bar != 80 || o.BarUm != 5 { // 5 µm are 10 pixels of 0.5 µm, drawn eight times as large
		t.Errorf("bar of %v µm has %d pixels, want 5 µm and 80", o.BarUm, bar)
	}
}

func TestDashesCoverTheirShare(t *testing.T) {
	x, y := []float64{0, 30, 100}, []float64{0, 0, 0}
	parts := dashes(x, y, 5, 4)
	drawn := 0.0
	for _, p := range parts {
		drawn += p[0][len(p[0])-1] - p[0][0]
	}
	if len(parts) != 12 || math.Abs(drawn-56) > 1e-9 { // 11 periods of 9 make 99, and 1 of the twelfth dash
		t.Errorf("%d dashes of %v together, want 12 of 56", len(parts), drawn)
	}
}

func TestNiceLength(t *testing.T) {
	for _, tc := range []struct{ v, want float64 }{{12, 10}, {9.99, 5}, {2, 2}, {0.4, 0.2}, {1.9, 1}, {50, 50}} {
		if got := niceLength(tc.v); math.Abs(got-tc.want) > 1e-12 {
			t.Errorf("niceLength(%v) = %v, want %v", tc.v, got, tc.want)
		}
	}
}

// Odd input draws nothing wrong and does not panic.
func TestOverlayOfNothing(t *testing.T) {
	nan := math.NaN()
	NewOverlay(Frame{}, nil, 0.1, "").Image()
	NewOverlay(NewFrame(5, 3), []OverlayLine{{XUm: []float64{nan, 1e9}, YUm: []float64{1, 1}}, {XUm: []float64{0.1}, YUm: []float64{0.1}}}, 0.1, "").Image()
	if o := NewOverlay(NewFrame(5, 3), []OverlayLine{{XUm: []float64{1}, YUm: []float64{1}}}, nan, ""); len(o.Traces) != 0 || o.BarUm != 0 {
		t.Errorf("without a pixel size: %d traces, bar %v µm, want none", len(o.Traces), o.BarUm)
	}
	// A trace outside the frame, and labels near every border.
	NewOverlay(NewFrame(50, 30), []OverlayLine{{Label: "12", XUm: []float64{-5, 9}, YUm: []float64{-5, 9}, Dashed: true}}, 0.1, "x").Image()
}
