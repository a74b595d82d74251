package modes

import (
	"fmt"
	"math"

	"wend/modes/chain"
	"wend/modes/likelihood"
)

// Codes of a filament in a network.
const (
	QuantityTubeRms       = "tube_rms_um"
	QuantityTubeDiameter  = "tube_diameter_um"
	QuantityTubeStiffness = "tube_stiffness_N_per_m2"
	QuantityDeflection    = "deflection_um"
	QuantitySliding       = "sliding_um2_per_s"
	QuantityDisengagement = "disengagement_s"
	QuantityKurtosis      = "displacement_excess_kurtosis"
	QuantityExponent      = "transverse_exponent"

	MethodKnown    = "known"
	MethodInterior = "interior"
	MethodEnds     = "ends"
	MethodLags     = "lags"
)

// AnalyseNetwork says what the contours of one labelled filament among neighbours tell about the tube that they leave it and about its stiffness.
//
// The tube's axis, a smooth path, is laid through all contours, and the drift of the stage found along with it. Displacements across the axis go on the
// normal modes of a rod with free ends in a harmonic tube, of variance kT/(κk⁴+γ) and relaxation time ζ/(κk⁴+γ), the two rigid ones with k = 0 among them. Tube,
// stiffness, drag and noise are fitted by the exact likelihood of their amplitudes over time, about a polynomial in time that takes the drift. A persistence length
// known from free filaments enters as what it is; it never comes out as a measured one. Where an end is not seen the filament is a piece of a longer one, and the
// tube comes from places away from the ends. It never panics on what s holds.
func AnalyseNetwork(s Series, o Options) Result {
	nan := math.NaN()
	r := Result{LpUm: nan, LpLowUm: nan, LpHighUm: nan, Shapes: nan, Thermal: ThermalUnclear, Confinement: ConfinementUnclear,
		TangentFitLpUm: nan, TangentFitIntercept: nan, Tube: noTube()}
	if !s.FreeEnds {
		r.flag(FlagEnds)
	}
	if s.Processed {
		r.flag(FlagProcessed)
	}
	a := measure(s, o)
	if len(a.frames.TimesS) < fewestInTube {
		r.flag(FlagFewFrames)
		return r
	}
	if a.frames.ExposureS == 0 {
		r.flag(FlagNoBlur)
	}
	if a.fitted == 0 {
		r.flag(FlagShort)
		return r
	}
	if a.turns() > turnsFreely {
		// Nothing that turns so far lies in a tube: its bending alone says what holds it.
		free := Analyse(s, o)
		if free.Confinement == ConfinementUnclear {
			free.Confinement = ConfinementFree
		}
		return free
	}
	frame, ok := findTube(a.curves, a.frames.TimesS)
	if !ok {
		r.flag(FlagFit)
		return r
	}
	in := a.inTube(frame)
	known := likelihood.Options{}
	if s.KnownLpUm > 0 {
		known.KnownLpUm = s.KnownLpUm
		if s.KnownLpLowUm > 0 && s.KnownLpHighUm > s.KnownLpLowUm {
			known.KnownLpSD = math.Log(s.KnownLpHighUm/s.KnownLpLowUm) / (2 * 1.959964)
		}
		r.add(QuantityLp, MethodKnown, s.KnownLpUm, orNaN(s.KnownLpLowUm), orNaN(s.KnownLpHighUm), "given, not measured here")
	}
	lo := o.Likelihood
	lo.Network = true
	fit, err := likelihood.Fit(in.data, lo)
	if err != nil {
		r.flag(FlagFit)
		return r
	}
	r.stiffness(fit)
	if known.KnownLpUm > 0 {
		lo.KnownLpUm, lo.KnownLpSD = known.KnownLpUm, known.KnownLpSD
		if fit, err = likelihood.Fit(in.data, lo); err != nil {
			r.flag(FlagFit)
			return r
		}
	}
	t := in.theory(fit)
	r.Shapes = IndependentShapes(a.frames.TimesS, t.slowestS())
	if !(r.Shapes >= o.MinShapes) {
		r.flag(FlagFewShapes)
	}
	r.judgeTube(in, fit, t, o)
	r.tube(in, fit, t, s)
	r.motion(in, t, s)
	r.rejected(s)
	r.Tube.Axis = Curve{XUm: frame.x, YUm: frame.y}
	for i := range a.frames.TimesS {
		dx, dy, _ := frame.drift(i)
		x, y, _ := frame.drift(0)
		r.Tube.DriftXUm, r.Tube.DriftYUm = append(r.Tube.DriftXUm, dx-x), append(r.Tube.DriftYUm, dy-y)
	}
	return r
}

