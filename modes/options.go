package modes

import "wend/modes/likelihood"

// Options of [Analyse].
type Options struct {
	// MaxModes is how many bending modes are fitted at most.
	MaxModes int
	// ResolutionPSF is the shortest wavelength of a mode that is used, in standard deviations of the line's profile.
	ResolutionPSF float64
	// ContourPSF is the shortest wavelength that a contour holds at all, signal or noise, in the same unit.
	ContourPSF float64
	// MinShapes is the number of independent shapes of the slowest mode below which the result is flagged.
	MinShapes float64
	// MinModeShapes is the number of independent shapes that a cosine mode needs to be used.
	MinModeShapes float64
	// MinBlurFactor is the least share of its variance that a cosine mode must keep through the exposure to be used.
	MinBlurFactor float64
	// RadiusUm is the radius of the thinnest filament expected, µm: for the drag in water that a fitted drag is compared with.
	RadiusUm float64
	// Likelihood are the options of the fit.
	Likelihood likelihood.Options
}

// DefaultOptions: twelve modes of 7.5 line widths or more (2.2 times the spacing of the knots that the contours were fitted with,
// 2 being what such a curve can follow);
// ten shapes; a cosine mode needs four shapes and a fifth of its variance; a radius of 4 nm, that of actin.
func DefaultOptions() Options {
	return Options{MaxModes: 12, ResolutionPSF: 7.5, ContourPSF: 6.8, MinShapes: 10, MinModeShapes: 4, MinBlurFactor: 0.2, RadiusUm: 0.004,
		Likelihood: likelihood.DefaultOptions()}
}
