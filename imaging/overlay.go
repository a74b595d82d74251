package imaging

import (
	"image"
	"image/color"
	"math"
	"slices"
	"strconv"

	"golang.org/x/image/draw"
)

// OverlayColours are the colours of traces, in turn: light enough to stand out from a grey image and its dark
// outline, and apart from each other in lightness or in the blue–yellow direction that red–green blind readers
// see. The number beside each trace says the same without colour.
var OverlayColours = []color.NRGBA{
	{0xff, 0xb5, 0x2e, 0xff}, // amber
	{0x58, 0xcf, 0xff, 0xff}, // sky
	{0xff, 0xf3, 0xb0, 0xff}, // cream
	{0xff, 0x9d, 0xc9, 0xff}, // rose
	{0xa9, 0xe8, 0xc4, 0xff}, // mint
	{0xcd, 0xb8, 0xff, 0xff}, // lilac
}

// overlayInk is the outline of traces and the strip under the picture.
var overlayInk = color.NRGBA{0x10, 0x14, 0x1a, 0xff}

// OverlayColour returns the colour of the i-th trace, from 0.
func OverlayColour(i int) color.NRGBA { return OverlayColours[i%len(OverlayColours)] }

// OverlayLine is a trace to draw: points in µm, from the end at s = 0.
type OverlayLine struct {
	XUm, YUm []float64
	// Label stands beside the first point.
	Label string
	// Colour is an index for OverlayColour.
	Colour int
	// Dashed marks a contour that is not used.
	Dashed bool
}

// Overlay is a frame with traces over it, laid out for drawing. Lengths are in pixels of the
// enlarged picture, whose pixel (0, 0) is the corner of the frame.
type Overlay struct {
	// Grey is the frame, stretched but not enlarged.
	Grey *image.Gray
	// Scale is the enlargement, Width and Height the enlarged frame without the strip below it.
	Scale, Width, Height int
	// Stroke is the width of a trace.
	Stroke float64
	Traces []OverlayTrace
	// BarUm is the length of the scale bar, BarPixels the same in the picture. 0: no scale is known.
	BarUm, BarPixels float64
	// Caption stands in the strip.
	Caption string
}

// OverlayTrace is a trace in pixels of the picture, with the centre of its label.
type OverlayTrace struct {
	X, Y           []float64
	Label          string
	LabelX, LabelY float64
	Colour         int
	Dashed         bool
}

// overlayWidth is the picture's width in pixels that the enlargement aims at.
const overlayWidth = 1100

