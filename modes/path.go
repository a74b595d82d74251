package modes

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// pathNodeUm is the distance of the nodes of a tube's axis, µm: fine enough for a radius of 10 µm to be followed to a nanometre, too coarse for the
// undulations of a filament to be taken for the tube's.
const pathNodeUm = 3.0

// pathSpline is a uniform cubic B-spline over an arc length.
type pathSpline struct {
	low, node float64
	count     int // coefficients
}

func newPathSpline(low, high float64) pathSpline {
	cells := max(1, int(math.Round((high-low)/pathNodeUm)))
	return pathSpline{low, (high - low) / float64(cells), cells + 3}
}

// at returns the first of the four coefficients that make the spline at s, and their weights.
func (p pathSpline) at(s float64) (first int, weight [4]float64) {
	u := (s - p.low) / p.node
	k := min(max(int(math.Floor(u)), 0), p.count-4)
	t := u - float64(k)
	v := 1 - t
	return k, [4]float64{v * v * v / 6, (3*t*t*t - 6*t*t + 4) / 6, (3*v*v*v - 6*v*v + 4) / 6, t * t * t / 6}
}

// stiffen adds to normal equations, whose first parameters are the coefficients, a penalty on second differences: what few points reach goes on as its
// neighbours do.
func (p pathSpline) stiffen(ata *mat.SymDense, weight float64) {
	for k := 1; k < p.count-1; k++ {
		for _, e := range [][3]float64{{-1, -1, 1}, {-1, 0, -2}, {-1, 1, 1}, {0, 0, 4}, {0, 1, -2}, {1, 1, 1}} {
			i, j := k+int(e[0]), k+int(e[1])
			ata.SetSym(i, j, ata.At(i, j)+weight*e[2])
		}
	}
	for k := range p.count {
		ata.SetSym(k, k, ata.At(k, k)+1e-4*weight)
	}
}
