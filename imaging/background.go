package imaging

import (
	"math"
	"slices"
)

// EstimateBackground puts the smooth background of f into dst, in counts. The frame is cut into
// blocks of about blockPx pixels; in each the pixels near the median are averaged, without the
// bright ones that belong to filaments and spots; a median over neighbouring blocks removes what
// fills a whole block; between the blocks' centres the background is linear. blockPx must be
// positive. Anything smaller than two blocks is not background.
func EstimateBackground(f Frame, blockPx int, dst *Frame) {
	if blockPx <= 0 {
		panic("imaging: EstimateBackground: blockPx must be positive")
	}
	dst.Resize(f.Width, f.Height)
	nx, ny := max(1, (f.Width+blockPx/2)/blockPx), max(1, (f.Height+blockPx/2)/blockPx)
	levels := make([]float32, nx*ny)
	values := make([]float32, 0, blockPx*blockPx/4+blockPx)
	for by := range ny {
		y0, y1 := by*f.Height/ny, (by+1)*f.Height/ny
		for bx := range nx {
			x0, x1 := bx*f.Width/nx, (bx+1)*f.Width/nx
			values = values[:0]
			// Every third pixel of every second row: neighbours share most of a filament anyway.
			for y := y0; y < y1; y += 2 {
				row := f.Pix[y*f.Width : (y+1)*f.Width]
				for x := x0 + y/2%3; x < x1; x += 3 {
					values = append(values, row[x])
				}
			}
			levels[by*nx+bx] = float32(clippedMean(values))
		}
	}
	levels = medianOfNeighbours(levels, nx, ny)
	interpolateBlocks(levels, nx, ny, dst)
}

// clippedMean averages the values within 2.5 standard deviations of the median, the deviation
// taken from the values below it, where nothing bright can widen it. It sorts v.
func clippedMean(v []float32) float64 {
	if len(v) == 0 {
		return 0
	}
	slices.Sort(v)
	for range 3 {
		n := len(v)
		median := float64(v[n/2])
		sd := max(median-float64(v[int(0.1587*float64(n))]), 0.5)
		hi := n
		for hi > 1 && float64(v[hi-1]) > median+2.5*sd {
			hi--
		}
		if hi == n {
			break
		}
		v = v[:hi]
	}
	n := len(v)
	median := float64(v[n/2])
	sd := max(median-float64(v[int(0.1587*float64(n))]), 0.5)
	sum, count := 0.0, 0
	for _, x := range v {
		if math.Abs(float64(x)-median) <= 2.5*sd {
			sum += float64(x)
			count++
		}
	}
	if count == 0 {
		return median
	}
	return sum / float64(count)
}

func medianOfNeighbours(levels []float32, nx, ny int) []float32 {
	out := make([]float32, len(levels))
	var near []float32
	for y := range ny {
		for x := range nx {
			near = near[:0]
			for j := max(0, y-1); j <= min(ny-1, y+1); j++ {
				near = append(near, levels[j*nx+max(0, x-1):j*nx+min(nx-1, x+1)+1]...)
			}
			slices.Sort(near)
			n := len(near)
			out[y*nx+x] = (near[(n-1)/2] + near[n/2]) / 2
		}
	}
	return out
}

// interpolateBlocks spreads block levels over dst, linearly between the blocks' centres and
// constant outside them.
func interpolateBlocks(levels []float32, nx, ny int, dst *Frame) {
	place := func(i, count, size int) (int, int, float32) {
		at := (float64(i)+0.5)*float64(count)/float64(size) - 0.5
		k := min(max(int(math.Floor(at)), 0), count-1)
		return k, min(k+1, count-1), float32(min(max(at-float64(k), 0), 1))
	}
	row := make([]float32, nx)
	for y := range dst.Height {
		a, b, t := place(y, ny, dst.Height)
		for x := range nx {
			row[x] = levels[a*nx+x] + t*(levels[b*nx+x]-levels[a*nx+x])
		}
		out := dst.Pix[y*dst.Width : (y+1)*dst.Width]
		for x := range out {
			c, d, u := place(x, nx, dst.Width)
			out[x] = row[c] + u*(row[d]-row[c])
		}
	}
}

// NoiseStd returns the standard deviation of one pixel's noise in counts, from the differences of
// neighbours in f minus background. Filaments and spots are left out because differences beyond
// three standard deviations are; it is right for noise that is white. NaN for less than two columns.
func NoiseStd(f, background Frame) float64 {
	var sum float64
	n := 0
	limit := math.Inf(1)
	sd := math.NaN()
	for range 12 {
		sum, n = 0, 0
		for y := 0; y < f.Height; y += 3 {
			row, back := f.Pix[y*f.Width:(y+1)*f.Width], background.Pix[y*f.Width:(y+1)*f.Width]
			for x := 0; x+1 < len(row); x += 2 {
				d := float64((row[x+1] - back[x+1]) - (row[x] - back[x]))
				if math.Abs(d) <= limit {
					sum += d * d
					n++
				}
			}
		}
		if n == 0 {
			return sd
		}
		v := sum / float64(n)
		if !math.IsInf(limit, 1) {
			v /= 0.9733 // variance of a Gaussian cut at three standard deviations
		}
		before := sd
		sd = math.Sqrt(v / 2)
		limit = 3 * math.Sqrt(v)
		if math.Abs(before-sd) < 1e-3*sd {
			break
		}
	}
	return sd
}