// fewestInTube is the number of frames below which there is no axis to move about.
const fewestInTube = 10

// turnsFreely is the root mean square turn, rad, of a filament as a whole beyond which it is in no tube.
const turnsFreely = 0.25

// turns is the root mean square angle by which the line between the ends turns about its mean and a drift.
func (a amplitudes) turns() float64 {
	var angle []float64
	for i, c := range a.curves {
		n := len(c.XUm) - 1
		now := math.Atan2(c.YUm[n]-c.YUm[0], c.XUm[n]-c.XUm[0])
		if i > 0 {
			now = angle[i-1] + math.Remainder(now-angle[i-1], 2*math.Pi)
		}
		angle = append(angle, now)
	}
	return math.Sqrt(about(angle, polynomialColumns(a.frames.TimesS, driftDegree)))
}

func orNaN(v float64) float64 {
	if v > 0 {
		return v
	}
	return math.NaN()
}

// inTube is a filament in the frame of its tube.
type inTube struct {
	amplitudes
	frame *tubeFrame
	data  likelihood.Data
	// Where the filament's ends are along the axis in each frame, µm, and how far across the axis its points are at equal shares of its length.
	start, end []float64
	across     [][]float64
}

const (
	rigidModes = 2
	tubePoints = 200 // places along the filament at which displacements are taken
)

// inTube puts the contours on the normal modes of a rod in the tube of f: the rigid ones from the displacement across the axis, the bending ones from the tangent
// against that of the axis, whose energy is exact where the displacement of a strongly tilted piece would leak from long waves into short ones.
func (a amplitudes) inTube(f *tubeFrame) inTube {
	in := inTube{amplitudes: a, frame: f}
	basis := newBasis(a.lengthUm, a.fitted)
	series := make([][]float64, rigidModes+a.fitted)
	for i, c := range a.curves {
		across := make([]float64, tubePoints)
		last := 0
		for j := range across {
			px, py, _, _ := a.chords[i].place(c, (float64(j)+0.5)/tubePoints)
			px, py = f.moved(i, px, py)
			if j == 0 {
				_, _, last = f.nearest(px, py)
			}
			_, across[j], last = f.foot(px, py, last)
		}
		in.across = append(in.across, across)
		n := len(c.XUm) - 1
		for e, where := range []*[]float64{&in.start, &in.end} {
			px, py := f.moved(i, c.XUm[e*n], c.YUm[e*n])
			s, _, _ := f.nearest(px, py)
			*where = append(*where, s)
		}
		for m := range rigidModes {
			sum := 0.0
			for j, y := range across {
				sum += y * tubeMode(m, (float64(j)+0.5)/tubePoints) * math.Sqrt(a.lengthUm) / tubePoints
			}
			series[m] = append(series[m], sum)
		}
		for m, b := range basis.amplitudesOf(f.against(i, c, a.chords[i])) {
			series[rigidModes+m] = append(series[rigidModes+m], b)
		}
	}
	in.data = likelihood.Data{Frames: a.frames, TemperatureK: a.temperatureK, MotionNoise: a.motionNoise, Trend: driftDegree}
	for m := range series {
		t := likelihood.Track{WavenumberPerUm: a.tubeWavenumber(m), Amplitude: series[m]}
		x := t.WavenumberPerUm * a.psfUm
		for _, p := range a.noiseUm3 {
			t.NoiseVariance = append(t.NoiseVariance, p*math.Exp(x*x))
		}
		in.data.Tracks = append(in.data.Tracks, t)
	}
	return in
}

