package tables

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"path"
	"path/filepath"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/imaging"
)

// Summary is summary.json. A number that is not known is null.
type Summary struct {
	Name     string          `json:"name"`
	Input    InputSummary    `json:"input"`
	Version  string          `json:"version"`
	Ridge    string          `json:"ridge_implementation"`
	Settings SettingsSummary `json:"settings"`
	Camera   CameraSummary   `json:"camera"`
	Optics   OpticsSummary   `json:"optics"`
	Counts   Counts          `json:"counts"`
	Warnings []WarningEntry  `json:"warnings"`
}

// InputSummary says which stack was read. File is its name without the folder.
type InputSummary struct {
	File        string   `json:"file"`
	SHA256      string   `json:"sha256"`
	Format      string   `json:"format"`
	PixelType   string   `json:"pixel_type"`
	ByteOrder   string   `json:"byte_order"`
	Compression string   `json:"compression"`
	Layout      string   `json:"layout"`
	Width       int      `json:"width"`
	Height      int      `json:"height"`
	Pages       int      `json:"pages"`
	Channels    int      `json:"channels"`
	Slices      int      `json:"slices"`
	Frames      int      `json:"frames"`
	Order       string   `json:"dimension_order"`
	MaxCount    *float64 `json:"max_count"`
}

// SettingValue is a setting with where it came from.
type SettingValue[T any] struct {
	Value  T      `json:"value"`
	Source string `json:"source"`
}

// SettingsSummary holds every setting of the stack.
type SettingsSummary struct {
	PixelUm        SettingValue[*float64] `json:"pixel_um"`
	IntervalS      SettingValue[*float64] `json:"interval_s"`
	ExposureS      SettingValue[*float64] `json:"exposure_s"`
	TemperatureC   SettingValue[*float64] `json:"temperature_c"`
	Setting        SettingValue[string]   `json:"setting"`
	Channel        SettingValue[int]      `json:"channel"`
	ChamberUm      SettingValue[*float64] `json:"chamber_um"`
	RadiusNm       SettingValue[*float64] `json:"radius_nm"`
	ViscosityMPas  SettingValue[*float64] `json:"viscosity_mpas"`
	HeightUm       SettingValue[*float64] `json:"height_um"`
	KnownLpUm      SettingValue[*float64] `json:"known_lp_um"`
	KnownLpLowUm   SettingValue[*float64] `json:"known_lp_low_um"`
	KnownLpHighUm  SettingValue[*float64] `json:"known_lp_high_um"`
	ActinMgPerMl   SettingValue[*float64] `json:"actin_mg_ml"`
	MeshPrefactor  SettingValue[*float64] `json:"mesh_prefactor"`
	MeshFiniteTerm SettingValue[*float64] `json:"mesh_finite_term"`
	MinLengthUm    SettingValue[*float64] `json:"min_length_um"`
	FirstFrame     SettingValue[int]      `json:"first_frame"`
	LastFrame      SettingValue[int]      `json:"last_frame"`
	Gain           SettingValue[*float64] `json:"gain"`
	Offset         SettingValue[*float64] `json:"offset"`
	ReadableFrames SettingValue[bool]     `json:"readable_frames"`
}

// CameraSummary is the noise model that was used.
type CameraSummary struct {
	GainCounts   *float64 `json:"gain_counts_per_photoelectron"`
	OffsetCounts *float64 `json:"offset_counts"`
	ReadVariance *float64 `json:"read_variance_counts2"`
	Source       string   `json:"source"`
}

// OpticsSummary is what the movie resolves: the width of a line (standard deviation, pixel and motion
// included) and the shortest wavelength that its contours carry.
type OpticsSummary struct {
	LineWidthUm *float64 `json:"line_width_um"`
	ResolvedUm  *float64 `json:"resolved_um"`
	// NoiseCorrelation of neighbouring pixels: near 0 in raw camera frames.
	NoiseCorrelation *float64 `json:"noise_correlation"`
}

// Counts says how much came out of the stack.
type Counts struct {
	Frames         int `json:"frames"`
	Filaments      int `json:"filaments"`
	ContoursUsed   int `json:"contours_used"`
	ContoursUnused int `json:"contours_unused"`
	LpMeasured     int `json:"lp_measured"`
	LpBounds       int `json:"lp_lower_bounds"`
	LpNone         int `json:"lp_none"`
	PictureFrame   int `json:"picture_frame"`
}

