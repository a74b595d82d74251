package imaging

import (
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const outsideWidth, outsideHeight, outsidePages = 29, 21, 2

// outsidePixel is the formula of testdata/tiff/make.py.
func outsidePixel(kind string, page, x, y int) float32 {
	v := (page*9001 + x*613 + y*1237 + x*y*x*11) % 59999
	switch kind {
	case "u8":
		return float32(v % 253)
	case "u16":
		return float32(v)
	}
	return float32(v-20000) / 64
}

// Files made by libtiff 4.5.0 and tifffile 2023.2.3, see testdata/tiff/README.md.
func TestReadsOtherLibrariesToThePixel(t *testing.T) {
	files, err := filepath.Glob("testdata/tiff/*-*.tif")
	if err != nil || len(files) != 57 {
		t.Fatalf("%d files (%v), want 57", len(files), err)
	}
	seen := map[string]bool{}
	for _, path := range files {
		name := strings.TrimSuffix(filepath.Base(path), ".tif")
		t.Run(name, func(t *testing.T) {
			s, err := Open(path, OpenOptions{})
			if err != nil {
				t.Fatal(err)
			}
			defer s.Close()
			in := s.Info()
			part := strings.Split(name, "-")
			kind := part[0]
			want := map[string]string{"u8": "uint8", "u16": "uint16", "f32": "float32"}[kind]
			if in.PixelType != want || s.Frames() != outsidePages || in.Pages != outsidePages {
				t.Fatalf("%s, %d frames, %d pages; want %s, %d, %d", in.PixelType, s.Frames(), in.Pages, want, outsidePages, outsidePages)
			}
			if big := in.ByteOrder == "big endian"; big != slices.Contains(part, "big") {
				t.Errorf("byte order %s", in.ByteOrder)
			}
			if tiles := in.Layout == "tiles"; tiles != slices.Contains(part, "tiles") {
				t.Errorf("layout %s", in.Layout)
			}
			if b := in.Format == "BigTIFF"; b != slices.Contains(part, "bigtiff") {
				t.Errorf("format %s", in.Format)
			}
			seen[in.Compression] = true
			var f Frame
			for p := range outsidePages {
				if err := s.ReadFrame(0, p, &f); err != nil {
					t.Fatal(err)
				}
				samePixels(t, f, outsideWidth, outsideHeight, func(x, y int) float32 { return outsidePixel(kind, p, x, y) })
			}
		})
	}
	var got []string
	for c := range seen {
		got = append(got, c)
	}
	slices.Sort(got)
	want := []string{
		"Deflate", "Deflate with predictor 2", "Deflate with predictor 3", "LZW", "LZW with predictor 2", "LZW with predictor 3",
		"PackBits", "Zstandard", "Zstandard with predictor 2", "Zstandard with predictor 3", "none",
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("compressions read (-want +got):\n%s", d)
	}
}

func TestReadsAnotherLibrarysOME(t *testing.T) {
	s, err := Open("testdata/tiff/channels.ome.tif", OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	want := Info{
		Path: "testdata/tiff/channels.ome.tif", Width: outsideWidth, Height: outsideHeight,
		Pages: 8, SizeC: 2, SizeZ: 1, SizeT: 4, DimensionOrder: "XYZCT", ChannelNames: []string{"filament", "beads"},
		PixelType: "uint16", MaxCount: 65535, Format: "TIFF", ByteOrder: "little endian", Compression: "Deflate", Layout: "strips",
		Calibration: Calibration{
			PixelUm:   Measured{0.065, "OME-XML PhysicalSizeX"},
			IntervalS: Measured{0.25, "OME-XML Plane DeltaT"},
			ExposureS: Measured{0.02, "OME-XML Plane ExposureTime"},
			TimesS:    []float64{0, 0.25, 0.5, 1},
		},
		Warnings: []string{"1 of 3 steps between frames are longer than 1.5 intervals, the first after frame 2: frames were dropped"},
	}
	got := s.Info()
	if d := math.Abs(got.Calibration.PixelUm.Value - 0.065); d < 1e-12 { // 65.0 nm times 1e-3
		got.Calibration.PixelUm.Value = 0.065
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("(-want +got):\n%s", d)
	}
	var f Frame
	for c := range 2 {
		for frame := range 4 {
			if err := s.ReadFrame(c, frame, &f); err != nil {
				t.Fatal(err)
			}
			samePixels(t, f, outsideWidth, outsideHeight, func(x, y int) float32 { return outsidePixel("u16", frame+100*c, x, y) })
		}
	}
}

func TestSlicesAreTakenAsFrames(t *testing.T) {
	s, err := Open("testdata/tiff/slices.ome.tif", OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	in := s.Info()
	if in.SizeT != 3 || in.SizeZ != 1 || s.Frames() != 3 {
		t.Fatalf("SizeT %d, SizeZ %d, %d frames, want 3, 1, 3", in.SizeT, in.SizeZ, s.Frames())
	}
	want := []string{"the file calls its 3 planes slices in Z of one time; they were taken as frames in time"}
	if d := cmp.Diff(want, in.Warnings); d != "" {
		t.Errorf("warnings (-want +got):\n%s", d)
	}
	var f Frame
	for frame := range 3 {
		if err := s.ReadFrame(0, frame, &f); err != nil {
			t.Fatal(err)
		}
		samePixels(t, f, outsideWidth, outsideHeight, func(x, y int) float32 { return outsidePixel("u16", frame, x, y) })
	}
}

func TestResolutionInInches(t *testing.T) {
	s, err := Open("testdata/tiff/inches.tif", OpenOptions{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	m := s.Info().Calibration.PixelUm
	// 25 400 µm to the inch over 254 000 pixels.
	if math.Abs(m.Value-0.1) > 1e-9 || m.Source != "TIFF resolution tags" {
		t.Errorf("pixel size %+v, want 0.1 µm from the resolution tags", m)
	}
}
