package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/likelihood"
)

// judgeTube says whether the filament is confined, stuck or changing, and whether its motion is thermal.
func (r *Result) judgeTube(in inTube, fit likelihood.Result, t tubeTheory, o Options) {
	if math.Abs(math.Log(fit.NoiseScale)) > noiseFar*o.Likelihood.NoiseScaleSD {
		r.flag(FlagNoise)
	}
	first := math.Pow(BeamWavenumber(1, in.lengthUm), 4)
	stiffest := likelihood.TubePerUm3(fit.TubeRmsUm.Low, fit.TubeProfile.LpNear(math.Log(math.Max(fit.TubeRmsUm.Low, 1e-3))))
	switch {
	case fit.TubeRmsUm.Low > 0 && stiffest < freeTo*first*fit.PeakLpUm: // whatever holds it leaves its bending free
		r.Confinement = ConfinementFree
	case likelihood.FreeGain(fit) > tubeGain:
		r.Confinement = ConfinementTube
	}
	if r.Shapes >= o.MinShapes && in.stuck(t) < pinnedShare {
		r.flag(FlagPinned)
		r.Confinement = ConfinementPinned
		r.withhold("the filament is stuck")
		return
	}
	if in.changes(fit, o) {
		r.flag(FlagChanging)
	}
	g := agree(fit)
	if g.impossible() {
		r.Thermal = ThermalNo
		r.flag(FlagNotThermal)
		r.withhold("the motion is not thermal")
		return
	}
	if g.p < pUnequal {
		r.flag(FlagModesDisagree)
	}
	if g.p >= pDoubtful && g.dragP >= pDoubtful && !r.doubted() && in.mostExcess(t) <= mostExcess {
		r.Thermal = ThermalYes
	}
}

// mostExcess is the largest variance over that of theory that one of the longest modes, rigid ones included, may have: the upper end of a one-sided 95 % interval.
func (in inTube) mostExcess(t tubeTheory) float64 {
	most := 0.0
	for m, row := range in.spectrum(t) {
		if m >= rigidModes+longWaves {
			break
		}
		p := t.process(row.WavenumberPerUm)
		shapes := mixture{frames: in.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}, noise: row.NoiseVariance}.varianceShapes() - driftDegree - 1
		if !(shapes >= 1) {
			return math.Inf(1)
		}
		// The signal's variance has the error of the whole.
		sd := math.Sqrt(2/shapes) * (p.Variance*row.BlurFactor + row.NoiseVariance) / (p.Variance * row.BlurFactor)
		most = math.Max(most, row.TubeVariance/row.TubeTheory*math.Exp(oneSided95*sd))
	}
	return most
}

// stuck is the smallest variance of a place along the filament over what theory gives it.
func (in inTube) stuck(t tubeTheory) float64 {
	least := math.Inf(1)
	columns := polynomialColumns(in.frames.TimesS, driftDegree)
	for j := tubePoints / 25; j < tubePoints; j += tubePoints / 15 {
		expected := 0.0
		for m, track := range in.data.Tracks {
			p := t.process(track.WavenumberPerUm)
			_, left := mixture{frames: in.frames, weight: []float64{p.Variance}, relaxation: []float64{p.RelaxationS}}.signal()
			psi := tubeMode(m, (float64(j)+0.5)/tubePoints)
			expected += left * psi * psi / in.lengthUm
		}
		var y []float64
		for i := range in.across {
			y = append(y, in.across[i][j])
		}
		least = math.Min(least, about(y, columns)/expected)
	}
	return least
}

// changes says whether the halves of the movie can't have one tube, the stiffness being the same.
func (in inTube) changes(fit likelihood.Result, o Options) bool {
	n := len(in.frames.TimesS)
	if n < 4*fewestInTube {
		return false
	}
	lo := o.Likelihood
	lo.Network, lo.LpOnly, lo.KnownLpUm, lo.KnownLpSD, lo.From = true, true, fit.PeakLpUm, 0, &fit
	half := func(from, to int) (likelihood.Profile, bool) {
		d := in.data
		d.TimesS = in.frames.TimesS[from:to]
		d.Tracks = nil
		for _, t := range in.data.Tracks {
			d.Tracks = append(d.Tracks, likelihood.Track{WavenumberPerUm: t.WavenumberPerUm, Amplitude: t.Amplitude[from:to], NoiseVariance: t.NoiseVariance[from:to]})
		}
		r, err := likelihood.Fit(d, lo)
		return r.TubeProfile, err == nil
	}
	first, ok1 := half(0, n/2)
	second, ok2 := half(n/2, n)
	if !ok1 || !ok2 {
		return false
	}
	least := math.Inf(1)
	for x := math.Log(1e-3); x <= math.Log(30); x += 0.005 {
		least = math.Min(least, first.At(x)+second.At(x))
	}
	return 2*least > distuv.ChiSquared{K: 1}.Quantile(1-pChanging)
}