// tubeWavenumber of mode m of a rod in a tube, from 0, the two rigid ones first, 1/µm.
func (a amplitudes) tubeWavenumber(m int) float64 {
	if m < rigidModes {
		return 0
	}
	return BeamWavenumber(m-rigidModes+1, a.lengthUm)
}

// tubeMode is mode m of a rod in a tube at the share x of a unit length: a shift, a turn, then the bending modes.
func tubeMode(m int, x float64) float64 {
	switch m {
	case 0:
		return 1
	case 1:
		return math.Sqrt(3) * (2*x - 1)
	}
	return chain.BeamMode(m-rigidModes+1, x)
}

// tubeTheory is a filament in its tube as the likelihood found it.
type tubeTheory struct {
	lpUm, perUm3, dragPaS, noiseScale, motionNoise float64
	temperatureK                                   float64
}

func (in inTube) theory(fit likelihood.Result) tubeTheory {
	return tubeTheory{fit.PeakLpUm, likelihood.TubePerUm3(fit.PeakTubeUm, fit.PeakLpUm), fit.DragPaS.Value, fit.NoiseScale, fit.MotionNoise, in.temperatureK}
}

// process of a wavenumber, 1/µm.
func (t tubeTheory) process(k float64) likelihood.Process {
	k2 := k * k
	return likelihood.HeldProcess(t.lpUm*k2*k2+t.perUm3, t.dragPaS, t.temperatureK)
}

// slowestS is the relaxation time of the rigid modes, the tube's own, s.
func (t tubeTheory) slowestS() float64 { return t.process(0).RelaxationS }

// deflectionUm is (κ/γ)^¼.
func (t tubeTheory) deflectionUm() float64 { return math.Pow(t.lpUm/t.perUm3, 0.25) }

// stiffness enters the persistence length that the movie itself gives, where it does: an interval closed on both sides and not wider than a factor of ten.
func (r *Result) stiffness(fit likelihood.Result) {
	const useless = 10
	low, high := fit.LpUm.Low, fit.LpUm.High
	note := "stiffness and tube together, from all normal modes; drag fitted"
	switch {
	case low > 0 && high < useless*low:
		r.LpUm, r.LpLowUm, r.LpHighUm, r.LpFrom = fit.LpUm.Value, low, high, FromLikelihood
		r.add(QuantityLp, MethodLikelihood, r.LpUm, low, high, note)
	default:
		r.flag(FlagLpHidden)
		r.add(QuantityLp, MethodLikelihood, math.NaN(), low, high, "the tube hides it: few modes lie above both the tube and the noise")
	}
}

