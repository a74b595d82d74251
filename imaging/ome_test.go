package imaging

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// ome wraps attributes of Pixels and elements within it.
func ome(pixels string, inside ...string) string {
	return `<?xml version="1.0" encoding="UTF-8"?><OME xmlns="http://www.openmicroscopy.org/Schemas/OME/2016-06"><Image ID="Image:0"><Pixels ` +
		pixels + `>` + strings.Join(inside, "") + `</Pixels></Image></OME>`
}

const fourFrames = `SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="4" Type="uint16" `

// openOME opens a stack of n pages of 4 x 3 pixels with a description. Pixel (0, 0) of page p is 1000·p.
func openOME(t *testing.T, n int, text string) *Stack {
	t.Helper()
	return mustOpen(t, rampStack(4, 3, n, ascii(270, text)).bytes())
}

func TestCalibrationFromOME(t *testing.T) {
	planes := func(format string, values ...any) string {
		var b strings.Builder
		for i, v := range values {
			fmt.Fprintf(&b, `<Plane TheC="0" TheZ="0" TheT="%d" `+format+`/>`, i, v)
		}
		return b.String()
	}
	none := math.NaN()
	for _, tc := range []struct {
		name                      string
		xml                       string
		pixel, interval, exposure float64
		warnings                  []string
	}{
		{"default units", ome(fourFrames + `PhysicalSizeX="0.108" TimeIncrement="0.5"`), 0.108, 0.5, none, nil},
		{"micro sign", ome(fourFrames + `PhysicalSizeX="0.1" PhysicalSizeXUnit="` + "\u00b5" + `m"`), 0.1, none, none, nil},
		{"Greek mu", ome(fourFrames + `PhysicalSizeX="0.1" PhysicalSizeXUnit="` + "\u03bc" + `m"`), 0.1, none, none, nil},
		{"Latin-1 micro", ome(fourFrames + `PhysicalSizeX="0.1" PhysicalSizeXUnit="` + "\xb5" + `m"`), 0.1, none, none, nil},
		{"nanometres", ome(fourFrames + `PhysicalSizeX="108" PhysicalSizeXUnit="nm" PhysicalSizeY="108.5" PhysicalSizeYUnit="nm"`), 0.108, none, none, nil},
		{"millimetres", ome(fourFrames + `PhysicalSizeX="1.08e-4" PhysicalSizeXUnit="mm"`), 0.108, none, none, nil},
		{"metres", ome(fourFrames + `PhysicalSizeX="1.08e-7" PhysicalSizeXUnit="m"`), 0.108, none, none, nil},
		{"centimetres", ome(fourFrames + `PhysicalSizeX="1.08e-5" PhysicalSizeXUnit="cm"`), 0.108, none, none, nil},
		{"picometres", ome(fourFrames + `PhysicalSizeX="108000" PhysicalSizeXUnit="pm"`), 0.108, none, none, nil},
		{"ångström", ome(fourFrames + `PhysicalSizeX="1080" PhysicalSizeXUnit="` + "\u00c5" + `"`), 0.108, none, none, nil},
		{"inch", ome(fourFrames + `PhysicalSizeX="1e-5" PhysicalSizeXUnit="in"`), 0.254, none, none, nil},
		{"unit pixel", ome(fourFrames + `PhysicalSizeX="1" PhysicalSizeXUnit="pixel"`), none, none, none,
			[]string{`OME-XML PhysicalSizeX is in "pixel", which is no unit that can be converted; it was not used`}},
		{"reference frame", ome(fourFrames + `PhysicalSizeX="1" PhysicalSizeXUnit="reference frame"`), none, none, none,
			[]string{`OME-XML PhysicalSizeX is in "reference frame", which is no unit that can be converted; it was not used`}},
		{"not a number", ome(fourFrames + `PhysicalSizeX="wide"`), none, none, none,
			[]string{`OME-XML PhysicalSizeX is "wide", want a number; it was not used`}},
		{"zero", ome(fourFrames + `PhysicalSizeX="0"`), none, none, none,
			[]string{"OME-XML PhysicalSizeX is 0 µm, which no microscope's pixel has; it was not used"}},
		{"far too large", ome(fourFrames + `PhysicalSizeX="0.108" PhysicalSizeXUnit="mm"`), none, none, none,
			[]string{"OME-XML PhysicalSizeX is 108 µm, which no microscope's pixel has; it was not used"}},
		{"oblong pixels", ome(fourFrames + `PhysicalSizeX="0.1" PhysicalSizeY="0.102"`), 0.1, none, none,
			[]string{"pixels are not square: 0.1 µm wide and 0.102 µm high; the width was taken for both"}},
		{"milliseconds", ome(fourFrames + `TimeIncrement="250" TimeIncrementUnit="ms"`), none, 0.25, none, nil},
		{"microseconds", ome(fourFrames + `TimeIncrement="2500" TimeIncrementUnit="` + "\u00b5" + `s"`), none, 0.0025, none, nil},
		{"minutes", ome(fourFrames + `TimeIncrement="2" TimeIncrementUnit="min"`), none, 120, none, nil},
		{"hours", ome(fourFrames + `TimeIncrement="2" TimeIncrementUnit="h"`), none, 7200, none, nil},
		{"time in m", ome(fourFrames + `TimeIncrement="2" TimeIncrementUnit="m"`), none, none, none,
			[]string{`OME-XML TimeIncrement is in "m", which is no unit that can be converted; it was not used`}},
		{"negative time", ome(fourFrames + `TimeIncrement="-1"`), none, none, none,
			[]string{"OME-XML TimeIncrement is -1 s, want a positive time; it was not used"}},
		{"no time", ome(fourFrames + `TimeIncrement="0"`), none, none, none, nil},
		{"plane times", ome(fourFrames+`TimeIncrement="0.5"`, planes(`DeltaT="%v"`, 1, 1.5, 2, 2.5)), none, 0.5, none, nil},
		{"plane times in ms", ome(fourFrames, planes(`DeltaT="%v" DeltaTUnit="ms"`, 100, 200, 300, 400)), none, 0.1, none, nil},
		{"times against increment", ome(fourFrames+`TimeIncrement="0.5"`, planes(`DeltaT="%v"`, 0, 0.52, 1.04, 1.56)), none, 0.52, none,
			[]string{"OME-XML TimeIncrement is 0.5 s, but its planes were taken 0.52 s apart; the latter was taken"}},
		{"dropped frame", ome(fourFrames, planes(`DeltaT="%v"`, 0, 1, 3, 4)), none, 1, none,
			[]string{"1 of 3 steps between frames are longer than 1.5 intervals, the first after frame 1: frames were dropped"}},
		{"times fall", ome(fourFrames+`TimeIncrement="0.5"`, planes(`DeltaT="%v"`, 0, 1, 1, 2)), none, 0.5, none,
			[]string{"the times of the planes in OME-XML do not rise from frame 1 to frame 2; they were not used"}},
		{"times of some", ome(fourFrames+`TimeIncrement="0.5"`, planes(`DeltaT="%v"`, 0, 1, 2)), none, 0.5, none,
			[]string{"OME-XML gives the time of 3 of 4 frames; these times were not used"}},
		{"exposure", ome(fourFrames, planes(`ExposureTime="%v" ExposureTimeUnit="ms"`, 20, 20, 20, 20)), none, none, 0.02, nil},
		{"exposures", ome(fourFrames, planes(`ExposureTime="%v"`, 0.02, 0.02, 0.03, 0.02)), none, none, 0.02,
			[]string{"the exposure changes from 0.02 to 0.03 s within the movie; its median was taken"}},
		{"two images", ome(fourFrames+`PhysicalSizeX="0.1"`) + "", 0.1, none, none, nil},
		{"wrong size and type", ome(`SizeX="5" SizeY="3" SizeZ="1" SizeC="1" SizeT="4" Type="int16"`), none, none, none,
			[]string{"OME-XML says 5 x 3 pixels, the pages have 4 x 3", "OME-XML says pixels of type int16, the pages hold uint16"}},
		{"renamed", ome(fourFrames, `<TiffData><UUID FileName="old.ome.tif">u</UUID></TiffData>`), none, none, none,
			[]string{`OME-XML calls this file "old.ome.tif"; it was taken for renamed`}},
		{"broken", `<OME><Image><Pixels SizeX="4"`, none, none, none,
			[]string{"the OME-XML could not be read (XML syntax error on line 1: unexpected EOF): 4 pages were taken as frames of one channel"}},
		{"no Pixels", `<OME><Image/></OME>`, none, none, none,
			[]string{"the OME-XML could not be read (no Pixels element): 4 pages were taken as frames of one channel"}},
		{"other text", "taken on a Tuesday", none, none, none,
			[]string{`the description of the first page ("taken on a Tuesday") is not OME-XML: 4 pages were taken as frames of one channel`}},
	} {
		t.Run(tc.name, func(t *testing.T) {
			in := openOME(t, 4, tc.xml).Info()
			for _, q := range []struct {
				name string
				got  Measured
				want float64
			}{{"pixel", in.Calibration.PixelUm, tc.pixel}, {"interval", in.Calibration.IntervalS, tc.interval}, {"exposure", in.Calibration.ExposureS, tc.exposure}} {
				if math.IsNaN(q.want) != math.IsNaN(q.got.Value) || math.Abs(q.got.Value-q.want) > 1e-12*q.want {
					t.Errorf("%s %v, want %v", q.name, q.got.Value, q.want)
				}
				if (q.got.Source == "") != math.IsNaN(q.want) {
					t.Errorf("%s has source %q", q.name, q.got.Source)
				}
			}
			if d := cmp.Diff(tc.warnings, in.Warnings); d != "" {
				t.Errorf("warnings (-want +got):\n%s", d)
			}
		})
	}
}

