package tables

// Kind says in which column a code stands.
type Kind string

// The kinds of code.
const (
	KindFrame       Kind = "frame reason" // reason in frames.csv
	KindMode        Kind = "mode reason"  // reason in modes.csv
	KindFlag        Kind = "flag"         // flags in filaments.csv
	KindMethod      Kind = "method"       // method in estimates.csv, lp_from in filaments.csv
	KindThermal     Kind = "thermal"      // thermal in filaments.csv
	KindConfinement Kind = "confinement"  // confinement in filaments.csv
	KindEnd         Kind = "end"          // end_0 and end_1
)

// Code is a short stable code with what it means and, where something can be done, what to do.
type Code struct {
	Kind    Kind
	Code    string
	Meaning string
}

// Codes returns every code that may stand in the tables, by kind, in a fixed order.
func Codes() []Code { return append([]Code(nil), codes...) }

// Meaning returns the sentence for a code of a kind, and whether there is one.
func Meaning(kind Kind, code string) (string, bool) {
	for _, c := range codes {
		if c.Kind == kind && c.Code == code {
			return c.Meaning, true
		}
	}
	return "", false
}

var codes = []Code{
	{KindFrame, "border", "The filament touches the border of the image, so that its end is not seen; use a larger field or centre the filament."},
	{KindFrame, "length", "The traced length jumped away from the filament's own: part of it left the focus or the trace ran on; look at the frame before you use it."},
	{KindFrame, "crossing", "The filament crosses or touches itself or another one; dilute the sample if this is frequent."},
	{KindFrame, "faint", "The filament is too dim against the noise to be traced; use more light, a longer exposure or fewer frames before it bleaches."},
	{KindFrame, "ambiguous", "Several traces are equally near to where the filament was before, and none was chosen; shorten the frame interval or dilute the sample."},
	{KindFrame, "missing", "The filament was not found in this frame, though before and after it: mostly it left the focus for a moment."},
	{KindFrame, "fit", "The fit of the centreline did not converge; mostly the line is too dim, too short or too sharply bent there."},
	{KindFrame, "branched", "The bright line branches or closes on itself, so that there is no single path along it; two filaments may lie on top of each other."},
	{KindFrame, "wide", "The line is much wider than the others: two filaments lie side by side, or it is out of focus."},
	{KindFrame, "saturated", "Pixels of the filament are at the camera's limit, which flattens the profile and shifts the centreline; lower the exposure or the gain."},

	{KindMode, "noise", "The localisation noise is too large against this mode's thermal variance; more light brings more modes in."},
	{KindMode, "blur", "The mode relaxes within the exposure, so that most of its variance is averaged away; use a shorter exposure."},
	{KindMode, "resolution", "The wavelength comes near the width of the blurred line or the spacing of the points, which this microscope cannot resolve."},
	{KindMode, "few_shapes", "The mode went through too few independent shapes in the movie for its variance to say anything; record for longer."},
	{KindMode, "lower_bound", "The variance is not larger than the noise, so that this mode gives only a lower bound of the persistence length."},
	{KindMode, "confined", "A tube holds the mode back, so that its variance does not tell the persistence length on its own."},

	{KindFlag, "lower_bound", "The undulations are too small, or too few independent ones were seen, for an upper limit: only a lower bound of the persistence length is given; a longer filament, more light or a longer movie helps."},
	{KindFlag, "pinned", "A place along the filament moves less than its bending alone would move it: it sticks to the surface there, and no persistence length is given. Leave it out, and passivate the chamber better."},
	{KindFlag, "changing", "The first and the second half of the movie disagree: the filament stuck, broke, bundled or drifted out of focus; analyse the good part with --frames."},
	{KindFlag, "rolling", "A filament with a bend of its own turned over and shows mirrored shapes, which widens the variance of the long waves and makes it look softer; use a thinner chamber."},
	{KindFlag, "projection", "The chamber is deep enough for tilt and out-of-plane bending to matter, so that the planar theory gives too small a persistence length; use a thinner chamber or longer filaments."},
	{KindFlag, "processed", "The noise of neighbouring pixels is correlated: the images were denoised, resampled or compressed with loss, so that the errors cannot be trusted; go back to the raw files."},
	{KindFlag, "most_rejected", "More than two frames in three could not be used, and what is left may be a piece of the filament, so that no value is given: use more light, or see the reasons in frames.csv."},
	{KindFlag, "few_shapes", "The filament went through few independent shapes, so that the interval is wide however many frames there are; record for longer, not faster."},
	{KindFlag, "few_frames", "Too few frames could be used for an estimate; see the reasons in frames.csv."},
	{KindFlag, "short", "The filament is short against the optical resolution, so that at most a mode or two can be measured; take longer filaments."},
	{KindFlag, "border", "The filament touches the border of the image, so that an end is not seen and the theory of free ends does not hold; centre the filament."},
	{KindFlag, "ends", "An end of the filament is not seen well, so that its length and the lowest modes are uncertain."},
	{KindFlag, "not_thermal", "The bending modes differ beyond doubt in the persistence length or in the drag that they tell, which thermal bending does not do, so that no persistence length is given; look for flow, motors, sticking, or contours that are traced wrongly."},
	{KindFlag, "modes_disagree", "The bending modes do not tell the same persistence length, and the interval is widened by as much: a stiffness that depends on wavelength, a weak force, or contours traced wrongly in places; look at the mode spectrum."},
	{KindFlag, "confined", "The long waves are held back as in a tube, and the persistence length is fitted together with it: something surrounds the filament or holds it weakly; if it lies in a network, measure it with --setting network."},
	{KindFlag, "noise", "The noise of the contours is far from what light and camera predict, so that the errors cannot be trusted: spots, flicker, a wrong --gain, or images that were processed."},
	{KindFlag, "no_blur_correction", "The exposure was not given or was set to 0, so that no correction for motion during the exposure was made and the persistence length may be too large."},
	{KindFlag, "large_bends", "The filament bends so far that the small-angle dynamics no longer hold well, and the interval may be too narrow; a shorter exposure or shorter filaments help."},
	{KindFlag, "drag", "The fitted drag is far from that of a filament in water; the frame interval, the exposure or the thermal assumption may be wrong."},
	{KindFlag, "drag_limit", "An end of the interval rests on the range allowed for the drag, so that the interval may be too narrow on that side; a shorter frame interval lets the movie itself say what the drag is."},
	{KindFlag, "length_scatter", "The measured length scatters more than the light explains: in some frames the trace runs on into a spot or noise, or breaks off. Look at the frames; the persistence length may be too small."},
	{KindFlag, "methods_disagree", "A classic estimate and the recommended one exclude each other (estimates.csv). Where it is tangent or distance, mostly the filament is bent by itself, which they read as flexibility, or its length is off; where it is modes, look at the mode spectrum for the one that stands out."},
	{KindFlag, "lp_hidden", "The tube hides the filament's stiffness: too few modes lie above both the tube and the noise. The width is given; pass a persistence length known from free filaments (--known-lp-um) to narrow it."},
	{KindFlag, "fit", "A fit did not converge, and its estimate is left out."},

	{KindMethod, "likelihood", "Exact likelihood of the bending modes over time, with exposure, noise, drag and intrinsic shape taken into account: the recommended estimate."},
	{KindMethod, "modes", "Variances of the cosine modes of the tangent angle, corrected for noise, exposure and intrinsic shape."},
	{KindMethod, "tangent", "Decay of the tangent correlation along the filament, with the offset from localisation noise fitted."},
	{KindMethod, "distance", "Mean-square distance between the ends, against the contour length."},
	{KindMethod, "distribution", "Distribution of the distance between the ends over the frames, of a filament shorter than its persistence length."},
	{KindMethod, "known", "A stiffness that the user gave, measured elsewhere; not an estimate from this movie."},
	{KindMethod, "interior", "Places of the filament that lie more than three deflection lengths from its ends."},
	{KindMethod, "ends", "Middle of the two ends along the tube's axis, frame by frame, with the covariance estimator for diffusion under noise."},
	{KindMethod, "lags", "Mean-square displacement against lag time."},
	{KindMethod, "hinsch_2007", "Mesh size from rms = 0.32 ξ^(6/5) Lp^(-1/5) (Hinsch, Wilhelm and Frey 2007): long filaments, tightly entangled; the recommended relation. ξ = √(3/ρ)."},
	{KindMethod, "hinsch_2007_finite", "The same with a term for the filament's finite length, 0.31 ξ^(6/5) Lp^(-1/5) + 0.59 ξ²/L (coefficients from memory)."},
	{KindMethod, "concentration", "Mesh size expected from the concentration that was given; not an estimate from this movie."},
	{KindMethod, "theory", "Not an estimate: what theory expects for the sample as it was described."},
	{KindMethod, "bound", "The movie gives only a lower bound: lp_um is empty and lp_high_um is inf."},

	{KindThermal, "yes", "All bending modes agree on one persistence length and one drag, well enough to exclude half as much bending again of another kind in any of the four longest waves."},
	{KindThermal, "no", "The bending modes disagree beyond doubt, and no persistence length is given."},
	{KindThermal, "unclear", "The movie does not tell whether the bending is thermal: too few independent shapes to exclude anything else, or a flag speaks against it. The persistence length holds if it is."},

	{KindConfinement, "free", "A tube half as stiff as the slowest bending mode, or stiffer, is excluded by the modes."},
	{KindConfinement, "tube", "The long waves are held back as by a tube."},
	{KindConfinement, "pinned", "A place along the filament stays where it is: stuck, mostly to the surface."},
	{KindConfinement, "unclear", "The movie does not say whether the filament is confined."},

	{KindEnd, "free", "The end is seen."},
	{KindEnd, "border", "The end lies outside the image."},
	{KindEnd, "defocused", "The line fades out slowly at this end, which leaves the focus there."},
	{KindEnd, "hidden", "The end lies under another filament or a bright spot."},
}
