package modes

import (
	"fmt"
	"math"
	"slices"
)

// motion enters what the filament does over time: displacements across and along against lag, the growth of the former, the shape of its distribution, and sliding.
func (r *Result) motion(in inTube, t tubeTheory, s Series) {
	from, to := in.inner(t)
	if to-from < 3 {
		from, to = tubePoints/3, 2*tubePoints/3
	}
	r.Tube.Lags = in.lags(from, to)
	r.displacements(in, t, from, to)
	r.growth(in, t)
	r.sliding(in, s)
}

// lags are the mean-square displacements over about equal steps of the logarithm of the lag, up to half the movie.
func (in inTube) lags(from, to int) []Lag {
	n := len(in.frames.TimesS)
	shortest := math.Inf(1)
	for i := 1; i < n; i++ {
		shortest = math.Min(shortest, in.frames.TimesS[i]-in.frames.TimesS[i-1])
	}
	stride := max(1, (to-from)/12)
	var out []Lag
	for frames := 1.0; int(frames) <= n/2; frames = math.Max(frames+1, frames*1.4) {
		lag := shortest * math.Floor(frames)
		row := Lag{LagS: lag}
		j := 0
		for i := range n {
			for j < n && in.frames.TimesS[j]-in.frames.TimesS[i] < lag*(1-0.01) {
				j++
			}
			if j == n {
				break
			}
			if in.frames.TimesS[j]-in.frames.TimesS[i] > lag+0.3*shortest {
				continue
			}
			row.Pairs++
			sum, places := 0.0, 0
			for k := from; k < to; k += stride {
				d := in.across[j][k] - in.across[i][k]
				sum, places = sum+d*d, places+1
			}
			row.TransverseMSDUm2 += sum / float64(places)
			d := (in.start[j] + in.end[j] - in.start[i] - in.end[i]) / 2
			row.LongitudinalMSDUm2 += d * d
		}
		if row.Pairs == 0 {
			continue
		}
		row.TransverseMSDUm2 /= float64(row.Pairs)
		row.LongitudinalMSDUm2 /= float64(row.Pairs)
		out = append(out, row)
	}
	return out
}

// displacements gathers displacements a µm apart, each about its place's mean, and enters the excess kurtosis of their distribution: 0 for a harmonic tube, above where its
// walls give way.
func (r *Result) displacements(in inTube, t tubeTheory, from, to int) {
	stride := max(1, int(math.Round(tubePoints/in.lengthUm)))
	m2, m4, n := 0.0, 0.0, 0.0
	columns := polynomialColumns(in.frames.TimesS, driftDegree)
	for k := from; k < to; k += stride {
		var y []float64
		for i := range in.across {
			y = append(y, in.across[i][k])
		}
		sd := math.Sqrt(about(y, columns))
		m := mean(y)
		for _, v := range y {
			r.Tube.DisplacementUm = append(r.Tube.DisplacementUm, v-m)
			x := (v - m) / sd
			m2, m4, n = m2+x*x, m4+x*x*x*x, n+1
		}
	}
	if n == 0 {
		return
	}
	kurtosis := (m4/n)/math.Pow(m2/n, 2) - 3
	mx := in.bulk(t)
	mx.noise = in.placeNoise(t)
	independent := mx.varianceShapes() * math.Max(1, math.Sqrt2/3*float64(to-from)/tubePoints*in.lengthUm/t.deflectionUm())
	se := math.Sqrt(24 / math.Max(4, independent))
	r.add(QuantityKurtosis, MethodInterior, kurtosis, kurtosis-1.959964*se, kurtosis+1.959964*se,
		"of the displacement across the axis: 0 in a harmonic tube, above 0 where rare excursions go further than a Gaussian's")
}

