package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables"
)

// The ways in which a filament's persistence length may come out.
const (
	lpMeasured = iota
	lpBound
	lpNone
)

func outcome(f *job.Filament) int {
	switch {
	case positive(f.LpUm):
		return lpMeasured
	case positive(f.LpLowUm) && math.IsInf(f.LpHighUm, 1):
		return lpBound
	}
	return lpNone
}

// answer is the filament's result in one sentence.
func answer(f *job.Filament) string {
	frames := fmt.Sprintf("from %d of %s", f.FramesUsed, plural(len(f.Contours), "frame", "frames"))
	if positive(f.Shapes) {
		frames += fmt.Sprintf(" that show about %s of its slowest mode", plural(int(math.Round(f.Shapes)), "independent shape", "independent shapes"))
	}
	if positive(f.Tube.RmsUm) {
		return tubeAnswer(f, frames)
	}
	v := roundInterval(f.LpUm, f.LpLowUm, f.LpHighUm)
	switch outcome(f) {
	case lpMeasured:
		s := fmt.Sprintf("the persistence length is %s µm", v.Value)
		if v.Interval() != none {
			s += fmt.Sprintf(" (95 %% interval %s µm)", v.Interval())
		}
		return s + ", " + frames + "."
	case lpBound:
		return fmt.Sprintf("the persistence length is at least %s µm (97.5 %%), %s; the movie sets no upper limit.", v.Low, frames)
	}
	why := "the movie does not allow an estimate"
	switch {
	case f.Thermal == "no":
		why = "the fluctuations do not agree with thermal ones"
	case f.Confinement == "pinned":
		why = "the filament is stuck"
	}
	if f.FramesUsed == 0 {
		why = "no frame could be used"
	}
	if len(f.Flags) > 0 {
		why += " (" + strings.Join(f.Flags, ", ") + ")"
	}
	return "no persistence length is given: " + why + "."
}

// tubeAnswer is answer for a filament in a tube.
func tubeAnswer(f *job.Filament, frames string) string {
	t := &f.Tube
	w := roundInterval(t.RmsUm, t.RmsLowUm, t.RmsHighUm)
	s := fmt.Sprintf("the tube leaves it an rms displacement of %s µm in each transverse direction (95 %% interval %s µm; diameter %s µm as twice the rms)",
		w.Value, w.Interval(), digits(2*t.RmsUm, 2))
	if positive(f.LpUm) {
		v := roundInterval(f.LpUm, f.LpLowUm, f.LpHighUm)
		s += fmt.Sprintf("; its persistence length, fitted together with the tube, is %s µm (%s µm)", v.Value, v.Interval())
	} else {
		s += "; the tube hides its persistence length"
	}
	if positive(t.MeshUm) {
		v := roundInterval(t.MeshUm, t.MeshLowUm, t.MeshHighUm)
		s += fmt.Sprintf("; that width means a mesh of %s µm (%s µm, statistical) by %s", v.Value, v.Interval(), t.MeshFrom)
	}
	return s + ", " + frames + "."
}

// overall is the answer for the whole stack in one sentence.
func overall(r *job.Result) string {
	var values []float64
	count := [3]int{}
	for i := range r.Filaments {
		f := &r.Filaments[i]
		count[outcome(f)]++
		if outcome(f) == lpMeasured {
			values = append(values, f.LpUm)
		}
	}
	if len(r.Filaments) == 0 {
		return "No filament was found in this stack."
	}
	s := fmt.Sprintf("%s: a persistence length for %s", plural(len(r.Filaments), "filament", "filaments"), ofAll(count[lpMeasured], len(r.Filaments)))
	if len(values) > 1 {
		slices.Sort(values)
		median := (values[(len(values)-1)/2] + values[len(values)/2]) / 2
		s += fmt.Sprintf(" (median %s µm, from %s to %s µm)", digits(median, 3), digits(values[0], 3), digits(values[len(values)-1], 3))
	}
	if count[lpBound] > 0 {
		s += fmt.Sprintf(", a lower bound for %s", ofAll(count[lpBound], len(r.Filaments)))
	}
	if count[lpNone] > 0 && count[lpNone] < len(r.Filaments) {
		s += fmt.Sprintf(", neither for %d", count[lpNone])
	}
	return s + "."
}