// The page of each plane under each dimension order, by the formulas of the OME-TIFF
// specification written out one by one.
func TestDimensionOrders(t *testing.T) {
	const nc, nt = 3, 4
	for order, page := range map[string]func(c, t int) int{
		"XYCZT": func(c, t int) int { return c + nc*t },
		"XYCTZ": func(c, t int) int { return c + nc*t },
		"XYZCT": func(c, t int) int { return c + nc*t },
		"XYZTC": func(c, t int) int { return t + nt*c },
		"XYTCZ": func(c, t int) int { return t + nt*c },
		"XYTZC": func(c, t int) int { return t + nt*c },
	} {
		for _, slices := range []bool{false, true} { // with the roles of Z and T exchanged as well
			sizes, declared := fmt.Sprintf(`SizeZ="1" SizeT="%d"`, nt), order
			if slices {
				sizes = fmt.Sprintf(`SizeZ="%d" SizeT="1"`, nt)
				declared = strings.NewReplacer("Z", "T", "T", "Z").Replace(order)
			}
			s := openOME(t, nc*nt, ome(`DimensionOrder="`+declared+`" SizeX="4" SizeY="3" SizeC="3" `+sizes))
			if s.Frames() != nt || s.Info().SizeC != nc {
				t.Fatalf("%s: %d frames of %d channels", declared, s.Frames(), s.Info().SizeC)
			}
			var f Frame
			for c := range nc {
				for frame := range nt {
					if err := s.ReadFrame(c, frame, &f); err != nil {
						t.Fatal(err)
					}
					if got, want := int(f.Pix[0])/1000, page(c, frame); got != want {
						t.Errorf("%s: channel %d frame %d is page %d, want %d", declared, c, frame, got, want)
					}
				}
			}
		}
	}
}

