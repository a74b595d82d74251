package trace

import (
	"math"

	"wend/imaging"
)

// binnedFrame is a frame of large pixels, in memory that is reused.
type binnedFrame struct{ imaging.Frame }

// average sets b to the means of frame minus background over squares of bin pixels, in standard
// deviations of one pixel's noise there: where the background is brighter, so is its noise. What is left
// over at the right and the bottom is not seen.
func (b *binnedFrame) average(frame, background imaging.Frame, bin int, camera imaging.Camera) {
	b.Resize(frame.Width/bin, frame.Height/bin)
	scale := 1 / float32(bin*bin)
	for y := range b.Height {
		out := b.Pix[y*b.Width : (y+1)*b.Width]
		clear(out)
		for dy := range bin {
			at := (y*bin + dy) * frame.Width
			row, under := frame.Pix[at:at+frame.Width], background.Pix[at:at+frame.Width]
			for x := range out {
				sum := float32(0)
				for k := x * bin; k < (x+1)*bin; k++ {
					sum += row[k] - under[k]
				}
				out[x] += sum
			}
		}
		under := background.Pix[(y*bin+bin/2)*frame.Width:]
		for x := range out {
			out[x] *= scale / float32(math.Sqrt(camera.Variance(float64(under[x*bin+bin/2]))))
		}
	}
}