func ofAll(n, all int) string {
	switch n {
	case 0:
		return "none"
	case all:
		return "all"
	}
	return fmt.Sprint(n)
}

// quantityNames are the words for the quantities of estimates.csv, with the unit.
var quantityNames = map[string]string{
	"lp_um":                        "persistence length (µm)",
	"bending_rigidity_N_m2":        "bending rigidity (N·m²)",
	"drag_Pa_s":                    "transverse drag per length (Pa·s)",
	"youngs_modulus_Pa":            "Young's modulus (Pa)",
	"drag_expected_Pa_s":           "drag to expect (Pa·s)",
	"slowest_s":                    "relaxation time of the slowest mode (s)",
	"tube_rms_um":                  "tube rms (µm)",
	"tube_diameter_um":             "tube diameter (µm)",
	"tube_stiffness_N_per_m2":      "tube stiffness (N/m²)",
	"deflection_um":                "deflection length (µm)",
	"mesh_um":                      "mesh size (µm)",
	"displacement_excess_kurtosis": "excess kurtosis of the displacement",
	"transverse_exponent":          "exponent of the transverse displacement",
	"sliding_um2_per_s":            "sliding diffusion (µm²/s)",
	"disengagement_s":              "disengagement time (s)",
}

func quantityName(q string) string {
	if name, ok := quantityNames[q]; ok {
		return name
	}
	return q
}

// meaning is the sentence for a code, or a plain admission that there is none.
func meaning(kind tables.Kind, code string) string {
	if s, ok := tables.Meaning(kind, code); ok {
		return s
	}
	return "No description of this code is known to this version."
}

