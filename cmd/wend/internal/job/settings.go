package job

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"wend/imaging"
)

// ErrUsage is wrapped by errors about settings that are missing or cannot be: wrong use, not a bad stack.
var ErrUsage = errors.New("wrong use")

// Request is what the user asked for. NaN stands for numbers that were not given, and zero for an
// absent Channel.
type Request struct {
	PixelUm, IntervalS, ExposureS, TemperatureC float64
	Setting                                     string
	Channel                                     int
	MinLengthUm                                 float64
	Sample
	FirstFrame, LastFrame int // from 0; LastFrame -1: to the end
	Gain, Offset          float64
	ReadableFrames        bool
}

// Sample is what may be known of the sample: the depth of the chamber, the radius of the filament, the viscosity of the medium and the height of the
// filament over the chamber's wall. NaN in a Request and 0 in Settings stand for what is not known.
type Sample struct {
	ChamberUm, RadiusNm, ViscosityMPas, HeightUm float64
	// For a filament in a network: a persistence length known from free ones with its interval, the concentration of an actin network, and the
	// prefactor and the finite-length term of the relation between tube and mesh.
	KnownLpUm, KnownLpLowUm, KnownLpHighUm, ActinMgPerMl, MeshPrefactor, MeshFiniteTerm float64
}

// unknownSample is NaN throughout.
func unknownSample() (s Sample) {
	for _, v := range s.values() {
		*v.value = math.NaN()
	}
	return s
}

// values are the sample's numbers with their keys in a summary, in a fixed order.
func (s *Sample) values() []sampleValue {
	return []sampleValue{{"chamber_um", &s.ChamberUm}, {"radius_nm", &s.RadiusNm}, {"viscosity_mpas", &s.ViscosityMPas}, {"height_um", &s.HeightUm},
		{"known_lp_um", &s.KnownLpUm}, {"known_lp_low_um", &s.KnownLpLowUm}, {"known_lp_high_um", &s.KnownLpHighUm}, {"actin_mg_ml", &s.ActinMgPerMl},
		{"mesh_prefactor", &s.MeshPrefactor}, {"mesh_finite_term", &s.MeshFiniteTerm}}
}

type sampleValue struct {
	key   string
	value *float64
}

// NewRequest asks for nothing: every value comes from the file.
func NewRequest() Request {
	nan := math.NaN()
	return Request{PixelUm: nan, IntervalS: nan, ExposureS: nan, TemperatureC: nan, MinLengthUm: nan, Sample: unknownSample(),
		LastFrame: -1, Gain: nan, Offset: nan}
}

const (
	defaultTemperatureC = 22
	defaultMinLengthUm  = 2
)

// usage makes an error that wraps ErrUsage.
func usage(format string, args ...any) error {
	return fmt.Errorf("%w: "+format, append([]any{ErrUsage}, args...)...)
}

