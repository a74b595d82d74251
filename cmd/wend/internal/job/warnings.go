package job

import (
	"fmt"

	"wend/imaging"
)

// Version is the program's version; it stands in every result.
const Version = "0.2.0"

// warnings are the sentences about a result that its user must read.
func warnings(r *Result) []Warning {
	var out []Warning
	add := func(code, format string, args ...any) {
		out = append(out, Warning{code, fmt.Sprintf(format, args...)})
	}
	if len(r.Filaments) == 0 {
		add("no_filament", "No filament was found. Look at the stack with wend look: is the right channel chosen, is the line wider than a pixel, is it long enough (--min-length-um)?")
	}
	if r.Settings.Sources["temperature_c"] == "assumed" {
		add("temperature", "No temperature was given; %g °C is assumed. Pass --temperature-c: a degree changes the bending rigidity by 0.3 %%, and the persistence length not at all.", r.Settings.TemperatureC)
	}
	if r.Settings.ExposureS == 0 {
		add("exposure", "The exposure is set to 0, so that motion during the exposure is not corrected for; the persistence length may be too large.")
	}
	if r.Camera.Source == imaging.CameraFromBackground {
		add("camera", "The camera's gain could not be measured from the stack and is a guess: photons are not to be trusted, and errors only roughly. Pass --gain and --offset if you know them.")
	}
	if r.Optics.Processed() {
		add("processed", "The noise of neighbouring pixels is alike (correlation %.2f, raw camera frames have none): the images were denoised, resampled, registered or compressed with loss. Intervals and noise cannot be trusted; measure the raw files.", r.Optics.NoiseCorrelation)
	}
	for _, f := range r.Filaments {
		if f.FramesUsed == 0 {
			add("unused", "Filament %d was seen but could not be used in any frame; frames.csv gives the reasons.", f.ID)
		} else if n := len(f.Contours); f.FramesUsed*10 < n*9 {
			add("dropped", "Filament %d: %d of %d frames were not used. If they are the strongly bent ones, the filament will look stiffer than it is; frames.csv gives the reasons.", f.ID, n-f.FramesUsed, n)
		}
	}
	return out
}