func TestTiffDataMapping(t *testing.T) {
	const two = `SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="3"`
	for _, tc := range []struct {
		name     string
		pages    int
		sizes    string
		inside   []string
		want     [][]int // [frame][channel] page
		warnings []string
	}{
		{"none", 6, two, nil, [][]int{{0, 1}, {2, 3}, {4, 5}}, nil},
		{"bare", 6, two, []string{`<TiffData/>`}, [][]int{{0, 1}, {2, 3}, {4, 5}}, nil},
		{"all from a page on", 6, two, []string{`<TiffData IFD="0" PlaneCount="6"/>`}, [][]int{{0, 1}, {2, 3}, {4, 5}}, nil},
		{"two blocks", 6, two, []string{`<TiffData IFD="3" PlaneCount="3"/>`, `<TiffData IFD="0" FirstC="1" FirstT="1" PlaneCount="3"/>`},
			[][]int{{3, 4}, {5, 0}, {1, 2}}, nil},
		{"one by one, backwards", 6, two, []string{
			`<TiffData IFD="5" FirstC="0" FirstT="0"/>`, `<TiffData IFD="4" FirstC="1" FirstT="0"/>`, `<TiffData IFD="3" FirstC="0" FirstT="1"/>`,
			`<TiffData IFD="2" FirstC="1" FirstT="1"/>`, `<TiffData IFD="1" FirstC="0" FirstT="2"/>`, `<TiffData IFD="0" FirstC="1" FirstT="2"/>`,
		}, [][]int{{5, 4}, {3, 2}, {1, 0}}, nil},
		{"fewer pages", 4, two, nil, [][]int{{0, 1}, {2, 3}}, []string{"OME-XML says 2 channels x 3 frames, the file has 4 pages: 2 frames were taken"}},
		{"more pages", 8, two, nil, [][]int{{0, 1}, {2, 3}, {4, 5}, {6, 7}}, []string{"OME-XML says 2 channels x 3 frames, the file has 8 pages: 4 frames were taken"}},
		{"mapped to fewer pages", 5, two, []string{`<TiffData IFD="1" PlaneCount="6"/>`}, [][]int{{1, 2}, {3, 4}},
			[]string{"OME-XML says 3 frames, and maps 2 of them to pages of this file: 2 frames were taken"}},
		{"another image behind", 8, two, []string{`</Pixels></Image><Image ID="Image:1"><Pixels SizeX="4" SizeY="3" SizeZ="1" SizeC="1" SizeT="2" PhysicalSizeX="9">`},
			[][]int{{0, 1}, {2, 3}, {4, 5}}, []string{"the file holds 2 images; the first was taken"}},
	} {
		t.Run(tc.name, func(t *testing.T) {
			s := openOME(t, tc.pages, ome(tc.sizes, tc.inside...))
			if d := cmp.Diff(tc.warnings, s.Info().Warnings); d != "" {
				t.Errorf("warnings (-want +got):\n%s", d)
			}
			if s.Frames() != len(tc.want) || s.Info().SizeT != len(tc.want) {
				t.Fatalf("%d frames, SizeT %d, want %d", s.Frames(), s.Info().SizeT, len(tc.want))
			}
			var f Frame
			for frame, row := range tc.want {
				for c, want := range row {
					if err := s.ReadFrame(c, frame, &f); err != nil {
						t.Fatal(err)
					}
					if got := int(f.Pix[0]) / 1000; got != want {
						t.Errorf("frame %d channel %d is page %d, want %d", frame, c, got, want)
					}
				}
			}
		})
	}
}

