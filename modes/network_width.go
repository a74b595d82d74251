package modes

import (
	"math"

	"wend/modes/likelihood"
)

// endsUm is how far from the ends of the filament their excess is gone, in deflection lengths.
const endsDeflections = 3

// bulk is the displacement of a place far from the ends: the waves of an infinite filament, their noise aside.
func (in inTube) bulk(t tubeTheory) mixture {
	l := t.deflectionUm()
	mx := mixture{frames: in.frames}
	const waves, dense = 80, 0.15 // waves, and their distance in 1/ℓ
	for j := range waves {
		q := dense * (float64(j) + 0.5) / l
		p := t.process(q)
		mx.weight = append(mx.weight, p.Variance*dense/(math.Pi*l))
		mx.relaxation = append(mx.relaxation, p.RelaxationS)
	}
	return mx
}

// placeNoise is the noise variance of a place of a contour, µm²: its density over the waves that contours hold.
func (in inTube) placeNoise(t tubeTheory) float64 {
	const steps = 200
	most := 2 * math.Pi / (6.8 * math.Max(in.psfUm, 1e-3))
	sum := 0.0
	for i := range steps {
		x := most * (float64(i) + 0.5) / steps * in.psfUm
		sum += math.Exp(x*x) * most / steps
	}
	return t.noiseScale * mean(in.noiseUm3) * sum / math.Pi
}

// inner are the indices of the places along the filament that its ends do not reach.
func (in inTube) inner(t tubeTheory) (from, to int) {
	off := int(math.Ceil(endsDeflections * t.deflectionUm() / in.lengthUm * tubePoints))
	return off, tubePoints - off
}

// interior is the bulk rms from the variance of the places that the ends do not reach, µm, free of noise, blur and drift. NaN where there is no such place.
func (in inTube) interior(t tubeTheory) likelihood.Interval {
	nan := math.NaN()
	from, to := in.inner(t)
	if to-from < 3 {
		return likelihood.Interval{Value: nan, Low: nan, High: nan}
	}
	columns := polynomialColumns(in.frames.TimesS, driftDegree)
	seen := 0.0
	for j := from; j < to; j++ {
		var y []float64
		for i := range in.across {
			y = append(y, in.across[i][j])
		}
		seen += about(y, columns) / float64(to-from)
	}
	mx := in.bulk(t)
	total := 0.0
	for _, w := range mx.weight {
		total += w
	}
	_, left := mx.signal()
	variance := (seen - in.placeNoise(t)) / (left / total)
	mx.noise = in.placeNoise(t)
	// Independent values of a displacement along a filament in a tube: √2/3 a deflection length.
	along := math.Max(1, math.Sqrt2/3*float64(to-from)/tubePoints*in.lengthUm/t.deflectionUm())
	shapes := (mx.varianceShapes() - driftDegree - 1) * along
	if !(variance > 0) || !(shapes > 1) {
		return likelihood.Interval{Value: nan, Low: nan, High: nan}
	}
	low, high := scaledInterval(variance, 2*math.Pow(seen/(left/total), 2)/shapes)
	return likelihood.Interval{Value: math.Sqrt(variance), Low: math.Sqrt(low), High: math.Sqrt(high)}
}

// places is the width along the axis, where a filament was in ten frames or more.
func (in inTube) places(t tubeTheory) []TubePlace {
	step := math.Max(0.5, in.frame.length()/60)
	mx := in.bulk(t)
	total := 0.0
	for _, w := range mx.weight {
		total += w
	}
	_, left := mx.signal()
	keep, noise := left/total, in.placeNoise(t)
	mx.noise = noise
	all := mx.varianceShapes()
	var out []TubePlace
	for s := step / 2; s < in.frame.length(); s += step {
		var y []float64
		columns := make([][]float64, driftDegree)
		whole := polynomialColumns(in.frames.TimesS, driftDegree)
		for i := range in.across {
			x := (s - in.start[i]) / (in.end[i] - in.start[i])
			if !(x >= 0 && x < 1) {
				continue
			}
			y = append(y, in.across[i][int(x*tubePoints)])
			for d := range columns {
				columns[d] = append(columns[d], whole[d][i])
			}
		}
		if len(y) < fewestInTube {
			continue
		}
		for d := range columns {
			m := mean(columns[d])
			for i := range columns[d] {
				columns[d][i] -= m
			}
		}
		shapes := all*float64(len(y))/float64(len(in.across)) - driftDegree - 1
		if !(shapes >= 1) {
			continue
		}
		seen := about(y, columns)
		variance := (seen - noise) / keep
		row := TubePlace{SUm: s, RmsUm: math.Sqrt(math.Max(0, variance)), RmsLowUm: math.NaN(), RmsHighUm: math.NaN(), NoiseUm: math.Sqrt(noise)}
		low, high := scaledInterval(seen, 2*seen*seen/shapes)
		row.RmsLowUm = math.Sqrt(math.Max(0, (low-noise)/keep))
		row.RmsHighUm = math.Sqrt(math.Max(0, (high-noise)/keep))
		out = append(out, row)
	}
	return out
}
