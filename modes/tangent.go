package modes

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/modes/chain"
)

// theoryModes is how many beam modes stand for the whole chain where blur is corrected; finer ones count as averaged away
// or are summed in closed form.
const theoryModes = 32

// leastSeen is the share of the slope that the exposure must leave for the tangent correlation to give an estimate.
const leastSeen = 0.3

// tangentFit is the line -ln⟨cos⟩ = slope·s + intercept and what it says.
type tangentFit struct {
	slopePerUm, intercept float64
	lpUm, low, high       float64
	fromUm, toUm          float64
}

// tangentRow is a separation with what is needed to fit it.
type tangentRow struct {
	Separation
	steps int
	turns []float64 // of the beam modes, see turn
}

// tangentCorrelation returns the mean cosine of the turn between two places of the contour as a function of their separation, over frames and
// places, on a grid of equal steps near 0.1 µm.
//
// Its interval is that of a mean square with as many degrees of freedom as the beam modes behind it have independent
// shapes. Noise and intrinsic bend are in the numbers.
func tangentCorrelation(a amplitudes, t theory) (rows []tangentRow, stepUm float64) {
	cells := 0
	for _, ch := range a.chords {
		cells = max(cells, len(ch.angle))
	}
	cells = min(cells, 400)
	if cells < 4 {
		return nil, 0
	}
	stepUm = a.lengthUm / float64(cells)
	stride := max(1, cells/50)
	for j := stride; j <= cells*3/4; j += stride {
		rows = append(rows, tangentRow{Separation{SeparationUm: float64(j) * stepUm}, j, nil})
	}
	angle := make([]float64, cells)
	sums := make([]float64, len(rows))
	for _, ch := range a.chords {
		ch.resample(angle)
		for r := range rows {
			j := rows[r].steps
			s := 0.0
			for i := 0; i+j < cells; i++ {
				s += math.Cos(angle[i+j] - angle[i])
			}
			sums[r] += s / float64(cells-j)
			rows[r].Pairs += cells - j
		}
	}
	spread := a.turnSpreads(t)
	for r := range rows {
		row := &rows[r]
		for m := range max(theoryModes, a.held) {
			row.turns = append(row.turns, turn(m+1, row.SeparationUm, a.lengthUm))
		}
		row.CosMean = sums[r] / float64(len(a.chords))
		row.CosLow, row.CosHigh = math.NaN(), math.NaN()
		if !(row.CosMean > 0) {
			continue
		}
		variance := 0.0
		for m, s := range spread {
			d := row.turns[m]
			variance += s * d * d / 4
		}
		q := -math.Log(row.CosMean)
		if q > 0 && variance > 0 {
			low, high := scaledInterval(q, variance)
			row.CosLow, row.CosHigh = math.Exp(-high), math.Exp(-low)
		}
	}
	return rows, stepUm
}

// scaledInterval returns the 95 % interval of a positive q whose error has the given variance, as that of a mean square.
func scaledInterval(q, variance float64) (low, high float64) {
	nu := math.Min(1e6, math.Max(0.5, 2*q*q/variance))
	chi := distuv.ChiSquared{K: nu}
	return q * nu / chi.Quantile(0.975), q * nu / chi.Quantile(0.025)
}

// resample puts the chords' angle at the middles of equal cells of arc length into dst, linearly between chords' middles.
func (ch chords) resample(dst []float64) {
	j, last := 0, len(ch.angle)-1
	for i := range dst {
		s := (float64(i) + 0.5) / float64(len(dst)) * ch.total
		for j < last-1 && s > ch.start[j+1]+ch.length[j+1]/2 {
			j++
		}
		if last == 0 {
			dst[i] = ch.angle[0]
			continue
		}
		a, b := ch.start[j]+ch.length[j]/2, ch.start[j+1]+ch.length[j+1]/2
		f := math.Min(1, math.Max(0, (s-a)/(b-a)))
		dst[i] = ch.angle[j] + f*(ch.angle[j+1]-ch.angle[j])
	}
}

