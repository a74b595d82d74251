package trace

import (
	"math"
	"strconv"
)

// Decimals and significant digits with which a contour is printed. An analysis sees the
// contours only after [Filament.Quantise], and so sees exactly what the tables hold: the same
// numbers come out when it is done again from the saved files.
const (
	DecimalsPositionUm = 5 // x, y, lengths and their errors in µm: a hundredth of a nanometre
	DecimalsArcUm      = 4 // arc length of a point, µm
	DecimalsErrorNm    = 2 // standard error of a point and width of the line, nm
	DecimalsTimeS      = 6 // time of a frame, s
	DigitsBrightness   = 5 // signal to noise, photons, background
	DigitsNoise        = 6 // noise density, µm³
)

// RoundDecimals rounds v to so many decimals (0 to 15), away from zero at a tie. The result is the
// float64 nearest to the decimal number, so that printing it with these decimals and reading it back
// gives the same bits, as long as |v|·10^decimals stays below 2^53. NaN and infinities are kept,
// and there is no negative zero.
func RoundDecimals(v float64, decimals int) float64 {
	scale := pow10[decimals]
	r := math.Round(v*scale) / scale
	if r == 0 {
		return 0
	}
	if math.IsInf(r, 0) || math.Abs(v)*scale >= 1<<53 {
		return v // as fine as a float64 gets
	}
	return r
}

// RoundDigits rounds v to so many significant digits (1 or more), as strconv does.
func RoundDigits(v float64, digits int) float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return v
	}
	r, _ := strconv.ParseFloat(strconv.FormatFloat(v, 'g', digits, 64), 64)
	if r == 0 {
		return 0
	}
	return r
}

var pow10 = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15}

// Quantise rounds every number of f to what the tables print. It alters f; a second call changes
// nothing. A contour that cannot be used gets a reason if it has none ([ReasonMissing] without
// points, [ReasonFit] with a single one), and the measures of one without points become NaN.
func (f *Filament) Quantise() {
	for i := range f.Contours {
		f.Contours[i].quantise()
	}
}

// QuantiseContours calls [Filament.Quantise] on every filament.
func QuantiseContours(filaments []Filament) {
	for i := range filaments {
		filaments[i].Quantise()
	}
}

// QuantiseTimes rounds the times of frames (s) in place to what the tables print.
func QuantiseTimes(timesS []float64) {
	for i, t := range timesS {
		timesS[i] = RoundDecimals(t, DecimalsTimeS)
	}
}

func (c *Contour) quantise() {
	if c.Count() == 0 {
		if c.Reason == "" {
			c.Reason = ReasonMissing
		}
		nan := math.NaN()
		*c = Contour{Frame: c.Frame, Reason: c.Reason, LengthUm: nan, LengthSEUm: nan, EndsSEUm: [2]float64{nan, nan},
			PhotonsPerUm: nan, BackgroundPerUm2: nan, SNR: nan, WidthUm: nan, NoiseUm3: nan}
		return
	}
	if c.Count() == 1 && c.Reason == "" {
		c.Reason = ReasonFit
	}
	for i := range c.Points {
		p := &c.Points[i]
		p.SUm = RoundDecimals(p.SUm, DecimalsArcUm)
		p.XUm = RoundDecimals(p.XUm, DecimalsPositionUm)
		p.YUm = RoundDecimals(p.YUm, DecimalsPositionUm)
		p.SEUm = RoundDecimals(p.SEUm*1000, DecimalsErrorNm) / 1000
	}
	c.LengthUm = RoundDecimals(c.LengthUm, DecimalsPositionUm)
	c.LengthSEUm = RoundDecimals(c.LengthSEUm, DecimalsPositionUm)
	for e := range c.EndsSEUm {
		c.EndsSEUm[e] = RoundDecimals(c.EndsSEUm[e], DecimalsPositionUm)
	}
	c.PhotonsPerUm = RoundDigits(c.PhotonsPerUm, DigitsBrightness)
	c.BackgroundPerUm2 = RoundDigits(c.BackgroundPerUm2, DigitsBrightness)
	c.SNR = RoundDigits(c.SNR, DigitsBrightness)
	c.WidthUm = RoundDecimals(c.WidthUm*1000, DecimalsErrorNm) / 1000
	c.NoiseUm3 = RoundDigits(c.NoiseUm3, DigitsNoise)
}
