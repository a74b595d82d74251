package ridge

import (
	"fmt"
	"testing"
)

// A 512×512 frame with three lines and a floor of 4, one goroutine, the map's memory used again.
func BenchmarkCompute(b *testing.B) {
	f := crowdedFrame(512, 512, 1)
	for name, e := range engines {
		for _, sigma := range []float64{1.2, 1.5, 2.5} {
			b.Run(fmt.Sprintf("%s/sigma=%g", name, sigma), func(b *testing.B) {
				var m Map
				b.ReportAllocs()
				for b.Loop() {
					if err := e.compute(f, Options{SigmaPx: sigma, NoiseCounts: 3, Floor: 4}, &m); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