// turn returns the mean over places of [ψ_m′(u+s)-ψ_m′(u)]², 1/µm³: what a unit of b_m² adds to the mean-square turn over s.
func turn(m int, s, lengthUm float64) float64 {
	x := s / lengthUm
	const places = 24
	sum := 0.0
	for i := range places {
		u := (1 - x) * (float64(i) + 0.5) / places
		d := chain.BeamSlope(m, u+x) - chain.BeamSlope(m, u)
		sum += d * d
	}
	return sum / places / math.Pow(lengthUm, 3)
}

// turnSpreads returns for every resolved mode the variance of the error of its mean-square amplitude over the frames,
// the part from a constant bend b̄ included: Var(⟨b²⟩) + 4b̄²·Var(⟨b⟩).
func (a amplitudes) turnSpreads(t theory) []float64 {
	var out []float64
	for m := 1; m <= a.resolved; m++ {
		_, ofMean, ofSquare := a.modeSpread(m, t)
		b := mean(a.b[m-1])
		b2 := math.Max(0, b*b-ofMean)
		out = append(out, ofSquare+4*b2*ofMean)
	}
	return out
}

// fitTangent fits the line -ln⟨cos⟩ = s/(2Lp) + intercept from where blur and the smoothing of the contour no longer bend it
// to half the length. The intercept takes the noise and the turns that the exposure averaged away; what blur takes from the slope itself, and what noise
// adds to it, is computed from the fitted drag and put back. The separations are correlated: the interval comes from the modes behind
// them. An intrinsic bend stays in. It marks the rows it uses.
func fitTangent(a amplitudes, rows []tangentRow, t theory, o Options) tangentFit {
	nan := math.NaN()
	fit := tangentFit{nan, nan, nan, nan, nan, nan, nan}
	// The wavelength/2π at which relaxation takes one exposure.
	blurUm := 0.0
	if tau := a.relaxation(1, t); tau > 0 {
		blurUm = math.Pow(a.frames.ExposureS/tau, 0.25)
	}
	from := math.Min(math.Max(o.ResolutionPSF*a.psfUm, 2*blurUm), a.lengthUm/5)
	to := a.lengthUm / 2
	var sw, sx, sxx float64
	used := 0
	for i := range rows {
		r := &rows[i]
		r.Used = r.SeparationUm >= from && r.SeparationUm <= to && r.CosMean > 0.05
		if r.Used {
			used++
			w := 1 / (r.SeparationUm * r.SeparationUm)
			sw += w
			sx += w * r.SeparationUm
			sxx += w * r.SeparationUm * r.SeparationUm
		}
	}
	det := sw*sxx - sx*sx
	if used < 3 || !(det > 0) {
		for i := range rows {
			rows[i].Used = false
		}
		return fit
	}
	fit.fromUm, fit.toUm = from, to
	// slope = Σ c_r q_r with Σc = 0 and Σ c·s = 1.
	slope, level := 0.0, 0.0
	contrast := make([]float64, max(theoryModes, a.held))
	for _, r := range rows {
		if !r.Used {
			continue
		}
		w := 1 / (r.SeparationUm * r.SeparationUm)
		c := w * (sw*r.SeparationUm - sx) / det
		q := -math.Log(r.CosMean)
		slope += c * q
		level += w * (sxx - sx*r.SeparationUm) / det * q
		for m := range contrast {
			contrast[m] += c * r.turns[m] / 2
		}
	}
	fit.slopePerUm, fit.intercept = slope, level
	seen, noise, variance := 1.0, 0.0, 0.0
	spread := a.turnSpreads(t)
	for m, g := range contrast {
		k := BeamWavenumber(m+1, a.lengthUm)
		shown := 0.0
		if m < a.held {
			shown = chain.BlurFactor(a.frames.ExposureS / a.relaxation(k, t))
		}
		seen -= 2 * g * (1 - shown) / math.Pow(k, 4)
		if m < a.held {
			noise += g * a.noise(m+1, t)
		}
		if m < a.resolved {
			variance += g * g * spread[m]
		}
	}
	thermal := slope - noise
	if thermal > 0 && seen > leastSeen {
		low, high := scaledInterval(thermal, variance)
		fit.lpUm, fit.low, fit.high = seen/(2*thermal), seen/(2*high), seen/(2*low)
	}
	return fit
}
