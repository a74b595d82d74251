package modes

import (
	"math"

	"wend/modes/chain"
)

// BeamWavenumber returns the wavenumber k (1/µm) of bending mode n, from 1, of a filament of lengthUm with free ends.
func BeamWavenumber(n int, lengthUm float64) float64 { return chain.BeamRoot(n) / lengthUm }

// table holds a function on [0, 1] by values and slopes at equal steps; between them it is interpolated by cubics.
type table struct {
	value, slope []float64
}

const tableCells = 1024

func newTable(f, derivative func(x float64) float64) table {
	t := table{make([]float64, tableCells+1), make([]float64, tableCells+1)}
	for i := range t.value {
		x := float64(i) / tableCells
		t.value[i], t.slope[i] = f(x), derivative(x)/tableCells
	}
	return t
}

func (t table) at(x float64) float64 {
	p := math.Min(math.Max(x, 0), 1) * tableCells
	i := min(int(p), tableCells-1)
	f := p - float64(i)
	g := 1 - f
	return t.value[i]*(1+2*f)*g*g + t.value[i+1]*(1+2*g)*f*f + f*g*(g*t.slope[i]-f*t.slope[i+1])
}

// BeamAmplitudes returns the amplitudes (µm^3/2) of the first count bending modes of a free filament in one frame,
// whatever the size of its bends: with θ = Σ b_n ψ_n′ the bending energy is ½κ Σ k_n⁴ b_n² exactly, and
//
//	b_n = k_n⁻⁴ ∫ θ′ ψ_n″ ds.
//
// The arc length of the points is scaled to lengthUm. A chord shows the mean of θ over it, so that the sum over turns at the points,
// Σ f(s_i)(θ_i − θ_{i−1}), is the integral of θ′ times the linear interpolation of f between points. That interpolation
// takes sin²(h)/h² from a wave and adds sinh²(h)/h² to an exponential of the same wavenumber, h = kΔ/2; f is ψ_n″ with
// its two parts divided by these. ψ_n″ vanishes at the ends, so the end points carry no weight of
// their own and white transverse noise of density P gives every b_n the variance P.
// NaN for every mode where c has fewer than three points, repeated points or numbers that are not finite.
func BeamAmplitudes(c Curve, lengthUm float64, count int) []float64 {
	return newBasis(lengthUm, count).amplitudes(c)
}

// basis is the bending modes of one filament: wavenumbers, 1/µm, and ψ and ψ″/k² at unit length.
type basis struct {
	lengthUm         float64
	k                []float64
	shape, curvature []table
}

func newBasis(lengthUm float64, count int) basis {
	b := basis{lengthUm: lengthUm}
	for n := 1; n <= count; n++ {
		root := chain.BeamRoot(n)
		b.k = append(b.k, BeamWavenumber(n, lengthUm))
		b.shape = append(b.shape, newTable(
			func(x float64) float64 { return chain.BeamMode(n, x) },
			func(x float64) float64 { return chain.BeamSlope(n, x) }))
		b.curvature = append(b.curvature, newTable(
			func(x float64) float64 { return chain.BeamCurvature(n, x) / (root * root) },
			func(x float64) float64 { return chain.BeamThird(n, x) / (root * root) }))
	}
	return b
}

func (b basis) amplitudes(c Curve) []float64 {
	ch, ok := newChords(c)
	if !ok || !(b.lengthUm > 0) {
		out := make([]float64, len(b.k))
		for i := range out {
			out[i] = math.NaN()
		}
		return out
	}
	return b.amplitudesOf(ch)
}

func (b basis) amplitudesOf(ch chords) []float64 {
	out := make([]float64, len(b.k))
	spacing := b.lengthUm / float64(len(ch.angle))
	for m, k := range b.k {
		h := k * spacing / 2
		wave, exponential := math.Pow(h/math.Sin(h), 2), math.Pow(h/math.Sinh(h), 2)
		fc, fs := (exponential+wave)/2, (exponential-wave)/2
		sum := 0.0
		for i := 1; i < len(ch.angle); i++ {
			x := ch.start[i] / ch.total
			sum += (fc*b.curvature[m].at(x) + fs*b.shape[m].at(x)) * (ch.angle[i] - ch.angle[i-1])
		}
		out[m] = sum / (k * k * math.Sqrt(b.lengthUm))
	}
	return out
}

// chords are the straight pieces between a curve's points: their angles unwrapped along the
// curve (rad), the arc length at which each starts (µm, measured along the chords) and its total.
type chords struct {
	angle, start, length []float64
	total                float64
}

// newChords reports false for fewer than three points, repeated points or numbers that are not finite.
func newChords(c Curve) (chords, bool) {
	n := len(c.XUm)
	if n < 3 || len(c.YUm) != n {
		return chords{}, false
	}
	ch := chords{angle: make([]float64, n-1), start: make([]float64, n-1), length: make([]float64, n-1)}
	for i := range n - 1 {
		dx, dy := c.XUm[i+1]-c.XUm[i], c.YUm[i+1]-c.YUm[i]
		h := math.Hypot(dx, dy)
		if !(h > 0) || math.IsInf(h, 0) {
			return chords{}, false
		}
		ch.angle[i], ch.start[i], ch.length[i] = math.Atan2(dy, dx), ch.total, h
		ch.total += h
		if i > 0 {
			turn := math.Remainder(ch.angle[i]-ch.angle[i-1], 2*math.Pi)
			ch.angle[i] = ch.angle[i-1] + turn
		}
	}
	return ch, true
}
