package check

import (
	"fmt"
	"math"
	"slices"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/modes"
	"wend/trace"
)

// Conditions are what a synthetic movie of a filament needs to be like the measured one.
type Conditions struct {
	Movie    movie.Options
	Settings job.Settings
	// TrueLpUm is the persistence length that the movies have, µm: the estimate, or the bound where there is no more. OfBound says so.
	TrueLpUm float64
	OfBound  bool
}

// marginUm is the room around a filament, µm.
const marginUm = 4.0

// ConditionsOf reads the conditions of a filament off its results: length, light and its fading, background, width of the line, camera, bend, frames, interval, exposure and,
// as the truth, its persistence length and drag. The error says what is missing.
func ConditionsOf(r *job.Result, f *job.Filament) (Conditions, error) {
	c := Conditions{Settings: r.Settings, TrueLpUm: f.LpUm}
	if !(c.TrueLpUm > 0) {
		c.TrueLpUm, c.OfBound = f.LpLowUm, true
	}
	switch {
	case r.Settings.Setting != "free":
		return c, fmt.Errorf("setting %s: only free filaments can be checked", r.Settings.Setting)
	case !(c.TrueLpUm > 0):
		return c, fmt.Errorf("filament %d has no persistence length and no bound", f.ID)
	}
	o := movie.DefaultOptions()
	o.Filaments, o.LpUm, o.LengthUm = 1, c.TrueLpUm, f.LengthUm
	s := r.Settings
	o.PixelUm, o.IntervalS, o.ExposureS, o.TemperatureC = s.PixelUm, s.IntervalS, s.ExposureS, s.TemperatureC
	o.Frames = len(f.Contours)
	o.DragPaS = 0
	for _, e := range f.Estimates {
		if e.Quantity == modes.QuantityDrag && e.Value > 0 {
			o.DragPaS = e.Value
		}
	}
	width := r.Optics.LineWidthUm
	o.PSFUm = math.Sqrt(math.Max(0.25*width*width, width*width-s.PixelUm*s.PixelUm/12))
	early, late, all, background := light(f.Contours)
	if !(all > 0) {
		return c, fmt.Errorf("filament %d has no usable frame", f.ID)
	}
	o.PhotonsPerUm, o.BleachTo = all, 1
	if late < early {
		// The medians of the first and the last third stand a third of the movie from its ends' mean.
		o.BleachTo = math.Max(0.05, math.Pow(late/early, 1.5))
		o.PhotonsPerUm = early / math.Pow(late/early, 1./4)
	}
	o.BackgroundPerPx = background * s.PixelUm * s.PixelUm
	if g := r.Camera.GainCounts; g > 0 {
		o.Gain = g
		o.ReadNoiseE = math.Sqrt(math.Max(0, r.Camera.ReadVariance)) / g
	}
	o.Offset = math.Max(50, r.Camera.OffsetCounts)
	for _, m := range f.Modes {
		if m.Mode == 1 {
			// An arc of curvature c has a first cosine mode of √(2/L)·2cL²/π².
			l := f.LengthUm
			o.BendPerUm = math.Abs(m.MeanAmplitude) * math.Sqrt(l/2) * math.Pi * math.Pi / (2 * l * l)
		}
	}
	side := int(math.Ceil((f.LengthUm + 2*marginUm) / s.PixelUm))
	o.WidthPx, o.HeightPx = side, side
	o.WanderUm, o.TurnRad = 0.4, 0.5
	c.Movie = o
	c.Settings.FirstFrame, c.Settings.LastFrame, c.Settings.Channel = 0, o.Frames-1, 1
	return c, nil
}

// light is the median of photons per µm in the first and the last third of the used contours and in all, and that of the background per µm².
func light(contours []trace.Contour) (early, late, all, background float64) {
	var photons, floor []float64
	for i := range contours {
		if c := &contours[i]; c.Used() && c.PhotonsPerUm > 0 {
			photons, floor = append(photons, c.PhotonsPerUm), append(floor, c.BackgroundPerUm2)
		}
	}
	n := len(photons)
	if n == 0 {
		return math.NaN(), math.NaN(), math.NaN(), math.NaN()
	}
	third := max(1, n/3)
	return median(photons[:third]), median(photons[n-third:]), median(photons), math.Max(0, median(floor))
}

func median(x []float64) float64 {
	s := slices.Sorted(slices.Values(x))
	return (s[(len(s)-1)/2] + s[len(s)/2]) / 2
}
