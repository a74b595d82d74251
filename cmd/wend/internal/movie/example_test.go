package movie_test

import (
	"fmt"

	"wend/cmd/wend/internal/movie"
	"wend/imaging"
)

func ExampleNew() {
	o := movie.DefaultOptions()
	o.Frames, o.LengthUm, o.LpUm, o.ExposureS = 10, 8, 17, 0
	m, err := movie.New(o)
	if err != nil {
		fmt.Println(err)
		return
	}
	var frame imaging.Frame
	m.Frame(7, &frame)
	contour := m.Truth(7)[0]
	fmt.Printf("%d × %d pixels, %.2f µm of filament\n", frame.Width, frame.Height, contour.SUm[len(contour.SUm)-1])
	// Output: 256 × 200 pixels, 8.00 µm of filament
}
