package imaging_test

import (
	"fmt"
	"log"

	"wend/imaging"
)

func ExampleOpen() {
	s, err := imaging.Open("testdata/tiff/channels.ome.tif", imaging.OpenOptions{})
	if err != nil {
		log.Fatal(err)
	}
	defer s.Close()
	in := s.Info()
	fmt.Printf("%d channels, %d frames of %d x %d pixels, %s\n", in.SizeC, s.Frames(), in.Width, in.Height, in.PixelType)
	fmt.Printf("pixel %.3f µm from %s\n", in.Calibration.PixelUm.Value, in.Calibration.PixelUm.Source)
	var f imaging.Frame
	for t := range s.Frames() {
		if err := s.ReadFrame(0, t, &f); err != nil {
			log.Fatal(err)
		}
		fmt.Printf("frame %d at %.2f s: first pixel %.0f counts\n", t, in.Calibration.TimesS[t], f.At(0, 0))
	}
	// Output:
	// 2 channels, 4 frames of 29 x 21 pixels, uint16
	// pixel 0.065 µm from OME-XML PhysicalSizeX
	// frame 0 at 0.00 s: first pixel 0 counts
	// frame 1 at 0.25 s: first pixel 9001 counts
	// frame 2 at 0.50 s: first pixel 18002 counts
	// frame 3 at 1.00 s: first pixel 27003 counts
}
