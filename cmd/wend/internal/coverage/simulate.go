package main

import (
	"math"
	"math/rand/v2"

	"wend/modes"
	"wend/modes/chain"
	"wend/modes/likelihood"
)

// condition is a movie of one free filament.
type condition struct {
	dragPaS, lengthUm, lpUm float64
	frames                  int
	intervalS, exposureS    float64
	noiseUm3                float64
	noiseScale              float64 // true noise over predicted
	bendPerUm               float64 // curvature of the intrinsic shape
	// The places in the grid that these numbers come from.
	level levels
}

const (
	temperatureK = 295.15
	psfUm        = 0.13
	spacingUm    = 0.1
	finestUm     = 6.8 * psfUm // wavelength below which a contour holds neither signal nor noise
)

// simulate draws the contours of a movie: exposure-averaged thermal modes about a bent shape, and noise of the density that is
// predicted times the noise scale. A contour is shorter than the filament by the undulations that the exposure
// averaged away, and longer by what noise adds, both entered at their mean; the length that is stated has the noise's part taken off.
func simulate(c condition, rng *rand.Rand) modes.Series {
	s := modes.Series{PSFUm: psfUm, LengthUm: c.lengthUm, IntervalS: c.intervalS, ExposureS: c.exposureS,
		TemperatureK: temperatureK, FreeEnds: true}
	f := likelihood.Frames{ExposureS: c.exposureS}
	for i := range c.frames {
		f.TimesS = append(f.TimesS, float64(i)*c.intervalS)
		// The light fades by a third.
		s.NoiseUm3 = append(s.NoiseUm3, c.noiseUm3*(0.85+0.3*float64(i)/float64(c.frames)))
	}
	s.TimesS = f.TimesS
	var amplitude [][]float64
	missing, added := 0.0, 0.0 // shares of the length that the exposure hides and that noise adds
	for n := 1; 2*math.Pi/modes.BeamWavenumber(n, c.lengthUm) > finestUm; n++ {
		k := modes.BeamWavenumber(n, c.lengthUm)
		b := likelihood.Simulate(likelihood.ModeProcess(k, c.lpUm, c.dragPaS, temperatureK), f, rng)
		missing += hiddenShare(n, k, c)
		added += slopeShare(n, c) * c.noiseScale * c.noiseUm3 * math.Exp(k*k*psfUm*psfUm)
		for i := range b {
			b[i] += math.Sqrt(c.noiseScale*s.NoiseUm3[i]) * math.Exp(k*k*psfUm*psfUm/2) * rng.NormFloat64()
		}
		amplitude = append(amplitude, b)
	}
	for n := len(amplitude) + 1; n <= 60; n++ {
		missing += hiddenShare(n, modes.BeamWavenumber(n, c.lengthUm), c)
	}
	s.LengthUm = c.lengthUm * (1 - missing)
	const fine = 3 // integration steps per chord
	steps := int(math.Round(c.lengthUm/spacingUm)) * fine
	h := c.lengthUm / float64(steps)
	slopes := make([]float64, steps*len(amplitude))
	for j := range steps {
		for n := range amplitude {
			slopes[j*len(amplitude)+n] = chain.BeamSlope(n+1, (float64(j)+0.5)/float64(steps)) / math.Pow(c.lengthUm, 1.5)
		}
	}
	turned := 2 * math.Pi * rng.Float64()
	stepUm := math.Sqrt(2 * chain.KT(temperatureK) * 1e18 / (c.dragPaS * c.lengthUm) * c.intervalS)
	driftX, driftY := 0.0, 0.0
	for i := range c.frames {
		turned += 0.02 * rng.NormFloat64()
		driftX, driftY = driftX+stepUm*rng.NormFloat64(), driftY+stepUm*rng.NormFloat64()
		x, y := 0.0, 0.0
		curve := modes.Curve{XUm: []float64{0}, YUm: []float64{0}}
		for j := range steps {
			angle := turned + c.bendPerUm*(float64(j)+0.5)*h
			for n, b := range amplitude {
				angle += b[i] * slopes[j*len(amplitude)+n]
			}
			sin, cos := math.Sincos(angle)
			x, y = x+h*(1-missing+added)*cos, y+h*(1-missing+added)*sin
			if j%fine == fine-1 {
				curve.XUm, curve.YUm = append(curve.XUm, x), append(curve.YUm, y)
			}
		}
		place(curve, driftX, driftY)
		s.Curves = append(s.Curves, curve)
	}
	return s
}

// place moves the middle of c to x, y.
func place(c modes.Curve, x, y float64) {
	mx, my := 0.0, 0.0
	for i := range c.XUm {
		mx, my = mx+c.XUm[i]/float64(len(c.XUm)), my+c.YUm[i]/float64(len(c.XUm))
	}
	for i := range c.XUm {
		c.XUm[i], c.YUm[i] = c.XUm[i]+x-mx, c.YUm[i]+y-my
	}
}

// hiddenShare returns the share of the contour length that beam mode n of wavenumber k hides.
func hiddenShare(n int, k float64, c condition) float64 {
	p := likelihood.ModeProcess(k, c.lpUm, c.dragPaS, temperatureK)
	lost := p.Variance
	if 2*math.Pi/k > finestUm {
		lost -= likelihood.Covariance(p, c.exposureS, 0)
	}
	return lost * slopeShare(n, c)
}

// slopeShare returns the share of the length that a unit of b² of mode n takes up, 1/µm³.
func slopeShare(n int, c condition) float64 {
	const cells = 400
	sum := 0.0
	for i := range cells {
		d := chain.BeamSlope(n, (float64(i)+0.5)/cells)
		sum += d * d / cells
	}
	return sum / (2 * math.Pow(c.lengthUm, 3))
}