// growth enters the exponent with which the transverse displacement grows before its plateau: ¾ for a filament in a viscous medium.
func (r *Result) growth(in inTube, t tubeTheory) {
	if len(r.Tube.Lags) < 4 {
		return
	}
	noise := in.placeNoise(t)
	seen, _ := in.bulk(t).signal()
	plateau := 2 * seen
	var sx, sy, sxx, sxy, n float64
	for _, l := range r.Tube.Lags {
		v := l.TransverseMSDUm2 - 2*noise
		if v <= 0 || v > 0.3*plateau || v < 0.3*noise || l.LagS < in.frames.ExposureS {
			continue
		}
		x, y := math.Log(l.LagS), math.Log(v)
		sx, sy, sxx, sxy, n = sx+x, sy+y, sxx+x*x, sxy+x*y, n+1
	}
	if n < 3 {
		return
	}
	slope := (n*sxy - sx*sy) / (n*sxx - sx*sx)
	nan := math.NaN()
	r.add(QuantityExponent, MethodLags, slope, nan, nan, "growth of the transverse mean-square displacement below a third of its plateau; ¾ in a viscous medium, less where noise or exposure matter")
}

// sliding enters the diffusion along the axis from the middle of the two ends, where both are seen and the axis bends enough to tell drift of the stage from sliding: the
// covariance estimator (Vestergaard, Blainey and Flyvbjerg, Phys. Rev. E 89:022726 (2014), cited from memory), unbiased under noise and motion blur, with its variance for
// N steps, and the time to leave the tube, L²/(π²D) (Doi and Edwards, The Theory of Polymer Dynamics, 1986, from memory).
func (r *Result) sliding(in inTube, s Series) {
	nan := math.NaN()
	why := ""
	switch {
	case !s.FreeEnds:
		why = "not given: an end is not seen"
	case !in.frame.alongIsTold:
		why = "not given: in a straight tube sliding can't be told from drift of the stage"
	}
	if why != "" {
		r.add(QuantitySliding, MethodEnds, nan, nan, nan, why)
		r.add(QuantityDisengagement, MethodEnds, nan, nan, nan, why)
		return
	}
	var steps, times []float64
	for i := 1; i < len(in.start); i++ {
		steps = append(steps, (in.start[i]+in.end[i]-in.start[i-1]-in.end[i-1])/2)
		times = append(times, in.frames.TimesS[i]-in.frames.TimesS[i-1])
	}
	nominal := median(times)
	square, product, n, pairs := 0.0, 0.0, 0.0, 0.0
	for i, d := range steps {
		if math.Abs(times[i]/nominal-1) > 0.1 {
			continue
		}
		square, n = square+d*d, n+1
		if i > 0 && math.Abs(times[i-1]/nominal-1) < 0.1 {
			product, pairs = product+d*steps[i-1], pairs+1
		}
	}
	if n < fewestInTube || pairs < 2 {
		r.add(QuantitySliding, MethodEnds, nan, nan, nan, "not given: too few frames in a row")
		return
	}
	square, product = square/n, product/pairs
	d := square/(2*nominal) + product/nominal
	// R of a full exposure at the start of the interval: T/(3Δ)·½.
	motion := in.frames.ExposureS / (6 * nominal)
	noise := math.Max(0, motion*square+(2*motion-1)*product)
	d0 := math.Max(d, 1e-9)
	e := noise/(d0*nominal) - 2*motion
	se := d0 * math.Sqrt((6+4*e+2*e*e)/n+4*(1+e)*(1+e)/(n*n))
	low, high := math.Max(0, d-1.959964*se), math.Max(0, d+1.959964*se)
	if d > 0 && low > 0 { // positive: the logarithm is nearer to normal
		low, high = d*math.Exp(-1.959964*se/d), d*math.Exp(1.959964*se/d)
	}
	note := fmt.Sprintf("middle of the ends along the axis, %d steps; covariance estimator", int(n))
	if !(d > 0) || low == 0 {
		r.add(QuantitySliding, MethodEnds, nan, 0, high, note+"; not resolved, only the upper limit")
		r.add(QuantityDisengagement, MethodEnds, nan, in.lengthUm*in.lengthUm/(math.Pi*math.Pi*high), math.Inf(1), "L²/(π²D)")
		return
	}
	r.add(QuantitySliding, MethodEnds, d, low, high, note)
	leave := func(d float64) float64 { return in.lengthUm * in.lengthUm / (math.Pi * math.Pi * d) }
	r.add(QuantityDisengagement, MethodEnds, leave(d), leave(high), leave(low), "L²/(π²D): the time to slide out of the tube")
}

// median of the values, which are left as they were.
func median(x []float64) float64 {
	s := slices.Sorted(slices.Values(x))
	if len(s) == 0 {
		return math.NaN()
	}
	return (s[(len(s)-1)/2] + s[len(s)/2]) / 2
}