// tube enters the tube's width, stiffness and deflection length, the widths along it and the spectrum.
func (r *Result) tube(in inTube, fit likelihood.Result, t tubeTheory, s Series) {
	kt := chain.KT(in.temperatureK) * 1e18 // N/m² per 1/µm³: J to J·µm³/m³
	w := fit.TubeRmsUm
	how := "stiffness fitted too"
	if s.KnownLpUm > 0 {
		how = "stiffness known"
	}
	method := MethodLikelihood
	note := fmt.Sprintf("harmonic tube, all normal modes over time, %s; bulk value per transverse direction", how)
	if !s.FreeEnds {
		// A piece of a longer filament: the modes of free ends do not hold, the places far from its ends do.
		w, method = in.interior(t), MethodInterior
		note = "places more than three deflection lengths from the ends; a piece of a longer filament"
	}
	if r.Confinement == ConfinementFree || r.Confinement == ConfinementPinned {
		return
	}
	r.add(QuantityTubeRms, method, w.Value, w.Low, w.High, note)
	r.add(QuantityTubeDiameter, method, 2*w.Value, 2*w.Low, 2*w.High, "twice the rms")
	r.Tube.RmsUm, r.Tube.RmsLowUm, r.Tube.RmsHighUm = w.Value, w.Low, w.High
	lpAt := func(rms float64) float64 { return fit.TubeProfile.LpNear(math.Log(rms)) }
	stiff := func(rms float64) float64 { return kt * likelihood.TubePerUm3(rms, lpAt(rms)) }
	deflection := func(rms float64) float64 {
		lp := lpAt(rms)
		return math.Pow(lp/likelihood.TubePerUm3(rms, lp), 0.25)
	}
	if method == MethodLikelihood {
		r.add(QuantityTubeStiffness, method, stiff(w.Value), stiff(w.High), stiff(w.Low), "γ of the energy ½γy² per length; limits along those of the width")
		r.add(QuantityDeflection, method, deflection(w.Value), math.Min(deflection(w.Low), deflection(w.High)), math.Max(deflection(w.Low), deflection(w.High)), "(κ/γ)^¼; limits along those of the width")
	}
	r.add(QuantityDrag, MethodLikelihood, fit.DragPaS.Value, fit.DragPaS.Low, fit.DragPaS.High, "transverse drag per length, fitted as one number for all modes")
	r.add(QuantitySlowest, MethodLikelihood, t.slowestS(), math.NaN(), math.NaN(), "relaxation time of the tube, ζ/γ")
	lp := fit.PeakLpUm
	switch {
	case s.KnownLpUm > 0:
		lp = s.KnownLpUm
	case r.LpUm > 0:
		lp = r.LpUm
	}
	r.meshes(w, lp, in.lengthUm, s)
	r.Tube.Places = in.places(t)
	r.Tube.Spectrum = in.spectrum(t)
	for m, row := range r.Tube.Spectrum {
		p := t.process(row.WavenumberPerUm)
		nan := math.NaN()
		mode := Mode{Mode: m - rigidModes + 1, WavelengthUm: nan, MeanAmplitude: mean(in.data.Tracks[m].Amplitude), Variance: row.Variance,
			NoiseVariance: row.NoiseVariance, ThermalVariance: row.TubeVariance, BlurFactor: row.BlurFactor, LpUm: nan, LpLowUm: nan, LpHighUm: nan,
			RelaxationS: p.RelaxationS, Shapes: IndependentShapes(in.frames.TimesS, p.RelaxationS), Used: true}
		if row.WavenumberPerUm > 0 {
			mode.WavelengthUm = 2 * math.Pi / row.WavenumberPerUm
		}
		r.Modes = append(r.Modes, mode)
	}
}

// spectrum compares the amplitudes with theory, free and in the tube.
func (in inTube) spectrum(t tubeTheory) []TubeMode {
	var out []TubeMode
	columns := polynomialColumns(in.frames.TimesS, driftDegree)
	for _, track := range in.data.Tracks {
		k := track.WavenumberPerUm
		p := t.process(k)
		row := TubeMode{WavenumberPerUm: k, TubeTheory: p.Variance, FreeTheory: math.Inf(1)}
		if k > 0 {
			row.FreeTheory = 1 / (t.lpUm * math.Pow(k, 4))
		}
		row.Variance = about(track.Amplitude, columns)
		row.NoiseVariance = t.noiseScale*mean(track.NoiseVariance) + t.motionNoise*likelihood.Hidden(p, in.frames.ExposureS)
		seen, left := mixture{frames: in.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}}.signal()
		row.BlurFactor = seen / p.Variance
		row.TubeVariance = (row.Variance - row.NoiseVariance) / (left / p.Variance)
		out = append(out, row)
	}
	return out
}

// about is the mean square of y about its mean and the columns, which are centred.
func about(y []float64, columns [][]float64) float64 {
	r := append([]float64(nil), y...)
	m := mean(r)
	for i := range r {
		r[i] -= m
	}
	// Gram–Schmidt on the few columns.
	var basis [][]float64
	for _, c := range columns {
		v := append([]float64(nil), c...)
		for _, b := range basis {
			d := dot(v, b)
			for i := range v {
				v[i] -= d * b[i]
			}
		}
		if n := math.Sqrt(dot(v, v)); n > 1e-12 {
			for i := range v {
				v[i] /= n
			}
			basis = append(basis, v)
		}
	}
	for _, b := range basis {
		d := dot(r, b)
		for i := range r {
			r[i] -= d * b[i]
		}
	}
	return dot(r, r) / float64(len(r))
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i := range a {
		s += a[i] * b[i]
	}
	return s
}
