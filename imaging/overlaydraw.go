package imaging

import (
	"image"
	"image/color"
	"math"
	"sync"

	"golang.org/x/image/draw"
	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gomedium"
	"golang.org/x/image/font/opentype"
	"golang.org/x/image/math/fixed"
)

// overlayStrip is the height of the strip under the picture, with the scale bar and the caption.
const overlayStrip = 34

// Image draws the overlay: the enlarged frame, each trace with a dark outline, a disc where s = 0 and a ring at
// the other end, its label, and below it a strip with caption and scale bar. Dashed traces are dashed.
func (o *Overlay) Image() image.Image {
	canvas := o.enlarge(overlayStrip)
	frame := canvas.SubImage(image.Rect(0, 0, o.Width, o.Height)).(*image.RGBA)
	for _, t := range o.Traces {
		c := OverlayColour(t.Colour)
		x, y := t.X, t.Y
		parts := [][2][]float64{{x, y}}
		if t.Dashed {
			parts = dashes(x, y, 5*o.Stroke, 4*o.Stroke)
		}
		stroke(frame, parts, o.Stroke/2+1.2, withAlpha(overlayInk, 0.55))
		stroke(frame, parts, o.Stroke/2, c)
		n := len(x) - 1
		r := 1.9 * o.Stroke
		disc(frame, x[n], y[n], r+1.2, overlayInk)
		disc(frame, x[n], y[n], r, c)
		disc(frame, x[n], y[n], r-0.8*o.Stroke, overlayInk)
		disc(frame, x[0], y[0], r+1.2, overlayInk)
		disc(frame, x[0], y[0], r, c)
	}
	face := overlayFace(15)
	defer face.Close()
	for _, t := range o.Traces {
		width := float64(font.MeasureString(face, t.Label)) / 64
		haloText(frame, face, t.LabelX-width/2, t.LabelY+5.5, t.Label, OverlayColour(t.Colour))
	}
	white := color.NRGBA{0xf4, 0xf6, 0xf8, 0xff}
	base := float64(o.Height) + overlayStrip/2 + 5
	text(canvas, face, 10, base, o.Caption, white)
	if o.BarPixels > 0 {
		label := o.BarLabel()
		width := float64(font.MeasureString(face, label)) / 64
		right := float64(o.Width) - 12
		text(canvas, face, right-width, base, label, white)
		y := o.Height + overlayStrip/2
		bar := image.Rect(int(math.Round(right-width-10-o.BarPixels)), y-2, int(math.Round(right-width-10)), y+2)
		draw.Draw(canvas, bar, image.NewUniform(white), image.Point{}, draw.Src)
	}
	return canvas
}

func withAlpha(c color.NRGBA, alpha float64) color.NRGBA {
	c.A = uint8(math.Round(255 * alpha))
	return c
}

// dashes cuts a line into pieces of length on with gaps of length off.
func dashes(x, y []float64, on, off float64) [][2][]float64 {
	var parts [][2][]float64
	var px, py []float64
	drawing, left := true, on
	if len(x) > 0 {
		px, py = []float64{x[0]}, []float64{y[0]}
	}
	for i := 1; i < len(x); i++ {
		x0, y0 := x[i-1], y[i-1]
		length := math.Hypot(x[i]-x0, y[i]-y0)
		at := 0.0
		for length-at > left {
			at += left
			cx, cy := x0+(x[i]-x0)*at/length, y0+(y[i]-y0)*at/length
			if drawing {
				parts = append(parts, [2][]float64{append(px, cx), append(py, cy)})
				px, py, left = nil, nil, off
			} else {
				px, py, left = []float64{cx}, []float64{cy}, on
			}
			drawing = !drawing
		}
		left -= length - at
		if drawing {
			px, py = append(px, x[i]), append(py, y[i])
		}
	}
	if drawing && len(px) > 1 {
		parts = append(parts, [2][]float64{px, py})
	}
	return parts
}

// stroke draws lines of a half-width with round ends. A pixel is blended once, by how much of it the nearest
// piece of line covers, so that joints are not darker than the rest.
func stroke(dst *image.RGBA, parts [][2][]float64, half float64, c color.NRGBA) {
	b := dst.Bounds()
	cover := map[image.Point]float64{}
	for _, part := range parts {
		x, y := part[0], part[1]
		for i := range x {
			j := min(i+1, len(x)-1)
			reach := half + 1
			for py := max(b.Min.Y, int(math.Floor(math.Min(y[i], y[j])-reach))); py <= min(b.Max.Y-1, int(math.Ceil(math.Max(y[i], y[j])+reach))); py++ {
				for px := max(b.Min.X, int(math.Floor(math.Min(x[i], x[j])-reach))); px <= min(b.Max.X-1, int(math.Ceil(math.Max(x[i], x[j])+reach))); px++ {
					d := segmentDistance(float64(px)+0.5, float64(py)+0.5, x[i], y[i], x[j], y[j])
					if a := half + 0.5 - d; a > 0 {
						p := image.Pt(px, py)
						cover[p] = math.Max(cover[p], math.Min(1, a))
					}
				}
			}
		}
	}
	for p, a := range cover {
		blend(dst, p.X, p.Y, c, a)
	}
}

func disc(dst *image.RGBA, x, y, r float64, c color.NRGBA) {
	if r > 0 {
		stroke(dst, [][2][]float64{{{x}, {y}}}, r, c)
	}
}

// segmentDistance is the distance from (px, py) to the segment a–b.
func segmentDistance(px, py, ax, ay, bx, by float64) float64 {
	dx, dy := bx-ax, by-ay
	u := 0.0
	if l2 := dx*dx + dy*dy; l2 > 0 {
		u = math.Max(0, math.Min(1, ((px-ax)*dx+(py-ay)*dy)/l2))
	}
	return math.Hypot(px-ax-u*dx, py-ay-u*dy)
}

func blend(dst *image.RGBA, x, y int, c color.NRGBA, cover float64) {
	a := cover * float64(c.A) / 255
	i := dst.PixOffset(x, y)
	for k, v := range [3]uint8{c.R, c.G, c.B} {
		dst.Pix[i+k] = uint8(math.Round(float64(dst.Pix[i+k])*(1-a) + float64(v)*a))
	}
}

var overlayFont = sync.OnceValue(func() *opentype.Font {
	f, err := opentype.Parse(gomedium.TTF)
	if err != nil {
		panic("imaging: the built-in font does not parse: " + err.Error())
	}
	return f
})

func overlayFace(size float64) font.Face {
	face, err := opentype.NewFace(overlayFont(), &opentype.FaceOptions{Size: size, DPI: 72, Hinting: font.HintingFull})
	if err != nil {
		panic("imaging: the built-in font gives no face: " + err.Error())
	}
	return face
}

// text draws s with its baseline starting at (x, y).
func text(dst *image.RGBA, face font.Face, x, y float64, s string, c color.NRGBA) {
	d := font.Drawer{Dst: dst, Src: image.NewUniform(c), Face: face, Dot: fixed.P(int(math.Round(x)), int(math.Round(y)))}
	d.DrawString(s)
}

// haloText draws s with a dark outline of two pixels.
func haloText(dst *image.RGBA, face font.Face, x, y float64, s string, c color.NRGBA) {
	for k := 0; k < 16; k++ {
		angle := 2 * math.Pi * float64(k) / 16
		text(dst, face, x+2*math.Cos(angle), y+2*math.Sin(angle), s, overlayInk)
	}
	text(dst, face, x, y, s, c)
}
