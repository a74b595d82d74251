package trace

import "wend/imaging"

// knotChoices are the distances between knots that are tried, in line widths. With fewer than three
// the Gaussian has wiped out what the knots could show; with more than eight a filament's
// bending would be too.
var knotChoices = []float64{3, 3.5, 4, 5, 6, 8}

// knotFits is about how many fits each choice is tried on.
const knotFits = 36

// chooseKnots returns the distance between knots, in line widths, with the least expected error of the
// centreline: the least χ² + 2·(number of coefficients), Mallows, Technometrics 15:661 (1973) (cited
// from memory), summed over lines and frames. Where there is light enough, or bends are sharp, the
// knots are close; where short waves are lost in the noise or blurred by the exposure, they are far
// apart and keep that noise out. lines is how many fits the frames give in all.
func chooseKnots(frames []imaging.Frame, o Options, c Conditions, lines int) (float64, error) {
	if lines == 0 {
		return knotChoices[len(knotChoices)/2], nil
	}
	frames = spreadOut(frames, max(2, len(frames)*knotFits/lines))
	best, least := 0.0, 0.0
	scale := 1.0
	for k, knots := range knotChoices {
		c.KnotWidths = knots
		tracer, err := NewTracer(o, c)
		if err != nil {
			return 0, err
		}
		var chi2, pixels, coefficients float64
		tracer.observe = func(f *fitter, r fitted) {
			chi2 += f.chi2
			pixels += float64(len(f.pixels))
			coefficients += float64(f.size)
		}
		for i := range frames {
			if _, err := tracer.Frame(frames[i], i); err != nil {
				return 0, err
			}
		}
		if k == 0 && pixels > coefficients {
			// What even the finest knots do not explain is noise or a wrong model, for all alike.
			scale = max(chi2/(pixels-coefficients), 0.5)
		}
		// The choices see nearly the same pixels; a pixel more adds one to χ² on average.
		cost := chi2/scale - pixels + 2*coefficients
		if k == 0 || cost < least {
			best, least = knots, cost
		}
	}
	return best, nil
}
