package synth

import (
	"math"
	"math/rand/v2"
)

// Line is a filament during one exposure.
type Line struct {
	// Curves are the centrelines that it went through, each for an equal share of the time.
	Curves []Curve
	// PhotonsPerUm is its brightness.
	PhotonsPerUm float64
	// Labels, if not empty, are relative brightnesses of equal parts of its length.
	Labels []float64
}

// Spot is a bright point: dirt, or a clump of dye.
type Spot struct{ XUm, YUm, Photons float64 }

// HotPixel is a camera pixel with electrons of its own in each exposure.
type HotPixel struct {
	X, Y    int
	Photons float64
}

// Scene is all that stays from frame to frame.
type Scene struct {
	Width, Height int // pixels
	Optics        Optics
	// BackgroundPerPx is the photons per pixel without a filament, averaged over the image.
	BackgroundPerPx float64
	// Uneven, from 0 to 1, lets the background fall off from one corner to the opposite one
	// and towards the edges, from up to 1+Uneven to down to 1−Uneven times its mean.
	Uneven    float64
	Spots     []Spot
	HotPixels []HotPixel
}

// Expect writes the photons that each pixel expects to dst, reusing its memory. light
// multiplies the brightness of lines and spots, for bleaching and flicker.
func (s *Scene) Expect(lines []Line, light float64, dst *Image) {
	dst.Reset(s.Width, s.Height, s.BackgroundPerPx)
	if s.Uneven > 0 {
		s.shade(dst)
	}
	for _, l := range lines {
		for _, c := range l.Curves {
			s.Optics.AddLine(dst, c, l.PhotonsPerUm*light/float64(len(l.Curves)), l.Labels)
		}
	}
	for _, p := range s.Spots {
		s.Optics.AddPoint(dst, p.XUm, p.YUm, p.Photons*light)
	}
	for _, h := range s.HotPixels {
		dst.Pix[h.Y*s.Width+h.X] += h.Photons
	}
}

// shade multiplies im by 1 + Uneven·g, g within [−1, 1] and of mean 0 over the image.
func (s *Scene) shade(im *Image) {
	for j := range im.Height {
		v := 2*(float64(j)+0.5)/float64(im.Height) - 1
		for i := range im.Width {
			u := 2*(float64(i)+0.5)/float64(im.Width) - 1
			// A slope and a bowl; the mean of u²+v² over the square is 2/3 up to the pixel grid.
			g := 0.25*(u+v) - 0.375*(u*u+v*v-2.0/3)
			im.Pix[j*im.Width+i] *= 1 + s.Uneven*g
		}
	}
}

// SpottyLabels draws relative brightnesses for [Line]: a filament with dyePerUm dye
// molecules per µm on average, at random, counted in parts of partUm. Their mean over many
// filaments is 1.
func SpottyLabels(lengthUm, dyePerUm, partUm float64, rng *rand.Rand) []float64 {
	n := max(1, int(math.Round(lengthUm/partUm)))
	mean := dyePerUm * lengthUm / float64(n)
	labels := make([]float64, n)
	for i := range labels {
		labels[i] = Poisson(mean, rng) / mean
	}
	return labels
}

// Sinusoid returns y = y0 + amplitude·sin(2π(x−x0)/wavelength) from x0 over an extent in x,
// turned by angleRad about (x0, y0); all in µm. Points are 0.01 µm apart or closer.
func Sinusoid(x0, y0, extentUm, amplitudeUm, wavelengthUm, angleRad float64) Curve {
	steps := max(2, int(math.Ceil(extentUm/0.01)))
	sin, cos := math.Sincos(angleRad)
	var c Curve
	for k := 0; k <= steps; k++ {
		u := extentUm * float64(k) / float64(steps)
		w := amplitudeUm * math.Sin(2*math.Pi*u/wavelengthUm)
		c.X = append(c.X, x0+u*cos-w*sin)
		c.Y = append(c.Y, y0+u*sin+w*cos)
	}
	return c
}
