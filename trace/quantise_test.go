package trace

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// What is printed with the stated decimals and read back must be the very bits in memory.
func TestRoundDecimalsSurvivesPrinting(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for i := 0; i < 20000; i++ {
		v := (rng.Float64() - 0.5) * math.Pow(10, float64(rng.IntN(9)-4))
		for _, decimals := range []int{DecimalsPositionUm, DecimalsArcUm, DecimalsErrorNm, DecimalsTimeS} {
			r := RoundDecimals(v, decimals)
			back, err := strconv.ParseFloat(strconv.FormatFloat(r, 'f', decimals, 64), 64)
			if err != nil || math.Float64bits(back) != math.Float64bits(r) {
				t.Fatalf("RoundDecimals(%v, %d) = %v, read back %v (%v)", v, decimals, r, back, err)
			}
			if d := math.Abs(r - v); !(d <= 0.5000001*math.Pow(10, -float64(decimals))) {
				t.Fatalf("RoundDecimals(%v, %d) moved by %g", v, decimals, d)
			}
			if RoundDecimals(r, decimals) != r {
				t.Fatalf("RoundDecimals(%v, %d) is not a fixed point", r, decimals)
			}
		}
		d := RoundDigits(v, DigitsNoise)
		if back, _ := strconv.ParseFloat(strconv.FormatFloat(d, 'g', DigitsNoise, 64), 64); back != d {
			t.Fatalf("RoundDigits(%v) = %v, read back %v", v, d, back)
		}
	}
}

func TestRoundKeepsWhatIsNotANumber(t *testing.T) {
	if !math.IsNaN(RoundDecimals(math.NaN(), 3)) || !math.IsNaN(RoundDigits(math.NaN(), 3)) {
		t.Error("NaN was not kept")
	}
	if !math.IsInf(RoundDecimals(math.Inf(-1), 3), -1) || !math.IsInf(RoundDigits(math.Inf(1), 3), 1) {
		t.Error("an infinity was not kept")
	}
	if math.Signbit(RoundDecimals(-1e-9, 5)) {
		t.Error("a negative zero was made")
	}
	if v := 1e300; RoundDecimals(v, 15) != v {
		t.Error("a huge number was altered")
	}
}

func TestQuantiseTwiceIsOnce(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	f := Filament{ID: 1, First: 3, Last: 5, Contours: []Contour{{Frame: 3}, {Frame: 4}, {Frame: 5, SNR: 7}}}
	for k := 0; k < 50; k++ {
		f.Contours[1].Points = append(f.Contours[1].Points, Point{SUm: 0.1 * float64(k), XUm: rng.Float64() * 50, YUm: rng.Float64() * 50, SEUm: rng.Float64() * 0.02})
	}
	c := &f.Contours[1]
	c.LengthUm, c.LengthSEUm, c.SNR, c.PhotonsPerUm, c.BackgroundPerUm2, c.WidthUm, c.NoiseUm3 = 4.9123456789, 0.0123456789, 8.123456, 612.34567, 689.12345, 0.13412345, 1.2345678e-5
	f.Quantise()
	first := append([]Point(nil), f.Contours[1].Points...)
	firstContour := f.Contours[1]
	f.Quantise()
	for i, p := range f.Contours[1].Points {
		if p != first[i] {
			t.Fatalf("point %d: %v after the second call, %v after the first", i, p, first[i])
		}
	}
	if c.WidthUm != firstContour.WidthUm || c.NoiseUm3 != firstContour.NoiseUm3 || c.LengthUm != 4.91235 {
		t.Errorf("a second call changed the contour: %+v", *c)
	}
	if f.Contours[0].Reason != ReasonMissing || !math.IsNaN(f.Contours[2].SNR) {
		t.Errorf("contours without points: reason %q, SNR %v, want %q and NaN", f.Contours[0].Reason, f.Contours[2].SNR, ReasonMissing)
	}
	if !f.Contours[1].Used() {
		t.Error("a good contour is no longer used")
	}
}
