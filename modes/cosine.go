package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/chain"
)

// cosineRow is a cosine mode with what the combined estimate needs of it.
type cosineRow struct {
	Mode
	gain float64 // expected variance about the time mean, noise excluded, over (L/nπ)²/Lp
	free float64 // (L/nπ)², µm²
	// The beam modes behind it: their shares of the free variance, and relaxation times times Lp for a drag of 1 Pa·s.
	share, slowness []float64
	keeps           float64 // gain over the blurred shares: what the subtracted mean leaves
}

// gainAt is gain for another persistence length, µm, and drag, Pa·s, and exposure in s; what the subtracted mean leaves is held.
func (r cosineRow) gainAt(lpUm, dragPaS, exposureS float64) float64 {
	if len(r.share) == 0 {
		return r.gain
	}
	sum := 0.0
	for i, w := range r.share {
		sum += w * chain.BlurFactor(exposureS*lpUm/(dragPaS*r.slowness[i]))
	}
	return r.keeps * sum
}

// cosineModes returns the cosine modes of the tangent angle, a_n = √(2/L)∫θ cos(nπs/L) ds, n from 1.
//
// Each is made of the resolved beam modes, a_n = Σ c_nm b_m/L, whose noise is known without a term from the end points; the few per cent
// of its thermal variance that stand in finer beam modes are put back in the gain. The noise variance is the predicted one times the
// fitted noise scale. Variance and mean are over the frames; the thermal variance is corrected for noise,
// exposure and the subtracted mean, of which correlated frames leave less than independent ones.
func cosineModes(a amplitudes, t theory, o Options) []cosineRow {
	n := float64(len(a.frames.TimesS))
	var rows []cosineRow
	last := a.fitted
	if a.fitted == a.resolved {
		last = a.resolved + 2 // shown, not used
	}
	for c := 1; c <= last; c++ {
		q := float64(c) * math.Pi / a.lengthUm
		row := cosineRow{free: 1 / (q * q)}
		row.Mode.Mode, row.WavelengthUm = c, 2*math.Pi/q
		mix := mixture{frames: a.frames}
		series := make([]float64, len(a.frames.TimesS))
		noise, kept := 0.0, 0.0
		for m := 1; m <= max(a.resolved, c); m++ {
			w := chain.CosineMixture(c, m) / a.lengthUm
			if w == 0 {
				continue
			}
			for i, b := range a.b[m-1] {
				series[i] += w * b
			}
			k := a.k[m-1]
			share := w * w / (math.Pow(k, 4) * row.free)
			kept += share
			mix.weight = append(mix.weight, share)
			mix.relaxation = append(mix.relaxation, a.relaxation(k, t))
			row.share = append(row.share, share)
			row.slowness = append(row.slowness, a.relaxation(k, theory{lpUm: 1, dragPaS: 1}))
			noise += w * w * a.noise(m, t)
		}
		mix.noise = noise * t.lpUm / row.free
		visible, about := mix.signal()
		row.gain = about
		if visible > 0 {
			row.keeps = about / visible
		}
		row.BlurFactor = visible / kept
		row.MeanAmplitude = mean(series)
		for _, x := range series {
			row.Variance += (x - row.MeanAmplitude) * (x - row.MeanAmplitude) / n
		}
		row.NoiseVariance = noise * (1 - 1/n)
		row.ThermalVariance = (row.Variance - row.NoiseVariance) / row.gain
		row.Shapes = math.Max(0, mix.varianceShapes()-1)
		row.LpUm, row.LpLowUm, row.LpHighUm = math.NaN(), math.NaN(), math.NaN()
		if row.Shapes > 0 {
			row.LpUm, row.LpLowUm, row.LpHighUm = row.persistence()
		}
		row.RelaxationS = math.NaN()
		row.Reason = row.whyNot(a, t, o, noise)
		row.Used = row.Reason == ""
		rows = append(rows, row)
	}
	return rows
}

// persistence turns the variance into a persistence length, µm, with the interval of a variance of Shapes independent values.
func (r cosineRow) persistence() (value, low, high float64) {
	chi := distuv.ChiSquared{K: r.Shapes}
	of := func(variance float64) float64 {
		if excess := variance - r.NoiseVariance; excess > 0 && r.gain > 0 {
			return r.free * r.gain / excess
		}
		return math.Inf(1)
	}
	value = of(r.Variance)
	if math.IsInf(value, 1) {
		value = math.NaN()
	}
	low, high = of(r.Variance*r.Shapes/chi.Quantile(0.025)), of(r.Variance*r.Shapes/chi.Quantile(0.975))
	if math.IsInf(low, 1) {
		low = math.NaN()
	}
	return value, low, high
}

// whyNot decides from what is expected, not from the variance found, so that the choice does not bend the estimate.
func (r cosineRow) whyNot(a amplitudes, t theory, o Options, noise float64) string {
	signal := r.free * r.gain / t.lpUm
	switch {
	case r.Mode.Mode > a.resolved:
		return ReasonResolution
	case t.lpUnresolved:
		if r.Variance <= r.NoiseVariance {
			return ReasonLowerBound
		}
		return ReasonNoise
	case r.BlurFactor < o.MinBlurFactor:
		return ReasonBlur
	case !(r.Shapes >= o.MinModeShapes):
		return ReasonFewShapes
	case signal < noise:
		return ReasonNoise
	}
	return ""
}

// combineModes returns the persistence length, µm, that makes the variances of the used modes most likely, each
// being V·χ²_ν/ν with ν shapes, with the interval where the log-likelihood has dropped by half the χ² quantile. The blur follows from the
// given drag, Pa·s, and exposure, s. NaN without a used mode.
func combineModes(rows []cosineRow, dragPaS, exposureS float64) (value, low, high float64, used int) {
	f := func(x float64) float64 {
		sum := 0.0
		for _, r := range rows {
			if r.Used {
				v := r.free*r.gainAt(math.Exp(x), dragPaS, exposureS)*math.Exp(-x) + r.NoiseVariance
				sum -= 0.5 * r.Shapes * (math.Log(v) + r.Variance/v)
			}
		}
		return sum
	}
	for _, r := range rows {
		if r.Used {
			used++
		}
	}
	if used == 0 {
		return math.NaN(), math.NaN(), math.NaN(), 0
	}
	const floor, ceiling, step = -7.0, 16.2, 0.1
	best, top := floor, math.Inf(-1)
	for x := floor; x <= ceiling; x += step {
		if v := f(x); v > top {
			best, top = x, v
		}
	}
	lo, hi := best-step, best+step
	for range 40 {
		a, b := lo+(hi-lo)/3, hi-(hi-lo)/3
		if f(a) < f(b) {
			lo = a
		} else {
			hi = b
		}
	}
	best = (lo + hi) / 2
	top = f(best)
	level := top - distuv.ChiSquared{K: 1}.Quantile(0.95)/2
	cross := func(end float64) float64 {
		in, out := best, end
		if f(out) > level {
			return math.Copysign(math.Inf(1), end-best)
		}
		for range 60 {
			mid := (in + out) / 2
			if f(mid) > level {
				in = mid
			} else {
				out = mid
			}
		}
		return in
	}
	const h = 1e-3
	low, high = math.Exp(cross(floor)), math.Exp(cross(ceiling))
	if math.IsInf(high, 1) {
		return math.NaN(), low, high, used
	}
	// A logarithm of a variance from ν values lies 1/ν low.
	if c := -(f(best+h) - 2*top + f(best-h)) / (h * h); c > 0 {
		best -= 0.5 / c
	}
	return math.Max(math.Exp(best), low), low, high, used
}
