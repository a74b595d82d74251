package trace

// Options are the choices for tracing one movie.
type Options struct {
	// PixelUm is the pixel size in the sample, µm; there is no default.
	PixelUm float64
	// MinLengthUm is the shortest filament wanted, µm. Zero means 2.
	MinLengthUm float64
	// StrengthLow and StrengthHigh are the ridge thresholds in standard deviations of the
	// ridge map's own noise: a filament is wherever the map is above the low one and
	// connected to a place above the high one. Zero means 4 and 6.
	StrengthLow, StrengthHigh float64
	// GapUm is the longest dark gap that is bridged within a filament, µm. Zero means 1.
	GapUm float64
}

func (o Options) withDefaults() Options {
	for _, d := range []struct {
		value    *float64
		fallback float64
	}{{&o.MinLengthUm, 2}, {&o.StrengthLow, 4}, {&o.StrengthHigh, 6}, {&o.GapUm, 1}} {
		if *d.value == 0 {
			*d.value = d.fallback
		}
	}
	return o
}
