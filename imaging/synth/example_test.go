package synth_test

import (
	"fmt"

	"wend/imaging/synth"
)

func ExampleScene_Expect() {
	scene := synth.Scene{Width: 100, Height: 60, Optics: synth.Optics{PixelUm: 0.1, PSFUm: 0.13}}
	line := synth.Line{Curves: []synth.Curve{{X: []float64{2, 8}, Y: []float64{2.5, 3.5}}}, PhotonsPerUm: 500}
	var im synth.Image
	scene.Expect([]synth.Line{line}, 1, &im)
	total := 0.0
	for _, photons := range im.Pix {
		total += photons
	}
	fmt.Printf("%.0f photons on %.3f µm\n", total, line.Curves[0].Length())
	// Output: 3041 photons on 6.083 µm
}
