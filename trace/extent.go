package trace

import (
	"math"

	"wend/imaging"
)

// extent cuts path, or makes it go on straight, to where the line's light begins and ends. Along the
// path the light is compared with six tenths of its median: of all stretches the one with the largest
// sum of differences is the likeliest to be a line of even brightness with nothing beyond. A dark
// gap stays inside, a noise ridge that continues the line stays out.
func extent(frame, background imaging.Frame, excluded func(pixel int) bool, path []xy, width float64) []xy {
	length := arcLengths(path)[len(path)-1]
	margin := 6 * width
	const step = 0.5
	count := int((length+2*margin)/step) + 1
	points := resample(path, -margin, step, count)
	light := make([]float64, count)
	for i, p := range points {
		light[i] = glow(frame, background, excluded, p, width)
	}
	inner := light[int(margin/step) : count-int(margin/step)]
	half := median(inner) / 1.7
	if !(half > 0) {
		return path
	}
	best, sum := 0.0, 0.0
	from, to, start := 0, count-1, 0
	for i, v := range light {
		sum += min(v, 1.7*half) - half
		if sum <= 0 {
			sum, start = 0, i+1
		}
		if sum > best {
			best, from, to = sum, start, i
		}
	}
	if float64(to-from)*step < 4*width {
		return path
	}
	return points[from : to+1]
}

// glow is the light at p seen through a Gaussian of the line's width, in no particular unit.
func glow(frame, background imaging.Frame, excluded func(pixel int) bool, p xy, width float64) float64 {
	r := 2 * width
	x0, x1 := max(0, int(math.Ceil(p.x-r))), min(frame.Width-1, int(math.Floor(p.x+r)))
	y0, y1 := max(0, int(math.Ceil(p.y-r))), min(frame.Height-1, int(math.Floor(p.y+r)))
	sum := 0.0
	scale := 1 / (2 * width * width)
	for y := y0; y <= y1; y++ {
		for x := x0; x <= x1; x++ {
			i := y*frame.Width + x
			if excluded != nil && excluded(i) {
				continue
			}
			// (1-d²/r²)² stands in for the Gaussian: it is close to it and needs no exponential.
			d2 := (sq(float64(x)-p.x) + sq(float64(y)-p.y)) * scale / 2
			if d2 < 1 {
				sum += sq(1-d2) * float64(frame.Pix[i]-background.Pix[i])
			}
		}
	}
	return sum
}
