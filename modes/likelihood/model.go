package likelihood

import (
	"fmt"
	"math"
)

// boltzmann is the Boltzmann constant, J/K, exact since the SI of 2019.
const boltzmann = 1.380649e-23

// Track is one bending mode through the movie: its wavenumber k in 1/µm, and for each frame the
// amplitude in µm^3/2 and the predicted variance of its error in µm³.
type Track struct {
	WavenumberPerUm float64
	Amplitude       []float64
	NoiseVariance   []float64
}

// Data is what a filament's modes say, all tracks over the same frames.
type Data struct {
	Frames
	TemperatureK float64
	// MotionNoise is the share of the variance that a mode loses to the exposure which a frame shows
	// again as white noise; 0 where frames are exact means over the exposure.
	MotionNoise float64
	Tracks      []Track
}

// check reports what keeps d from being fitted.
func (d Data) check() error {
	n := len(d.TimesS)
	switch {
	case n < 2:
		return fmt.Errorf("likelihood: %d frames, want 2 or more", n)
	case len(d.Tracks) == 0:
		return fmt.Errorf("likelihood: no mode")
	case !(d.TemperatureK > 0) || math.IsInf(d.TemperatureK, 0):
		return fmt.Errorf("likelihood: temperature %g K, want more than 0", d.TemperatureK)
	case !(d.ExposureS >= 0) || math.IsInf(d.ExposureS, 0):
		return fmt.Errorf("likelihood: exposure %g s, want 0 or more", d.ExposureS)
	}
	for i := 1; i < n; i++ {
		if gap := d.TimesS[i] - d.TimesS[i-1]; !(gap > 0) || gap < d.ExposureS*(1-1e-3) {
			return fmt.Errorf("likelihood: frame %d starts %g s after the one before, want more than 0 and at least the exposure %g s",
				i, gap, d.ExposureS)
		}
	}
	for _, t := range d.Tracks {
		if len(t.Amplitude) != n || len(t.NoiseVariance) != n {
			return fmt.Errorf("likelihood: mode of wavenumber %g/µm: %d amplitudes and %d noise variances, want %d",
				t.WavenumberPerUm, len(t.Amplitude), len(t.NoiseVariance), n)
		}
		if !(t.WavenumberPerUm > 0) {
			return fmt.Errorf("likelihood: wavenumber %g/µm, want more than 0", t.WavenumberPerUm)
		}
		for i := range n {
			if a := t.Amplitude[i]; math.IsNaN(a) || math.IsInf(a, 0) {
				return fmt.Errorf("likelihood: mode of wavenumber %g/µm, frame %d: amplitude %g", t.WavenumberPerUm, i, a)
			}
			if r := t.NoiseVariance[i]; !(r > 0) || math.IsInf(r, 0) {
				return fmt.Errorf("likelihood: mode of wavenumber %g/µm, frame %d: noise variance %g, want more than 0",
					t.WavenumberPerUm, i, r)
			}
		}
	}
	return nil
}

// ModeProcess returns the thermal process of a free bending mode: variance 1/(Lp·k⁴), µm³, and relaxation time
// ζ/(kT·Lp·k⁴), s, for a wavenumber in 1/µm, a persistence length in µm, a transverse drag
// per length in Pa·s and a temperature in K.
func ModeProcess(wavenumberPerUm, lpUm, dragPaS, temperatureK float64) Process {
	k2 := wavenumberPerUm * wavenumberPerUm
	v := 1 / (lpUm * k2 * k2)
	return Process{Variance: v, RelaxationS: dragPaS * v / (boltzmann * temperatureK * 1e18)}
}

// The parameters of the fit are logarithms: of Lp in µm, of the drag in Pa·s, of the noise scale.
const (
	paramLp = iota
	paramDrag
	paramNoise
	params
)

type vector [params]float64

// model is the log-likelihood as a function of the parameters.
type model struct {
	d        Data
	priorVar float64 // of the log noise scale
	scratch  []float64
}

// track returns the restricted log-likelihood of track i alone, the prior excluded.
func (m *model) track(i int, at vector) float64 {
	t := m.d.Tracks[i]
	p := ModeProcess(t.WavenumberPerUm, math.Exp(at[paramLp]), math.Exp(at[paramDrag]), m.d.TemperatureK)
	c := math.Exp(at[paramNoise])
	if m.scratch == nil {
		m.scratch = make([]float64, len(m.d.TimesS))
	}
	motion := m.d.MotionNoise * Hidden(p, m.d.ExposureS)
	for j, r := range t.NoiseVariance {
		m.scratch[j] = c*r + motion
	}
	return filter(p, m.d.Frames, t.Amplitude, m.scratch).restricted()
}

// value is the restricted log-likelihood of all tracks with the prior of the noise scale.
func (m *model) value(at vector) float64 {
	sum := -at[paramNoise] * at[paramNoise] / (2 * m.priorVar)
	for i := range m.d.Tracks {
		sum += m.track(i, at)
	}
	return sum
}
