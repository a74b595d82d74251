package report

import (
	"bytes"
	"encoding/base64"
	"fmt"
	"html"
	"html/template"
	"image"
	"image/jpeg"
	"image/png"
	"math"
	"strconv"
	"strings"

	"golang.org/x/image/draw"

	"wend/cmd/wend/internal/job"
	"wend/imaging"
)

// overlay lays the contours of the picture's frame over it, and lists the filaments that have none there.
func overlay(r *job.Result) (o *imaging.Overlay, absent []int) {
	var lines []imaging.OverlayLine
	for i, f := range r.Filaments {
		found := false
		for _, c := range f.Contours {
			if c.Frame != r.PictureFrame || c.Count() == 0 {
				continue
			}
			found = true
			line := imaging.OverlayLine{Label: strconv.Itoa(f.ID), Colour: i, Dashed: !c.Used()}
			for _, p := range c.Line() {
				line.XUm, line.YUm = append(line.XUm, p.XUm), append(line.YUm, p.YUm)
			}
			lines = append(lines, line)
		}
		if !found {
			absent = append(absent, f.ID)
		}
	}
	caption := fmt.Sprintf("frame %d", r.PictureFrame)
	if t := timeOf(r, r.PictureFrame); finite(t) {
		caption += fmt.Sprintf(", %s s", roundTo(t, 2))
	}
	return imaging.NewOverlay(r.Picture, lines, r.Settings.PixelUm, caption), absent
}

// maxEmbedded is the largest side of a frame embedded in the page as it is, in pixels.
const maxEmbedded = 640

// pictureSVG is the overlay for the page: the frame embedded as it was recorded, the traces as lines.
func pictureSVG(o *imaging.Overlay) (template.HTML, error) {
	if o.Width == 0 || o.Height == 0 {
		return "", errNothing
	}
	data, err := dataURI(o.Grey)
	if err != nil {
		return "", err
	}
	const strip = 40
	// Strokes and text keep their size on the page whatever the frame's: the page shows about 1000 units across.
	u := math.Max(1, float64(o.Width)/1000)
	ink := "#10141a"
	var b strings.Builder
	fmt.Fprintf(&b, `<svg viewBox="0 0 %d %.0f" role="img" aria-label="The frame with the traced filaments drawn over it and numbered">`, o.Width, float64(o.Height)+strip*u)
	fmt.Fprintf(&b, `<rect width="%d" height="%.0f" fill="%s"/><image width="%d" height="%d" preserveAspectRatio="none" href="%s"/>`,
		o.Width, float64(o.Height)+strip*u, ink, o.Width, o.Height, data)
	for _, t := range o.Traces {
		c := imaging.OverlayColour(t.Colour)
		colour := fmt.Sprintf("#%02x%02x%02x", c.R, c.G, c.B)
		var path strings.Builder
		for i := range t.X {
			if i > 0 {
				path.WriteByte(' ')
			}
			fmt.Fprintf(&path, "%.1f,%.1f", t.X[i], t.Y[i])
		}
		dash := ""
		if t.Dashed {
			dash = fmt.Sprintf(` stroke-dasharray="%.0f %.0f"`, 9*u, 7*u)
		}
		for _, pass := range []struct {
			colour  string
			width   float64
			opacity string
		}{{ink, 4.4 * u, ` opacity="0.55"`}, {colour, 2 * u, ""}} {
			fmt.Fprintf(&b, `<polyline points="%s" fill="none" stroke="%s" stroke-width="%.1f" stroke-linejoin="round"%s%s/>`, path.String(), pass.colour, pass.width, dash, pass.opacity)
		}
		n := len(t.X) - 1
		fmt.Fprintf(&b, `<circle cx="%.1f" cy="%.1f" r="%.1f" fill="%s" stroke="%s" stroke-width="%.1f"/>`, t.X[n], t.Y[n], 3.6*u, ink, colour, 1.6*u)
		fmt.Fprintf(&b, `<circle cx="%.1f" cy="%.1f" r="%.1f" fill="%s" stroke="%s" stroke-width="%.1f"/>`, t.X[0], t.Y[0], 4*u, colour, ink, u)
		fmt.Fprintf(&b, `<text class="label" x="%.1f" y="%.1f" font-size="%.1f" font-weight="bold" text-anchor="middle" fill="%s" stroke="%s" stroke-width="%.1f" paint-order="stroke">%s</text>`,
			t.LabelX, t.LabelY+6.5*u, 20*u, colour, ink, 4*u, html.EscapeString(t.Label))
	}
	base := float64(o.Height) + strip*u/2
	fmt.Fprintf(&b, `<text x="%.1f" y="%.1f" font-size="%.1f" fill="#f4f6f8">%s</text>`, 14*u, base+6.5*u, 20*u, html.EscapeString(o.Caption))
	if o.BarPixels > 0 {
		right := float64(o.Width) - 90*u
		fmt.Fprintf(&b, `<rect x="%.1f" y="%.1f" width="%.1f" height="%.1f" fill="#f4f6f8"/><text x="%.1f" y="%.1f" font-size="%.1f" fill="#f4f6f8">%s</text>`,
			right-o.BarPixels, base-2.5*u, o.BarPixels, 5*u, right+10*u, base+6.5*u, 20*u, o.BarLabel())
	}
	b.WriteString("</svg>")
	return template.HTML(b.String()), nil
}

// dataURI is the frame as PNG, or, if it is large, made smaller and as JPEG.
func dataURI(g *image.Gray) (string, error) {
	var b bytes.Buffer
	w, h := g.Bounds().Dx(), g.Bounds().Dy()
	if max(w, h) <= maxEmbedded {
		e := png.Encoder{CompressionLevel: png.BestCompression}
		if err := e.Encode(&b, g); err != nil {
			return "", fmt.Errorf("report: picture: %w", err)
		}
		return "data:image/png;base64," + base64.StdEncoding.EncodeToString(b.Bytes()), nil
	}
	shrink := math.Min(1, 1100/float64(max(w, h)))
	small := image.NewGray(image.Rect(0, 0, max(1, int(float64(w)*shrink)), max(1, int(float64(h)*shrink))))
	draw.CatmullRom.Scale(small, small.Bounds(), g, g.Bounds(), draw.Src, nil)
	if err := jpeg.Encode(&b, small, &jpeg.Options{Quality: 85}); err != nil {
		return "", fmt.Errorf("report: picture: %w", err)
	}
	return "data:image/jpeg;base64," + base64.StdEncoding.EncodeToString(b.Bytes()), nil
}