// Check finds what is wrong with the request itself, whatever the stack. The error wraps ErrUsage.
func (r Request) Check() error {
	for _, c := range []struct {
		flag  string
		value float64
		ok    bool
		want  string
	}{
		{"--pixel-um", r.PixelUm, r.PixelUm > 0 && r.PixelUm < 50, "µm per pixel in the sample, above 0 and below 50"},
		{"--interval-s", r.IntervalS, r.IntervalS > 0, "seconds from frame to frame, above 0"},
		{"--exposure-s", r.ExposureS, r.ExposureS >= 0, "seconds, 0 or above; 0 makes no correction for motion during the exposure"},
		{"--temperature-c", r.TemperatureC, r.TemperatureC > -20 && r.TemperatureC < 110, "°C of the sample, -20 to 110"},
		{"--chamber-um", r.ChamberUm, r.ChamberUm > 0, "the chamber's depth in µm, above 0"},
		{"--radius-nm", r.RadiusNm, r.RadiusNm > 0 && r.RadiusNm < 1000, "the filament's radius in nm, above 0 and below 1000"},
		{"--viscosity-mpas", r.ViscosityMPas, r.ViscosityMPas > 0, "the medium's viscosity in mPa·s, above 0"},
		{"--height-um", r.HeightUm, r.HeightUm > 0, "the filament's height over the wall in µm, above 0"},
		{"--known-lp-um", r.KnownLpUm, r.KnownLpUm > 0, "a persistence length in µm, above 0"},
		{"--known-lp-low-um", r.KnownLpLowUm, r.KnownLpLowUm > 0, "the lower end of its 95 % interval in µm, above 0"},
		{"--known-lp-high-um", r.KnownLpHighUm, r.KnownLpHighUm > 0, "the upper end of its 95 % interval in µm, above 0"},
		{"--actin-mg-ml", r.ActinMgPerMl, r.ActinMgPerMl > 0, "the concentration of the network in mg/mL, above 0"},
		{"--mesh-prefactor", r.MeshPrefactor, r.MeshPrefactor > 0, "the prefactor of rms = A·ξ^(6/5)·Lp^(-1/5), above 0"},
		{"--mesh-finite-term", r.MeshFiniteTerm, r.MeshFiniteTerm > 0, "the coefficient of ξ²/L, above 0"},
		{"--min-length-um", r.MinLengthUm, r.MinLengthUm >= 0.5, "µm, 0.5 or more"},
		{"--gain", r.Gain, r.Gain > 0, "counts per photoelectron, above 0"},
		{"--offset", r.Offset, !math.IsInf(r.Offset, 0), "counts without light"},
	} {
		if !math.IsNaN(c.value) && !(c.ok && !math.IsInf(c.value, 0)) {
			return usage("%s %g, want %s", c.flag, c.value, c.want)
		}
	}
	switch r.Setting {
	case "free", "network":
	case "":
		return usage("--setting is missing: pass --setting free for filaments that fluctuate freely in a thin chamber, --setting network for one labelled filament among unlabelled neighbours")
	case "adsorbed":
		return usage("--setting %s: this version measures moving filaments only (--setting free or network)", r.Setting)
	default:
		return usage("--setting %q, want free or network", r.Setting)
	}
	if r.Setting != "network" {
		for _, v := range r.Sample.values()[4:] {
			if !math.IsNaN(*v.value) {
				return usage("--%s is for --setting network", strings.ReplaceAll(v.key, "_", "-"))
			}
		}
	}
	if math.IsNaN(r.KnownLpUm) && !(math.IsNaN(r.KnownLpLowUm) && math.IsNaN(r.KnownLpHighUm)) ||
		math.IsNaN(r.KnownLpLowUm) != math.IsNaN(r.KnownLpHighUm) {
		return usage("--known-lp-low-um and --known-lp-high-um go together, and with --known-lp-um")
	}
	if r.KnownLpLowUm >= r.KnownLpUm || r.KnownLpHighUm <= r.KnownLpUm {
		return usage("--known-lp-um %g, want it between --known-lp-low-um %g and --known-lp-high-um %g", r.KnownLpUm, r.KnownLpLowUm, r.KnownLpHighUm)
	}
	if r.Channel < 0 {
		return usage("--channel %d, want 1 or more", r.Channel)
	}
	if r.FirstFrame < 0 || r.LastFrame >= 0 && r.LastFrame < r.FirstFrame {
		return usage("--frames %d-%d, want FIRST-LAST with LAST not before FIRST", r.FirstFrame, r.LastFrame)
	}
	return nil
}

