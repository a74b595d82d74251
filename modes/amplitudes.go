package modes

import (
	"math"

	"wend/modes/likelihood"
)

// amplitudes are the beam modes of a filament through its usable frames.
type amplitudes struct {
	frames       likelihood.Frames
	temperatureK float64
	lengthUm     float64 // contour length in use, see rescale
	measuredUm   float64 // contour length that the contours show
	curves       []Curve
	chords       []chords
	noiseUm3     []float64 // P of each frame
	motionNoise  float64
	psfUm        float64
	k            []float64   // wavenumbers of all modes computed, 1/µm
	b            [][]float64 // b[mode][frame], µm^3/2
	resolved     int         // modes 1 to resolved are long against the line's width
	fitted       int         // modes 1 to fitted go into the likelihood
	held         int         // modes 1 to held are in the contours, resolved or not
}

// noiseFloorUm3 keeps the noise positive where contours without noise are analysed: 0.01 nm² along a µm.
const noiseFloorUm3 = 1e-8

// measure takes the usable frames of s: a finite ascending time, a curve of three or more distinct points and a noise density.
func measure(s Series, o Options) amplitudes {
	a := amplitudes{temperatureK: s.TemperatureK, lengthUm: s.LengthUm, measuredUm: s.LengthUm, psfUm: math.Max(0, s.PSFUm), motionNoise: math.Max(0, s.MotionNoise)}
	a.frames.ExposureS = math.Max(0, s.ExposureS)
	if !(s.LengthUm > 0) || math.IsInf(s.LengthUm, 0) || math.IsNaN(s.PSFUm) || math.IsInf(s.PSFUm, 0) {
		return a
	}
	// The points limit the modes too: four of them a wavelength.
	finest := o.ResolutionPSF * a.psfUm
	for n := 1; n <= o.MaxModes+4; n++ {
		k := BeamWavenumber(n, s.LengthUm)
		if 2*math.Pi/k < finest || n > longest(s.Curves)/4 {
			break
		}
		a.resolved = n
	}
	a.fitted = min(a.resolved, o.MaxModes)
	const most = 400
	for a.held = a.resolved; a.held < min(most, longest(s.Curves)/2); a.held++ {
		if 2*math.Pi/BeamWavenumber(a.held+1, s.LengthUm) < o.ContourPSF*a.psfUm {
			break
		}
	}
	basis := newBasis(s.LengthUm, a.resolved+2)
	a.k = basis.k
	a.b = make([][]float64, len(a.k))
	last := math.Inf(-1)
	for i, c := range s.Curves {
		if i >= len(s.TimesS) || i >= len(s.NoiseUm3) {
			break
		}
		t, p := s.TimesS[i], s.NoiseUm3[i]
		if math.IsNaN(t) || math.IsInf(t, 0) || !(t > last) || !(p >= 0) || math.IsInf(p, 0) {
			continue
		}
		ch, ok := newChords(c)
		if !ok {
			continue
		}
		last = t
		a.frames.TimesS = append(a.frames.TimesS, t)
		a.noiseUm3 = append(a.noiseUm3, math.Max(p, noiseFloorUm3))
		a.curves, a.chords = append(a.curves, c), append(a.chords, ch)
		for m, v := range basis.amplitudesOf(ch) {
			a.b[m] = append(a.b[m], v)
		}
	}
	return a
}

// longest returns the number of chords of the curve with most points.
func longest(curves []Curve) int {
	n := 0
	for _, c := range curves {
		n = max(n, len(c.XUm)-1)
	}
	return n
}

// noiseGain returns by what a mode's noise exceeds P: exp((k·PSF)²).
func (a amplitudes) noiseGain(mode int) float64 {
	x := BeamWavenumber(mode, a.lengthUm) * a.psfUm
	return math.Exp(x * x)
}

// noise returns the noise variance of beam mode m in a frame, µm³, the mean over frames.
func (a amplitudes) noise(m int, t theory) float64 {
	p := a.process(BeamWavenumber(m, a.lengthUm), t)
	return t.noiseScale*mean(a.noiseUm3)*a.noiseGain(m) + a.motionNoise*likelihood.Hidden(p, a.frames.ExposureS)
}

// data returns frames from (included) to to (excluded) for the likelihood.
func (a amplitudes) data(from, to int) likelihood.Data {
	d := likelihood.Data{TemperatureK: a.temperatureK, MotionNoise: a.motionNoise}
	d.ExposureS, d.TimesS = a.frames.ExposureS, a.frames.TimesS[from:to]
	for n := 1; n <= a.fitted; n++ {
		t := likelihood.Track{WavenumberPerUm: a.k[n-1], Amplitude: a.b[n-1][from:to]}
		g := a.noiseGain(n)
		for _, p := range a.noiseUm3[from:to] {
			t.NoiseVariance = append(t.NoiseVariance, p*g)
		}
		d.Tracks = append(d.Tracks, t)
	}
	return d
}

// theory is the filament as the likelihood found it: what the classic methods need to correct for blur and
// to count shapes.
type theory struct {
	lpUm, dragPaS, noiseScale float64
	tubeRatio                 float64 // stiffness of a tube over that of the first mode
	lpUnresolved              bool    // lpUm is a stand-in: the data give only a bound
}

// process is the thermal process of a mode of wavenumber k, 1/µm.
func (a amplitudes) process(k float64, t theory) likelihood.Process {
	first := BeamWavenumber(1, a.lengthUm)
	return likelihood.ModeProcess(k, t.lpUm*(1+t.tubeRatio*math.Pow(first/k, 4)), t.dragPaS, a.temperatureK)
}

// relaxation returns the relaxation time of a wavenumber, s.
func (a amplitudes) relaxation(k float64, t theory) float64 {
	return a.process(k, t).RelaxationS
}

// modeSpread returns, for beam mode m (from 1, up to those computed), the expected variance of a frame's amplitude, noise included, and the
// variance of its time mean and of its mean square about the expectation.
func (a amplitudes) modeSpread(m int, t theory) (variance, ofMean, ofSquare float64) {
	p := a.process(a.k[m-1], t)
	n := float64(len(a.frames.TimesS))
	mx := mixture{frames: a.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}, noise: a.noise(m, t)}
	signal, about := mx.signal()
	variance = signal + mx.noise
	return variance, signal - about + mx.noise/n, 2 * variance * variance / mx.varianceShapes()
}

func mean(x []float64) float64 {
	s := 0.0
	for _, v := range x {
		s += v
	}
	return s / float64(len(x))
}