// NewOverlay lays out traces over a frame. pixelUm is the size of a pixel in µm; if it is not positive nothing is
// drawn over the frame and there is no scale bar. Points that are not finite are left out. An empty frame gives an
// overlay of size 0.
func NewOverlay(f Frame, lines []OverlayLine, pixelUm float64, caption string) *Overlay {
	o := &Overlay{Grey: Stretch(f, 0.01, 0.998), Caption: caption, Scale: 1}
	if f.Width > 0 {
		o.Scale = min(8, max(1, int(math.Round(overlayWidth/float64(f.Width)))))
	}
	o.Width, o.Height = f.Width*o.Scale, f.Height*o.Scale
	if !(pixelUm > 0) || o.Width == 0 || o.Height == 0 {
		return o
	}
	o.Stroke = 1.2 + 0.25*math.Min(float64(o.Scale), 4)
	pixelsPerUm := float64(o.Scale) / pixelUm
	o.BarUm = niceLength(0.22 * float64(o.Width) / pixelsPerUm)
	o.BarPixels = o.BarUm * pixelsPerUm
	for _, line := range lines {
		t := OverlayTrace{Label: line.Label, Colour: line.Colour, Dashed: line.Dashed}
		for i := range min(len(line.XUm), len(line.YUm)) {
			// The centre of pixel 0 is half a pixel from the corner.
			x, y := line.XUm[i]*pixelsPerUm+0.5*float64(o.Scale), line.YUm[i]*pixelsPerUm+0.5*float64(o.Scale)
			if finite(x) && finite(y) && math.Abs(x) < 1e6 && math.Abs(y) < 1e6 {
				t.X, t.Y = append(t.X, x), append(t.Y, y)
			}
		}
		if len(t.X) > 0 {
			o.Traces = append(o.Traces, t)
		}
	}
	o.placeLabels()
	return o
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// niceLength returns the largest of 1, 2, 5 times a power of ten that is not above v.
func niceLength(v float64) float64 {
	p := math.Pow(10, math.Floor(math.Log10(v)))
	for _, m := range []float64{5, 2} {
		if m*p <= v*(1+1e-9) {
			return m * p
		}
	}
	return p
}

// BarLabel is the text of the scale bar.
func (o *Overlay) BarLabel() string { return strconv.FormatFloat(o.BarUm, 'g', 3, 64) + " µm" }

// placeLabels puts each label beside the first point of its trace, where it is least in the way of traces and of
// the labels before it, and inside the picture.
func (o *Overlay) placeLabels() {
	const around = 16
	distance := 12 + 2*o.Stroke
	for i := range o.Traces {
		t := &o.Traces[i]
		best := math.Inf(1)
		// Straight on from the end is the first choice.
		j := min(len(t.X)-1, 10)
		on := math.Atan2(t.Y[0]-t.Y[j], t.X[0]-t.X[j])
		for k := 0; k < around; k++ {
			turn := math.Ceil(float64(k)/2) * 2 * math.Pi / around
			if k%2 == 1 {
				turn = -turn
			}
			x := math.Max(11, math.Min(float64(o.Width)-11, t.X[0]+distance*math.Cos(on+turn)))
			y := math.Max(11, math.Min(float64(o.Height)-11, t.Y[0]+distance*math.Sin(on+turn)))
			cost := 0.1 * math.Abs(turn)
			for a, other := range o.Traces {
				for p := range other.X {
					if math.Hypot(other.X[p]-x, other.Y[p]-y) < 12 {
						cost++
					}
				}
				if a < i && math.Hypot(other.LabelX-x, other.LabelY-y) < 22 {
					cost += 20
				}
			}
			if cost < best {
				best, t.LabelX, t.LabelY = cost, x, y
			}
		}
	}
}

// Stretch returns the frame in grey, black at the quantile low of its pixels and nearly white at the quantile
// high. Values that are not finite become black. A frame of one value is mid-grey.
func Stretch(f Frame, low, high float64) *image.Gray {
	g := image.NewGray(image.Rect(0, 0, f.Width, f.Height))
	step := max(1, len(f.Pix)/250000)
	var sample []float32
	for i := 0; i < len(f.Pix); i += step {
		if finite(float64(f.Pix[i])) {
			sample = append(sample, f.Pix[i])
		}
	}
	if len(sample) == 0 {
		return g
	}
	slices.Sort(sample)
	at := func(q float64) float64 { return float64(sample[int(math.Round(q*float64(len(sample)-1)))]) }
	lo, hi := at(low), at(high)
	const black, white = 12, 225
	for i, v := range f.Pix {
		switch {
		case !finite(float64(v)):
		case !(hi > lo):
			g.Pix[i] = (black + white) / 2
		default:
			u := math.Max(0, math.Min(1, (float64(v)-lo)/(hi-lo)))
			g.Pix[i] = uint8(math.Round(black + (white-black)*u))
		}
	}
	return g
}

// enlarge returns o.Grey at o.Scale on a canvas with strip rows of ink below it.
func (o *Overlay) enlarge(strip int) *image.RGBA {
	canvas := image.NewRGBA(image.Rect(0, 0, o.Width, o.Height+strip))
	draw.Draw(canvas, canvas.Bounds(), image.NewUniform(overlayInk), image.Point{}, draw.Src)
	if o.Width > 0 && o.Height > 0 {
		large := image.NewGray(image.Rect(0, 0, o.Width, o.Height))
		draw.CatmullRom.Scale(large, large.Bounds(), o.Grey, o.Grey.Bounds(), draw.Src, nil)
		draw.Draw(canvas, large.Bounds(), large, image.Point{}, draw.Src)
	}
	return canvas
}
