package imaging

import (
	"strings"
	"testing"
)

// FuzzOpen holds that any bytes give an error with the file's name or a stack whose frames
// have the size that it says. Run it with -fuzzminimizetime=10x.
func FuzzOpen(f *testing.F) {
	for _, b := range damageSeeds(f) {
		f.Add(b)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		for _, readable := range []bool{false, true} {
			s, err := openBytes(b, OpenOptions{ReadableFrames: readable, MaxPageBytes: 1 << 20})
			if err == nil {
				if s.Frames() < 1 || s.Info().SizeC < 1 || s.Frames()*s.Info().SizeC > s.Info().Pages {
					t.Fatalf("%d frames of %d channels from %d pages", s.Frames(), s.Info().SizeC, s.Info().Pages)
				}
				_, err = readAll(s)
				s.Close()
			} else if s != nil {
				t.Fatal("a stack and an error")
			}
			if err != nil && !strings.HasPrefix(err.Error(), "imaging: stack.tif") {
				t.Fatal(err)
			}
		}
	})
}

// FuzzDescription holds the same of any description in a sound file.
func FuzzDescription(f *testing.F) {
	f.Add(ome(`SizeX="4" SizeY="3" SizeZ="1" SizeC="2" SizeT="3" DimensionOrder="XYTZC" PhysicalSizeX="0.1" PhysicalSizeXUnit="nm" TimeIncrement="3"`,
		`<Channel Name="a"/><TiffData IFD="3" PlaneCount="3"/>`, `<TiffData IFD="0" FirstC="1" FirstT="1"/>`, `<Plane TheC="0" TheT="2" DeltaT="2" ExposureTime="1"/>`))
	f.Add(ome(`SizeX="4" SizeY="3" SizeZ="6" SizeC="1" SizeT="1"`, `<TiffData><UUID FileName="a">u</UUID></TiffData>`))
	f.Add("plain words")
	f.Fuzz(func(t *testing.T, text string) {
		s, err := openBytes(rampStack(4, 3, 6, ascii(270, text)).bytes(), OpenOptions{})
		if err != nil {
			if s != nil || !strings.HasPrefix(err.Error(), "imaging: stack.tif") {
				t.Fatal(s, err)
			}
			return
		}
		if n, err := readAll(s); err != nil || n < 1 || n > 6 || n != s.Frames()*s.Info().SizeC {
			t.Fatalf("%d planes of 6, error %v", n, err)
		}
		c := s.Info().Calibration
		for _, m := range []Measured{c.PixelUm, c.IntervalS, c.ExposureS} {
			if (m.Source != "") != (m.Value > 0) {
				t.Fatalf("%v from %q", m.Value, m.Source)
			}
		}
	})
}
