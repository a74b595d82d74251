package imaging

import (
	"math"
	"slices"
)

// samplesPerBlock is about how many pixels of a block EstimateBackground looks at.
const samplesPerBlock = 150

// EstimateBackground writes the smooth background of f, counts, into dst, which is resized; f is
// left as it was. Blocks of about blockPx pixels a side (32 suits filaments a few pixels wide) each
// give one level that bright lines and spots hardly move, a median over neighbouring blocks removes what
// a bundle or a cell did to a single one, and between and beyond the blocks' centres the
// levels are interpolated linearly. Structures that fill most of a block are taken for background.
// A frame under one and a half blocks across shows no slope that way.
//
// Pixels that are not finite are passed over; a block of nothing else has the level 0. A frame without
// pixels gives an empty dst. A blockPx below 8 panics, as does a frame whose Pix does not match its sides.
func EstimateBackground(f Frame, blockPx int, dst *Frame) {
	if blockPx < 8 {
		panic("imaging: EstimateBackground: blockPx below 8")
	}
	if len(f.Pix) != f.Width*f.Height {
		panic("imaging: EstimateBackground: Pix does not match the frame's sides")
	}
	dst.Resize(f.Width, f.Height)
	if len(f.Pix) == 0 {
		return
	}
	nx, ny := blocks(f.Width, blockPx), blocks(f.Height, blockPx)
	raw := make([]float32, nx*ny)
	var buf []float32
	for j := range ny {
		for i := range nx {
			buf = sampleBlock(f, i*f.Width/nx, (i+1)*f.Width/nx, j*f.Height/ny, (j+1)*f.Height/ny, buf[:0])
			raw[j*nx+i] = level(buf)
		}
	}
	interpolate(medianOfNeighbours(raw, nx, ny), nx, ny, dst)
}

// blocks is how many blocks of about size px cover n px.
func blocks(n, size int) int { return max(1, (n+size/2)/size) }

// sampleBlock appends an evenly spread part of the pixels x0…x1−1, y0…y1−1 to buf.
func sampleBlock(f Frame, x0, x1, y0, y1 int, buf []float32) []float32 {
	step := max(1, (x1-x0)*(y1-y0)/samplesPerBlock)
	// Every step-th pixel, the count running on from row to row, so that no column is favoured.
	step |= 1
	skip := 0
	for y := y0; y < y1; y++ {
		row := f.Pix[y*f.Width+x0 : y*f.Width+x1]
		for ; skip < len(row); skip += step {
			v := row[skip]
			if v-v == 0 { // finite
				buf = append(buf, v)
			}
		}
		skip -= len(row)
	}
	return buf
}

// level is the centre of the main, symmetric part of v, which is reordered: what lies farther
// above the centre than noise can is cut off, and the same distance below, until the centre
// stays. The noise comes from the lower half alone, where filaments are not.
func level(v []float32) float32 {
	half := len(v) / 2
	if half == 0 {
		if len(v) == 0 {
			return 0
		}
		return v[0]
	}
	// selectRank leaves the smaller values before the chosen one. Of those, 0.3173 lie more than
	// one standard deviation below it.
	centre := selectRank(v, half)
	sd := centre - selectRank(v[:half], int(0.3173*float64(half)))
	const (
		cut     = 2
		shrinks = 0.7737 // variance of a unit Gaussian cut off at ±2: 1 − 4φ(2)/erf(√2)
	)
	for range 6 {
		reach := cut * sd
		var sum, square float32
		count, below := 0, 0
		for _, x := range v {
			d := x - centre
			if d > reach || d < -reach {
				continue
			}
			sum += d
			count++
			if d <= 0 {
				square += d * d
				below++
			}
		}
		if count == 0 || below == 0 || sd == 0 {
			break
		}
		shift := sum / float32(count)
		centre += shift
		sd = float32(math.Sqrt(float64(square) / float64(below) / shrinks))
		if shift*shift < 1e-4*sd*sd {
			break
		}
	}
	return centre
}

// medianOfNeighbours replaces each block by the median of those around it, as far as they lie on
// both sides of it: a one-sided choice at the border would bend a slope.
func medianOfNeighbours(raw []float32, nx, ny int) []float32 {
	out := make([]float32, len(raw))
	var buf [9]float32
	for j := range ny {
		for i := range nx {
			rx, ry := min(1, i, nx-1-i), min(1, j, ny-1-j)
			v := buf[:0]
			for y := j - ry; y <= j+ry; y++ {
				v = append(v, raw[y*nx+i-rx:y*nx+i+rx+1]...)
			}
			slices.Sort(v)
			out[j*nx+i] = v[len(v)/2]
		}
	}
	return out
}

// interpolate fills dst bilinearly from levels at the centres of nx by ny blocks, going on
// linearly beyond the outermost ones.
func interpolate(levels []float32, nx, ny int, dst *Frame) {
	column, weight := make([]int, dst.Width), make([]float32, dst.Width)
	end := make([]int, nx) // of the stretch of pixels that belongs to a column of blocks
	for x := range column {
		column[x], weight[x] = between(x, dst.Width, nx)
		end[column[x]] = x + 1
	}
	line := make([]float32, nx)
	for y := range dst.Height {
		j, v := between(y, dst.Height, ny)
		a, b := levels[j*nx:][:nx], levels[min(j+1, ny-1)*nx:][:nx]
		for i := range line {
			line[i] = a[i] + v*(b[i]-a[i])
		}
		out := dst.Pix[y*dst.Width:][:dst.Width]
		for x := 0; x < len(out); {
			i := column[x]
			left, rise := line[i], line[min(i+1, nx-1)]-line[i]
			stretch, w := out[x:end[i]], weight[x:end[i]]
			for k := range stretch {
				stretch[k] = left + w[k]*rise
			}
			x = end[i]
		}
	}
}

// between finds the block i whose centre and the next one's enclose pixel x of n, and
// the weight of the next; at the borders the nearest pair, with a weight outside 0…1.
func between(x, n, count int) (i int, weight float32) {
	centre := func(i int) float64 { return float64(i*n/count+(i+1)*n/count-1) / 2 }
	if count == 1 {
		return 0, 0
	}
	i = min(max(x*count/n, 0), count-2)
	if i > 0 && float64(x) < centre(i) {
		i--
	}
	return i, float32((float64(x) - centre(i)) / (centre(i+1) - centre(i)))
}