// Times and exposures are those of the first channel, whatever the others say.
func TestTimesOfTheFirstChannel(t *testing.T) {
	in := openOME(t, 6, ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="3"`,
		`<Plane TheC="0" TheZ="0" TheT="0" DeltaT="1" ExposureTime="0.1"/><Plane TheC="1" TheZ="0" TheT="0" DeltaT="1.5" ExposureTime="0.4"/>`,
		`<Plane TheC="0" TheZ="0" TheT="1" DeltaT="3" ExposureTime="0.1"/><Plane TheC="1" TheZ="0" TheT="1" DeltaT="3.5" ExposureTime="0.4"/>`,
		`<Plane TheC="0" TheZ="0" TheT="2" DeltaT="5" ExposureTime="0.1"/><Plane TheC="1" TheZ="0" TheT="2" DeltaT="9.5" ExposureTime="0.4"/>`)).Info()
	if c := in.Calibration; c.IntervalS.Value != 2 || c.ExposureS.Value != 0.1 || !cmp.Equal(c.TimesS, []float64{0, 2, 4}) || len(in.Warnings) > 0 {
		t.Errorf("%+v, warnings %q; want times 0, 2, 4 s and exposure 0.1 s", c, in.Warnings)
	}
}

func TestSignificantBits(t *testing.T) {
	if m := openOME(t, 4, ome(fourFrames+`SignificantBits="12"`)).Info().MaxCount; m != 4095 {
		t.Errorf("largest count %v, want 4095", m)
	}
}

func TestResolutionTags(t *testing.T) {
	none := math.NaN()
	for _, tc := range []struct {
		name     string
		tags     []testTag
		want     float64
		warnings []string
	}{
		{"centimetres", []testTag{ratio(282, 100000, 1), ratio(283, 100000, 1), short(296, 3)}, 0.1, nil},
		{"inches", []testTag{ratio(282, 508000, 2), ratio(283, 508000, 2), short(296, 2)}, 0.1, nil},
		{"inches by default", []testTag{ratio(282, 254000, 1), ratio(283, 254000, 1)}, 0.1, nil},
		{"no unit", []testTag{ratio(282, 100000, 1), ratio(283, 100000, 1), short(296, 1)}, none, nil},
		{"no tags", nil, none, nil},
		{"zero", []testTag{ratio(282, 0, 0), ratio(283, 1, 0), short(296, 3)}, none, nil},
		{"72 dpi", []testTag{ratio(282, 72, 1), ratio(283, 72, 1)}, none,
			[]string{"the resolution tags give 72 dots per inch (pixels of 352.8 µm), a screen's or printer's setting and no calibration; they were not used"}},
		{"96 dpi", []testTag{ratio(282, 96, 1), ratio(283, 96, 1)}, none,
			[]string{"the resolution tags give 96 dots per inch (pixels of 264.6 µm), a screen's or printer's setting and no calibration; they were not used"}},
		{"600 dpi", []testTag{ratio(282, 600, 1), ratio(283, 600, 1)}, 42.33333333, nil},
		{"300 dpi", []testTag{ratio(282, 300, 1), ratio(283, 300, 1)}, none,
			[]string{"the resolution tags give 300 dots per inch (pixels of 84.67 µm), a screen's or printer's setting and no calibration; they were not used"}},
		{"oblong", []testTag{ratio(282, 100000, 1), ratio(283, 50000, 1), short(296, 3)}, 0.1,
			[]string{"pixels are not square: 0.1 µm wide and 0.2 µm high; the width was taken for both"}},
	} {
		in := mustOpen(t, rampStack(4, 3, 2, tc.tags...).bytes()).Info()
		m := in.Calibration.PixelUm
		if math.IsNaN(tc.want) != math.IsNaN(m.Value) || math.Abs(m.Value-tc.want) > 1e-8*tc.want {
			t.Errorf("%s: %v µm, want %v", tc.name, m.Value, tc.want)
		}
		if !math.IsNaN(tc.want) && m.Source != "TIFF resolution tags" {
			t.Errorf("%s: source %q", tc.name, m.Source)
		}
		if d := cmp.Diff(tc.warnings, in.Warnings); d != "" {
			t.Errorf("%s: warnings (-want +got):\n%s", tc.name, d)
		}
	}
}