// methodsParagraph is text for a paper, with this stack's own numbers. It speaks only of estimates that were made.
func methodsParagraph(r *job.Result) []string {
	s := &r.Settings
	methods := map[string]bool{}
	used, all := 0, 0
	seLow, seHigh := math.Inf(1), 0.0
	for i := range r.Filaments {
		f := &r.Filaments[i]
		used += f.FramesUsed
		all += len(f.Contours)
		if positive(f.LocalisationUm) {
			seLow, seHigh = math.Min(seLow, f.LocalisationUm*1000), math.Max(seHigh, f.LocalisationUm*1000)
		}
		for _, e := range f.Estimates {
			if e.Quantity == "lp_um" {
				methods[e.Method] = true
			}
		}
	}
	var b strings.Builder
	fmt.Fprintf(&b, "A movie of %s of %d × %d pixels (%s µm per pixel%s) was analysed with wend %s (%s ridge filter).",
		plural(tables.Summarise(r).Counts.Frames, "frame", "frames"), r.Info.Width, r.Info.Height, plain(s.PixelUm), timing(r), r.Version, r.RidgeImplementation)
	b.WriteString(" In each frame, filaments were found on a ridge map (second derivatives of the smoothed image, in units of the image's own noise), and the centreline of each was fitted to all of its pixels at once as a cubic B-spline blurred by a Gaussian, by least squares weighted with the camera noise, which gives its position together with the error.")
	if seHigh > 0 {
		fmt.Fprintf(&b, " The median standard error of a contour point across the line was %s nm.", span(seLow, seHigh))
	}
	if positive(r.Optics.ResolvedUm) {
		fmt.Fprintf(&b, " Shapes with wavelengths above %s µm are resolved.", digits(r.Optics.ResolvedUm, 2))
	}
	fmt.Fprintf(&b, " Filaments were followed through the frames without exchange of their ends. %s found; ", found(len(r.Filaments)))
	if used == all {
		fmt.Fprintf(&b, "all of %s entered the analysis.", plural(all, "contour", "contours"))
	} else {
		fmt.Fprintf(&b, "of %s, %d entered the analysis, and the others were set aside for the reasons listed in frames.csv.",
			plural(all, "contour", "contours"), used)
	}
	out := []string{b.String()}

	b.Reset()
	if methods["likelihood"] {
		b.WriteString("Persistence lengths were estimated by maximum restricted likelihood of the amplitudes of the bending modes of a beam with free ends, each an overdamped Brownian mode with the equilibrium variance kT/κk⁴ and relaxation time ζ/κk⁴, where k is the mode's wavenumber, κ = kT·Lp the bending rigidity and ζ the drag per length. The likelihood holds the average over the exposure (Wong and Halvorsen, 2006), the localisation noise, the correlation between frames and a constant intrinsic shape; limits are those of the profile likelihood at 95 %.")
		if s.ExposureS == 0 {
			b.WriteString(" No correction for motion during the exposure was made.")
		} else {
			b.WriteString(" Of the undulation that the exposure averages away, a share of one to ten per cent, the less the more light, remains as noise of the contours; it was fitted, and expected within a factor of two as found on synthetic movies.")
		}
		b.WriteString(" A filament was called confined where a harmonic tube, which adds its stiffness γ to κk⁴, raised twice the log-likelihood by more than 7.7; stiffness and tube were then fitted together.")
	}
	if s.Setting == "network" {
		b.Reset()
		b.WriteString("The axis of the tube, a cubic spline with nodes 3 µm apart, was laid through all contours by least squares, together with a drift of the stage that is a polynomial of second degree in time. Displacements across the axis and tangents against it were put on the normal modes of a rod with free ends, the two rigid ones included, each an overdamped Brownian mode with variance kT/(κk⁴+γ) and relaxation time ζ/(κk⁴+γ) in a harmonic tube of stiffness γ. Persistence length, tube, drag and noise were fitted by maximum restricted likelihood about the drift, with the average over the exposure; limits are those of the profile likelihood at 95 %. The width stated is the bulk rms displacement per transverse direction, √(kT/(2√2 κ^¼ γ^¾)), which is free of the excess at the ends.")
		if s.KnownLpUm > 0 {
			fmt.Fprintf(&b, " For the tube the persistence length was taken as known from free filaments, %s µm.", plain(s.KnownLpUm))
		}
		b.WriteString(" Mesh sizes are ξ = √(3/ρ), from rms = 0.32 ξ^(6/5) Lp^(−1/5) (Hinsch, Wilhelm and Frey, Eur. Phys. J. E 24:35, 2007) unless another prefactor is listed below.")
		return append(out, b.String())
	}
	var classic []string
	if methods["modes"] {
		classic = append(classic, "the variances of the cosine modes of the tangent angle, which in equilibrium are (L/nπ)²/Lp (Gittes et al., 1993), after correction for localisation noise, exposure and mean shape")
	}
	if methods["tangent"] {
		classic = append(classic, "the decay of the tangent correlation, exp(−s/2Lp) in the plane, with a free offset for localisation noise")
	}
	if methods["distance"] {
		classic = append(classic, "the mean-square end-to-end distance of a planar worm-like chain")
	}
	if len(classic) > 0 {
		lead := "Persistence lengths were also estimated from "
		if !methods["likelihood"] {
			lead = "Persistence lengths were estimated from "
		}
		b.WriteString(" " + lead + strings.Join(classic, "; ") + ". Intervals count statistically independent shapes, not frames.")
	}
	if b.Len() > 0 {
		out = append(out, strings.TrimSpace(b.String()))
	}
	return out
}

func timing(r *job.Result) string {
	s := &r.Settings
	var parts string
	if positive(s.IntervalS) {
		parts += fmt.Sprintf(", one frame every %s s", plain(s.IntervalS))
	}
	if positive(s.ExposureS) {
		parts += fmt.Sprintf(", exposure %s s", plain(s.ExposureS))
	}
	if finite(s.TemperatureC) {
		assumed := ""
		if strings.Contains(s.Sources["temperature_c"], "assumed") || strings.Contains(s.Sources["temperature_c"], "default") {
			assumed = ", assumed"
		}
		parts += fmt.Sprintf(", %s °C%s", plain(s.TemperatureC), assumed)
	}
	return parts
}

func found(n int) string {
	if n == 1 {
		return "1 filament was"
	}
	return fmt.Sprintf("%d filaments were", n)
}

func span(low, high float64) string {
	a, b := digits(low, 2), digits(high, 2)
	if a == b {
		return a
	}
	return a + " to " + b
}
