package job

import (
	"errors"
	"math"
	"strings"
	"testing"

	"wend/imaging"
	"wend/trace"
)

// A flag beats the file; what is nowhere is named; the temperature is assumed and said to be.
func TestResolve(t *testing.T) {
	info := imaging.Info{Path: "a.tif", SizeC: 1}
	nowhere := imaging.Measured{Value: math.NaN()}
	info.Calibration = imaging.Calibration{PixelUm: imaging.Measured{Value: 0.1, Source: "OME-XML PhysicalSizeX"}, IntervalS: nowhere, ExposureS: nowhere}
	r := NewRequest()
	r.Setting = "free"
	if _, err := r.resolve(info, 5); !errors.Is(err, ErrUsage) || !strings.Contains(err.Error(), "--interval-s, --exposure-s") || strings.Contains(err.Error(), "--pixel-um") {
		t.Errorf("missing calibration: %v", err)
	}
	r.IntervalS, r.ExposureS, r.PixelUm = 2, 0, 0.2
	s, err := r.resolve(info, 5)
	if err != nil {
		t.Fatal(err)
	}
	if s.PixelUm != 0.2 || s.Sources["pixel_um"] != "flag" || s.TemperatureC != 22 || s.Sources["temperature_c"] != "assumed" || s.LastFrame != 4 || s.Channel != 1 {
		t.Errorf("settings %+v", s)
	}
	r.PixelUm = math.NaN()
	if s, _ = r.resolve(info, 5); s.PixelUm != 0.1 || s.Sources["pixel_um"] != "OME-XML PhysicalSizeX" {
		t.Errorf("pixel size from the file: %g from %q", s.PixelUm, s.Sources["pixel_um"])
	}
}

// Times are the file's own where it has one for every frame, unless the interval was set by hand.
func TestTimes(t *testing.T) {
	info := imaging.Info{Calibration: imaging.Calibration{TimesS: []float64{0, 1, 2.5, 4}}}
	s := Settings{IntervalS: 2, LastFrame: 3, Sources: map[string]string{"interval_s": "OME-XML Plane DeltaT"}}
	if got := times(info, s); got[2] != 2.5 || got[3] != 4 {
		t.Errorf("times of the file: %v", got)
	}
	s.Sources["interval_s"] = "flag"
	if got := times(info, s); got[2] != 4 || got[3] != 6 {
		t.Errorf("times of the flag: %v", got)
	}
	s.Sources["interval_s"], info.Calibration.TimesS = "OME-XML TimeIncrement", []float64{0, 1}
	if got := times(info, s); got[3] != 6 {
		t.Errorf("too few times in the file: %v", got)
	}
}

// The frame in the picture is the first that shows the most.
func TestBestFrame(t *testing.T) {
	contour := func(frame int, reason trace.Reason) trace.Contour {
		return trace.Contour{Frame: frame, Points: make([]trace.Point, 3), Reason: reason}
	}
	list := []Filament{
		{Filament: trace.Filament{Contours: []trace.Contour{contour(0, ""), contour(1, ""), contour(2, "")}}},
		{Filament: trace.Filament{Contours: []trace.Contour{contour(0, trace.ReasonFaint), contour(1, ""), contour(2, "")}}},
	}
	if got := bestFrame(list, Settings{LastFrame: 2}); got != 1 {
		t.Errorf("frame %d, want 1", got)
	}
}

// What the user must read is said: no temperature, no exposure, frames dropped.
func TestWarnings(t *testing.T) {
	r := &Result{Settings: Settings{Sources: map[string]string{"temperature_c": "assumed"}},
		Filaments: []Filament{{Filament: trace.Filament{ID: 1, Contours: make([]trace.Contour, 10)}, FramesUsed: 5}}}
	var codes []string
	for _, w := range warnings(r) {
		codes = append(codes, w.Code)
	}
	if got := strings.Join(codes, " "); got != "temperature exposure dropped" {
		t.Errorf("warnings %q", got)
	}
}