// resolve weighs the request against the file: what was asked for beats what the file says. What is
// nowhere is an error that wraps ErrUsage and names every flag to pass.
func (r Request) resolve(info imaging.Info, frames int) (Settings, error) {
	s := Settings{Setting: r.Setting, ReadableFrames: r.ReadableFrames, Gain: r.Gain, Offset: r.Offset,
		FirstFrame: r.FirstFrame, LastFrame: r.LastFrame, Sources: map[string]string{"setting": "flag"}}
	var missing []string
	pick := func(key, flag string, asked float64, file imaging.Measured, fallback float64) float64 {
		switch {
		case !math.IsNaN(asked):
			s.Sources[key] = "flag"
			return asked
		case !math.IsNaN(file.Value):
			s.Sources[key] = file.Source
			return file.Value
		case !math.IsNaN(fallback):
			s.Sources[key] = "default"
			return fallback
		}
		missing = append(missing, flag)
		return math.NaN()
	}
	nowhere, nan := imaging.Measured{Value: math.NaN()}, math.NaN()
	cal := info.Calibration
	s.PixelUm = pick("pixel_um", "--pixel-um", r.PixelUm, cal.PixelUm, nan)
	s.IntervalS = pick("interval_s", "--interval-s", r.IntervalS, cal.IntervalS, nan)
	s.ExposureS = pick("exposure_s", "--exposure-s", r.ExposureS, cal.ExposureS, nan)
	s.TemperatureC = pick("temperature_c", "--temperature-c", r.TemperatureC, nowhere, defaultTemperatureC)
	if s.Sources["temperature_c"] == "default" {
		s.Sources["temperature_c"] = "assumed"
	}
	s.MinLengthUm = pick("min_length_um", "--min-length-um", r.MinLengthUm, nowhere, defaultMinLengthUm)
	known := r.Sample.values()
	for i, v := range s.Sample.values() {
		if given := *known[i].value; !math.IsNaN(given) {
			*v.value = given
			s.Sources[v.key] = "flag"
		}
	}
	if len(missing) > 0 {
		return s, usage("%s: the file does not say its %s: pass %s", info.Path, calibrationNames(missing), strings.Join(missing, ", "))
	}
	if s.ExposureS > s.IntervalS*(1+1e-6) {
		return s, usage("%s: exposure %g s (%s) is longer than the frame interval %g s (%s): pass --exposure-s or --interval-s",
			info.Path, s.ExposureS, s.Sources["exposure_s"], s.IntervalS, s.Sources["interval_s"])
	}
	s.ExposureS = min(s.ExposureS, s.IntervalS)
	s.Channel = r.Channel
	switch {
	case s.Channel == 0 && info.SizeC > 1:
		return s, usage("%s: %s: pass --channel", info.Path, channelList(info))
	case s.Channel == 0:
		s.Channel = 1
	case s.Channel > info.SizeC:
		return s, usage("%s: --channel %d: %s", info.Path, s.Channel, channelList(info))
	}
	if r.Channel > 0 {
		s.Sources["channel"] = "flag"
	}
	if r.FirstFrame > 0 || r.LastFrame >= 0 {
		s.Sources["first_frame"], s.Sources["last_frame"] = "flag", "flag"
	}
	if s.LastFrame < 0 {
		s.LastFrame = frames - 1
	}
	if s.FirstFrame >= frames || s.LastFrame >= frames {
		return s, usage("%s: --frames %d-%d, but the stack has the frames 0-%d", info.Path, s.FirstFrame, s.LastFrame, frames-1)
	}
	if !math.IsNaN(r.Gain) {
		s.Sources["gain"] = "flag"
	}
	if !math.IsNaN(r.Offset) {
		s.Sources["offset"] = "flag"
	}
	return s, nil
}

func calibrationNames(flags []string) string {
	names := map[string]string{"--pixel-um": "pixel size", "--interval-s": "frame interval", "--exposure-s": "exposure"}
	var out []string
	for _, f := range flags {
		out = append(out, names[f])
	}
	return strings.Join(out, ", ")
}

func channelList(info imaging.Info) string {
	var names []string
	for i := range info.SizeC {
		name := fmt.Sprint(i + 1)
		if i < len(info.ChannelNames) && info.ChannelNames[i] != "" {
			name += " (" + info.ChannelNames[i] + ")"
		}
		names = append(names, name)
	}
	if len(names) == 1 {
		return "the stack has one channel"
	}
	return "the stack has the channels " + strings.Join(names, ", ")
}
