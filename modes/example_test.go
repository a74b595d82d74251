package modes_test

import (
	"fmt"
	"math"
	"math/rand/v2"

	"wend/modes"
	"wend/modes/chain"
)

// A filament of 8 µm with a persistence length of 10 µm, two hundred contours of it half a second apart. (Invented data.)
func ExampleAnalyse() {
	c, err := chain.NewChain(chain.Options{LengthUm: 8, LpUm: 10, DragPaS: 4e-3, TempK: 295})
	if err != nil {
		fmt.Println(err)
		return
	}
	track, err := c.NewTrack(chain.TrackOptions{Frames: 200, IntervalS: 0.5, ExposureS: 0,
		Rand: func(frame int) *rand.Rand { return rand.New(rand.NewPCG(6, uint64(frame+1))) }})
	if err != nil {
		fmt.Println(err)
		return
	}
	s := modes.Series{LengthUm: 8, PSFUm: 0.13, IntervalS: 0.5, TemperatureK: 295, FreeEnds: true}
	for i := range track.Frames() {
		p, _ := track.SubCurves(i)[0].Resample(0.1)
		s.Curves = append(s.Curves, modes.Curve{XUm: p.X, YUm: p.Y})
		s.TimesS = append(s.TimesS, 0.5*float64(i))
		s.NoiseUm3 = append(s.NoiseUm3, 1e-6)
	}
	r := modes.Analyse(s, modes.DefaultOptions())
	fmt.Println("from:", r.LpFrom, "thermal:", r.Thermal)
	fmt.Println("within a fifth:", math.Abs(r.LpUm/10-1) < 0.2)
	fmt.Println("interval holds 10 µm:", r.LpLowUm < 10 && 10 < r.LpHighUm)
	// Output:
	// from: likelihood thermal: yes
	// within a fifth: true
	// interval holds 10 µm: true
}
