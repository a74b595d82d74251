package groups

import "math"

// Status says what is known of a filament.
type Status int

// A filament was measured, has only a lower bound, or was refused.
const (
	Measured Status = iota
	Bound
	Refused
)

// Member is one filament of a condition: a value with its 95 % interval, or only the lower end of one, in any unit, all positive.
type Member struct {
	Preparation      string // empty: not known
	Status           Status
	Value, Low, High float64
}

// boundSD is the standard deviation of the logarithm that the lower flank of a bound is given: where the likelihood falls from its plateau, of
// which a table keeps only the place at the 95 % level.
const boundSD = 0.35

const z95 = 1.959964

// NewMember sorts a filament by what its numbers are: a value between finite limits, a bound with an infinite upper one, else refused.
func NewMember(preparation string, value, low, high float64) Member {
	m := Member{Preparation: preparation, Status: Refused, Value: value, Low: low, High: high}
	switch {
	case value > 0 && low > 0 && high > value && low < value && !math.IsInf(high, 1):
		m.Status = Measured
	case low > 0 && math.IsInf(high, 1):
		m.Status = Bound
	}
	return m
}

// sides returns the place of the likelihood's top in the logarithm and the standard deviations of its flanks: a normal with a width of its own on each side,
// or, for a bound, a plateau with a normal flank below.
func (m Member) sides() (top, below, above float64) {
	if m.Status == Bound {
		return math.Log(m.Low) + z95*boundSD, boundSD, math.Inf(1)
	}
	return math.Log(m.Value), math.Log(m.Value/m.Low) / z95, math.Log(m.High/m.Value) / z95
}

// spread returns ln ∫ L(θ) N(θ; c, sd²) dθ up to a constant. With L = exp(-d²/2a²) on one side of its top, that side's integral is
// a/√(a²+sd²)·exp(-c²/2(a²+sd²))·Φ(∓c·a/(sd·√(a²+sd²))), c from the top.
func (m Member) spread(c, sd float64) float64 {
	top, below, above := m.sides()
	c -= top
	side := func(a, c float64) float64 { // the side below the top; above by mirroring c
		if math.IsInf(a, 1) {
			if sd == 0 {
				if c < 0 {
					return 1
				}
				return 0
			}
			return normal(-c / sd)
		}
		if sd == 0 {
			if c < 0 {
				return math.Exp(-c * c / (2 * a * a))
			}
			return 0
		}
		both := math.Hypot(a, sd)
		return a / both * math.Exp(-c*c/(2*both*both)) * normal(-c*a/(sd*both))
	}
	v := side(below, c) + side(above, -c)
	if sd == 0 && c == 0 {
		v = 1
	}
	// Far out the sum is 0 in floating point; the flank goes on.
	if v < 1e-290 {
		a := math.Hypot(below, sd)
		if c > 0 {
			a = math.Hypot(above, sd)
		}
		return -c * c / (2 * a * a)
	}
	return math.Log(v)
}

// normal is the distribution function of the standard normal.
func normal(z float64) float64 { return math.Erfc(-z/math.Sqrt2) / 2 }

// width is the typical standard deviation of the logarithm.
func (m Member) width() float64 {
	if m.Status == Measured {
		return math.Log(m.High/m.Low) / (2 * z95)
	}
	return boundSD
}