// WarningEntry is a warning with its code.
type WarningEntry struct {
	Code string `json:"code"`
	Text string `json:"text"`
}

// Summarise collects the summary of r.
func Summarise(r *job.Result) Summary {
	s := &r.Settings
	source := func(key string) string {
		if src, ok := s.Sources[key]; ok {
			return src
		}
		return "default"
	}
	float := func(key string, v float64) SettingValue[*float64] {
		return SettingValue[*float64]{pointer(v), source(key)}
	}
	counts := Counts{Filaments: len(r.Filaments), PictureFrame: r.PictureFrame}
	counts.Frames = framesAnalysed(r)
	for i := range r.Filaments {
		f := &r.Filaments[i]
		counts.ContoursUsed += f.FramesUsed
		counts.ContoursUnused += len(f.Contours) - f.FramesUsed
		switch {
		case f.LpFrom == "bound":
			counts.LpBounds++
		case math.IsNaN(f.LpUm):
			counts.LpNone++
		default:
			counts.LpMeasured++
		}
	}
	warnings := make([]WarningEntry, 0, len(r.Warnings))
	for _, w := range r.Warnings {
		warnings = append(warnings, WarningEntry(w))
	}
	return Summary{
		Name: r.Name,
		Input: InputSummary{File: BaseName(r.StackPath), SHA256: r.SHA256, Format: r.Info.Format, PixelType: r.Info.PixelType,
			ByteOrder: r.Info.ByteOrder, Compression: r.Info.Compression, Layout: r.Info.Layout,
			Width: r.Info.Width, Height: r.Info.Height, Pages: r.Info.Pages, Channels: r.Info.SizeC, Slices: r.Info.SizeZ,
			Frames: r.Info.SizeT, Order: r.Info.DimensionOrder, MaxCount: pointer(r.Info.MaxCount)},
		Version: r.Version, Ridge: r.RidgeImplementation,
		Settings: SettingsSummary{
			PixelUm: float("pixel_um", s.PixelUm), IntervalS: float("interval_s", s.IntervalS),
			ExposureS: float("exposure_s", s.ExposureS), TemperatureC: float("temperature_c", s.TemperatureC),
			Setting: SettingValue[string]{s.Setting, source("setting")}, Channel: SettingValue[int]{s.Channel, source("channel")},
			ChamberUm: float("chamber_um", s.ChamberUm), RadiusNm: float("radius_nm", s.RadiusNm),
			ViscosityMPas: float("viscosity_mpas", s.ViscosityMPas), HeightUm: float("height_um", s.HeightUm), KnownLpUm: float("known_lp_um", s.KnownLpUm), KnownLpLowUm: float("known_lp_low_um", s.KnownLpLowUm), KnownLpHighUm: float("known_lp_high_um", s.KnownLpHighUm), ActinMgPerMl: float("actin_mg_ml", s.ActinMgPerMl), MeshPrefactor: float("mesh_prefactor", s.MeshPrefactor), MeshFiniteTerm: float("mesh_finite_term", s.MeshFiniteTerm),
			MinLengthUm: float("min_length_um", s.MinLengthUm),
			FirstFrame:  SettingValue[int]{s.FirstFrame, source("first_frame")}, LastFrame: SettingValue[int]{s.LastFrame, source("last_frame")},
			Gain: float("gain", s.Gain), Offset: float("offset", s.Offset),
			ReadableFrames: SettingValue[bool]{s.ReadableFrames, source("readable_frames")},
		},
		Camera: CameraSummary{pointer(r.Camera.GainCounts), pointer(r.Camera.OffsetCounts), pointer(r.Camera.ReadVariance), r.Camera.Source},
		Optics: OpticsSummary{pointer(r.Optics.LineWidthUm), pointer(r.Optics.ResolvedUm), pointer(r.Optics.NoiseCorrelation)},
		Counts: counts, Warnings: warnings,
	}
}

