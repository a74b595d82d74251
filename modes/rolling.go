package modes

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// A bent filament that rolls about its axis shows its own bend times the cosine of the roll, and mirrored when it has turned over. The amplitude of
// that one shape then goes to and fro between two ends and is often near them, where thermal bending is most often in the middle.
const (
	rollingKurtosis = -0.6 // excess kurtosis of the largest common motion of the modes below which a filament may roll; -1.5 is even rolling
	rollingZ        = -3   // the same in standard errors
	rollingShare    = 2    // variance of that motion over the thermal one from which it counts
)

// rolls looks for mirrored shapes in the long waves: the largest principal component of the amplitudes, each in units of its thermal standard
// deviation, that is large and flat-topped. shapes is how many independent ones there are; var(kurtosis) = 24/shapes.
func (a amplitudes) rolls(t theory, shapes float64) bool {
	n, frames := min(longWaves, a.fitted), len(a.frames.TimesS)
	if n < 1 || !(shapes > 1) {
		return false
	}
	x := mat.NewDense(frames, n, nil)
	for m := range n {
		expected, _, _ := a.modeSpread(m+1, t)
		mu := mean(a.b[m])
		for i, b := range a.b[m] {
			x.Set(i, m, (b-mu)/math.Sqrt(expected))
		}
	}
	var svd mat.SVD
	if !svd.Factorize(x, mat.SVDThin) {
		return false
	}
	var u mat.Dense
	svd.UTo(&u)
	large := math.Pow(svd.Values(nil)[0], 2) / float64(frames)
	m2, m4 := 0.0, 0.0
	for i := range frames {
		v := u.At(i, 0)
		m2 += v * v / float64(frames)
		m4 += v * v * v * v / float64(frames)
	}
	kurtosis := m4/(m2*m2) - 3
	return large > rollingShare && kurtosis < rollingKurtosis && kurtosis/math.Sqrt(24/shapes) < rollingZ
}
