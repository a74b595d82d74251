package likelihood

import (
	"fmt"
	"math"
)

// boltzmann is the Boltzmann constant, J/K, exact since the SI of 2019.
const boltzmann = 1.380649e-23

// Track is one mode through the movie: its wavenumber k in 1/µm, 0 for the two rigid modes of a rod in a tube, and for each frame the
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
	// MotionNoise is the share of the variance that a mode loses to the exposure which a frame is expected to show
	// again as white noise; 0 where frames are exact means over the exposure. [Options.MotionNoiseSD] says how well it is known.
	MotionNoise float64
	// Trend is the degree of a polynomial in time, of unknown coefficients, that is in every track: 0 for a constant, more where the stage drifts. With
	// n frames it must be below n-1.
	Trend  int
	Tracks []Track
}

// jitter is by what share of the exposure a frame may start too early: clocks of cameras and computers differ. Such
// frames count as following without a gap.
const jitter = 0.05

// check reports what keeps d from being fitted.
func (d Data) check() error {
	n := len(d.TimesS)
	switch {
	case n < 2:
		return fmt.Errorf("likelihood: %d frames, want 2 or more", n)
	case d.Trend < 0 || d.Trend > min(n-2, mostColumns-1):
		return fmt.Errorf("likelihood: trend of degree %d in %d frames, want 0 to %d", d.Trend, n, min(n-2, mostColumns-1))
	case len(d.Tracks) == 0:
		return fmt.Errorf("likelihood: no mode")
	case !(d.TemperatureK > 0) || math.IsInf(d.TemperatureK, 0):
		return fmt.Errorf("likelihood: temperature %g K, want more than 0", d.TemperatureK)
	case !(d.ExposureS >= 0) || math.IsInf(d.ExposureS, 0):
		return fmt.Errorf("likelihood: exposure %g s, want 0 or more", d.ExposureS)
	}
	for i := 1; i < n; i++ {
		if gap := d.TimesS[i] - d.TimesS[i-1]; !(gap > 0) || gap < d.ExposureS*(1-jitter) {
			return fmt.Errorf("likelihood: frame %d starts %g s after the one before, want more than 0 and at least the exposure %g s less %g %%",
				i, gap, d.ExposureS, 100*jitter)
		}
	}
	for _, t := range d.Tracks {
		if len(t.Amplitude) != n || len(t.NoiseVariance) != n {
			return fmt.Errorf("likelihood: mode of wavenumber %g/µm: %d amplitudes and %d noise variances, want %d",
				t.WavenumberPerUm, len(t.Amplitude), len(t.NoiseVariance), n)
		}
		if !(t.WavenumberPerUm >= 0) {
			return fmt.Errorf("likelihood: wavenumber %g/µm, want 0 or more", t.WavenumberPerUm)
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
	return HeldProcess(lpUm*k2*k2, dragPaS, temperatureK)
}

// HeldProcess is the process of a mode that a stiffness of kT·perUm3 holds: variance 1/perUm3, µm³, and relaxation time ζ/(kT·perUm3), s.
func HeldProcess(perUm3, dragPaS, temperatureK float64) Process {
	v := 1 / perUm3
	return Process{Variance: v, RelaxationS: dragPaS * v / (boltzmann * temperatureK * 1e18)}
}

// The parameters of the fit are logarithms: of Lp in µm, of the drag in Pa·s, of the factor on the predicted noise, of the
// factor on the expected motion noise, and of the tube. That is 1 + x, where x is the tube's stiffness over the first mode's own, γ/(κk₁⁴), 0 being a free
// filament; or, in a network, the tube's bulk rms in µm, which is what such data determine best.
const (
	paramLp = iota
	paramDrag
	paramNoise
	paramMotion
	paramTube
	params
)

type vector [params]float64

// model is the log-likelihood as a function of the parameters.
type model struct {
	d         Data
	noiseVar  float64 // prior variance of the log noise scale
	motionVar float64 // prior variance of the log factor on the motion noise
	first4    float64 // fourth power of the first bending mode's wavenumber, 1/µm⁴
	byRms     bool    // paramTube is the logarithm of the tube's rms, µm
	lpMean    float64 // prior of ln Lp
	lpVar     float64 // +Inf: none
	columns   [][]float64
	scratch   []float64
}

func newModel(d Data, o Options) *model {
	m := &model{d: d, noiseVar: o.NoiseScaleSD * o.NoiseScaleSD, motionVar: o.MotionNoiseSD * o.MotionNoiseSD, first4: math.Inf(1)}
	for _, t := range d.Tracks {
		if t.WavenumberPerUm > 0 {
			m.first4 = math.Min(m.first4, math.Pow(t.WavenumberPerUm, 4))
		}
	}
	m.byRms, m.lpVar = o.Network, math.Inf(1)
	if o.KnownLpUm > 0 {
		m.lpMean, m.lpVar = math.Log(o.KnownLpUm), o.KnownLpSD*o.KnownLpSD
	}
	if d.Trend > 0 {
		m.columns = polynomials(d.TimesS, d.Trend)
	}
	return m
}

// process is that of a mode at a place in the space of parameters.
func (m *model) process(wavenumberPerUm float64, at vector) Process {
	k4, lp := math.Pow(wavenumberPerUm, 4), math.Exp(at[paramLp])
	if m.byRms {
		return HeldProcess(lp*k4+TubePerUm3(math.Exp(at[paramTube]), lp), math.Exp(at[paramDrag]), m.d.TemperatureK)
	}
	return HeldProcess(lp*(k4+math.Expm1(at[paramTube])*m.first4), math.Exp(at[paramDrag]), m.d.TemperatureK)
}

// track returns the restricted log-likelihood of track i alone, the priors excluded.
func (m *model) track(i int, at vector) float64 {
	t := m.d.Tracks[i]
	p := m.process(t.WavenumberPerUm, at)
	c := math.Exp(at[paramNoise])
	if m.scratch == nil {
		m.scratch = make([]float64, len(m.d.TimesS))
	}
	motion := m.d.MotionNoise * math.Exp(at[paramMotion]) * Hidden(p, m.d.ExposureS)
	for j, r := range t.NoiseVariance {
		m.scratch[j] = c*r + motion
	}
	if m.columns != nil {
		return restrictedAbout(p, m.d.Frames, t.Amplitude, m.scratch, m.columns)
	}
	return filter(p, m.d.Frames, t.Amplitude, m.scratch).restricted()
}

// value is the restricted log-likelihood of all tracks with the priors.
func (m *model) value(at vector) float64 {
	sum := -at[paramNoise] * at[paramNoise] / (2 * m.noiseVar)
	if at[paramMotion] != 0 {
		sum -= at[paramMotion] * at[paramMotion] / (2 * m.motionVar)
	}
	if m.lpVar > 0 {
		sum -= math.Pow(at[paramLp]-m.lpMean, 2) / (2 * m.lpVar)
	}
	for i := range m.d.Tracks {
		sum += m.track(i, at)
	}
	return sum
}