// BaseName is the last part of a path, whichever of / and \ the system that wrote it uses.
func BaseName(name string) string {
	if name == "" {
		return ""
	}
	return path.Base(strings.ReplaceAll(filepath.ToSlash(name), `\`, "/"))
}

func framesAnalysed(r *job.Result) int {
	last := len(r.TimesS) - 1
	if r.Settings.LastFrame >= 0 && r.Settings.LastFrame < last {
		last = r.Settings.LastFrame
	}
	return max(0, last-r.Settings.FirstFrame+1)
}

func writeSummary(w io.Writer, r *job.Result) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(Summarise(r))
}

// ReadSummary reads a summary.json.
func ReadSummary(r io.Reader) (*Summary, error) {
	var s Summary
	if err := json.NewDecoder(r).Decode(&s); err != nil {
		return nil, fmt.Errorf("tables: %s: %w", SummaryFile, err)
	}
	return &s, nil
}

// fill puts into r what the summary knows.
func (s *Summary) fill(r *job.Result) {
	in, set := s.Input, s.Settings
	r.Name, r.StackPath, r.SHA256, r.Version, r.RidgeImplementation = s.Name, in.File, in.SHA256, s.Version, s.Ridge
	r.PictureFrame = s.Counts.PictureFrame
	r.Info = imaging.Info{Path: in.File, Width: in.Width, Height: in.Height, Pages: in.Pages, SizeC: in.Channels, SizeZ: in.Slices,
		SizeT: in.Frames, DimensionOrder: in.Order, PixelType: in.PixelType, MaxCount: value(in.MaxCount), Format: in.Format,
		ByteOrder: in.ByteOrder, Compression: in.Compression, Layout: in.Layout}
	r.Settings = job.Settings{PixelUm: value(set.PixelUm.Value), IntervalS: value(set.IntervalS.Value), ExposureS: value(set.ExposureS.Value),
		TemperatureC: value(set.TemperatureC.Value), Setting: set.Setting.Value, Channel: set.Channel.Value,
		Sample: job.Sample{ChamberUm: value(set.ChamberUm.Value), RadiusNm: value(set.RadiusNm.Value), ViscosityMPas: value(set.ViscosityMPas.Value),
			HeightUm: value(set.HeightUm.Value), KnownLpUm: value(set.KnownLpUm.Value), KnownLpLowUm: value(set.KnownLpLowUm.Value), KnownLpHighUm: value(set.KnownLpHighUm.Value), ActinMgPerMl: value(set.ActinMgPerMl.Value), MeshPrefactor: value(set.MeshPrefactor.Value), MeshFiniteTerm: value(set.MeshFiniteTerm.Value)},
		MinLengthUm: value(set.MinLengthUm.Value), FirstFrame: set.FirstFrame.Value,
		LastFrame: set.LastFrame.Value, Gain: value(set.Gain.Value), Offset: value(set.Offset.Value), ReadableFrames: set.ReadableFrames.Value,
		Sources: map[string]string{"pixel_um": set.PixelUm.Source, "interval_s": set.IntervalS.Source, "exposure_s": set.ExposureS.Source,
			"temperature_c": set.TemperatureC.Source, "setting": set.Setting.Source, "channel": set.Channel.Source,
			"chamber_um": set.ChamberUm.Source, "radius_nm": set.RadiusNm.Source, "viscosity_mpas": set.ViscosityMPas.Source, "height_um": set.HeightUm.Source,
			"known_lp_um": set.KnownLpUm.Source, "known_lp_low_um": set.KnownLpLowUm.Source, "known_lp_high_um": set.KnownLpHighUm.Source, "actin_mg_ml": set.ActinMgPerMl.Source, "mesh_prefactor": set.MeshPrefactor.Source, "mesh_finite_term": set.MeshFiniteTerm.Source,
			"min_length_um": set.MinLengthUm.Source, "first_frame": set.FirstFrame.Source, "last_frame": set.LastFrame.Source,
			"gain": set.Gain.Source, "offset": set.Offset.Source, "readable_frames": set.ReadableFrames.Source}}
	r.Camera = imaging.Camera{GainCounts: value(s.Camera.GainCounts), OffsetCounts: value(s.Camera.OffsetCounts),
		ReadVariance: value(s.Camera.ReadVariance), Source: s.Camera.Source}
	r.Optics = job.Optics{LineWidthUm: value(s.Optics.LineWidthUm), ResolvedUm: value(s.Optics.ResolvedUm), NoiseCorrelation: value(s.Optics.NoiseCorrelation)}
	for _, w := range s.Warnings {
		r.Warnings = append(r.Warnings, job.Warning(w))
	}
}

func pointer(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}

func value(p *float64) float64 {
	if p == nil {
		return math.NaN()
	}
	return *p
}
