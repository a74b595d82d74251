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
