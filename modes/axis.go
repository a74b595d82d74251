package modes

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// axis is a smooth path in the image in equal steps of arc length, µm, with the unit normal at each point. Arc length 0 is its first point.
type axis struct {
	x, y, nx, ny []float64
	step         float64
}

func newAxis(x, y []float64) axis {
	const step = 0.1
	at := make([]float64, len(x))
	for i := 1; i < len(x); i++ {
		at[i] = at[i-1] + math.Hypot(x[i]-x[i-1], y[i]-y[i-1])
	}
	n := max(3, int(math.Round(at[len(at)-1]/step))+1)
	a := axis{step: at[len(at)-1] / float64(n-1)}
	j := 0
	for i := range n {
		s := a.step * float64(i)
		for j < len(at)-2 && at[j+1] < s {
			j++
		}
		f := (s - at[j]) / (at[j+1] - at[j])
		a.x, a.y = append(a.x, x[j]+f*(x[j+1]-x[j])), append(a.y, y[j]+f*(y[j+1]-y[j]))
	}
	for i := range n {
		b, c := max(0, i-1), min(n-1, i+1)
		dx, dy := a.x[c]-a.x[b], a.y[c]-a.y[b]
		h := math.Hypot(dx, dy)
		a.nx, a.ny = append(a.nx, -dy/h), append(a.ny, dx/h)
	}
	return a
}

func (a axis) length() float64 { return a.step * float64(len(a.x)-1) }

// foot returns where the point lies along the axis, µm, and how far across it, positive along the normal. Beyond its ends the axis goes on straight.
// near is an index to start looking from; the last index is returned for the next point.
func (a axis) foot(px, py float64, near int) (s, across float64, last int) {
	n := len(a.x)
	i := min(max(near, 0), n-2)
	along := func(i int) float64 { // share of segment i, from its first point
		dx, dy := a.x[i+1]-a.x[i], a.y[i+1]-a.y[i]
		return ((px-a.x[i])*dx + (py-a.y[i])*dy) / (dx*dx + dy*dy)
	}
	f := along(i)
	for range n {
		if f > 1 && i < n-2 {
			if g := along(i + 1); g > 0 {
				i, f = i+1, g
				continue
			}
		} else if f < 0 && i > 0 {
			if g := along(i - 1); g < 1 {
				i, f = i-1, g
				continue
			}
		}
		break
	}
	if f > 1 && i < n-2 || f < 0 && i > 0 { // the outer side of a bend
		f = math.Min(math.Max(f, 0), 1)
	}
	g := math.Min(math.Max(f, 0), 1)
	nx, ny := a.nx[i]+g*(a.nx[i+1]-a.nx[i]), a.ny[i]+g*(a.ny[i+1]-a.ny[i])
	x, y := a.x[i]+f*(a.x[i+1]-a.x[i]), a.y[i]+f*(a.y[i+1]-a.y[i])
	return a.step * (float64(i) + f), ((px-x)*nx + (py-y)*ny) / math.Hypot(nx, ny), i
}

// at returns point and normal at arc length s, beyond the ends along the end's direction.
func (a axis) at(s float64) (x, y, nx, ny float64) {
	u := s / a.step
	i := min(max(int(math.Floor(u)), 0), len(a.x)-2)
	f := u - float64(i)
	g := math.Min(math.Max(f, 0), 1)
	nx, ny = a.nx[i]+g*(a.nx[i+1]-a.nx[i]), a.ny[i]+g*(a.ny[i+1]-a.ny[i])
	h := math.Hypot(nx, ny)
	return a.x[i] + f*(a.x[i+1]-a.x[i]), a.y[i] + f*(a.y[i+1]-a.y[i]), nx / h, ny / h
}

// against returns the chords of a frame's contour with the axis's direction taken from their angles.
func (f *tubeFrame) against(frame int, c Curve, ch chords) chords {
	out := ch
	out.angle = make([]float64, len(ch.angle))
	last, turned := 0, 0.0
	for i, angle := range ch.angle {
		px, py := f.moved(frame, (c.XUm[i]+c.XUm[i+1])/2, (c.YUm[i]+c.YUm[i+1])/2)
		var s float64
		if i == 0 {
			s, _, last = f.nearest(px, py)
		} else {
			s, _, last = f.foot(px, py, last)
		}
		_, _, nx, ny := f.at(s)
		direction := math.Atan2(-nx, ny)
		if i > 0 {
			direction = turned + math.Remainder(direction-turned, 2*math.Pi)
		}
		turned = direction
		out.angle[i] = angle - direction
	}
	return out
}

// driftDegree is the degree of the polynomial in time that stands for the drift of the stage.
const driftDegree = 2

// tubeFrame is a tube's axis with what the stage did to it: displacement and rotation about the filament's middle as polynomials in time, 0 in the mean
// of the frames.
type tubeFrame struct {
	axis
	columns [][]float64 // powers 1 and up of time, scaled, their means taken off: columns[degree-1][frame]
	// Coefficients of the columns: µm, µm, rad.
	dx, dy, turn [driftDegree]float64
	midX, midY   float64
	alongIsTold  bool // whether the bends of the axis tell drift along it from sliding
}

// moved undoes the drift in a frame for a point.
func (f *tubeFrame) moved(frame int, x, y float64) (float64, float64) {
	dx, dy, turn := f.drift(frame)
	x, y = x-dx-f.midX, y-dy-f.midY
	sin, cos := math.Sincos(-turn)
	return f.midX + x*cos - y*sin, f.midY + x*sin + y*cos
}

// drift of a frame, µm, µm and rad.
func (f *tubeFrame) drift(frame int) (dx, dy, turn float64) {
	for d, c := range f.columns {
		dx, dy, turn = dx+f.dx[d]*c[frame], dy+f.dy[d]*c[frame], turn+f.turn[d]*c[frame]
	}
	return dx, dy, turn
}

// findTube lays a smooth axis through all contours and finds the drift along with it, from the displacements across the axis: undulations go to and fro, the
// axis stays, drift is a polynomial in time. What drift does along a straight axis can't be seen; a bent one shows it. The movie's contours pull at the axis
// with the same weight.
func findTube(curves []Curve, timesS []float64) (*tubeFrame, bool) {
	if len(curves) < driftDegree+3 {
		return nil, false
	}
	first := curves[len(curves)/2]
	f := &tubeFrame{axis: newAxis(first.XUm, first.YUm)}
	if !f.smooth() {
		return nil, false
	}
	f.midX, f.midY = mean(first.XUm), mean(first.YUm)
	f.columns = polynomialColumns(timesS, driftDegree)
	for round := range 10 {
		if !f.improve(curves, round) {
			return nil, false
		}
	}
	return f, true
}

// polynomialColumns are the powers 1 to degree of time, scaled to −1 to 1, less their means.
func polynomialColumns(timesS []float64, degree int) [][]float64 {
	first, last := timesS[0], timesS[len(timesS)-1]
	out := make([][]float64, degree)
	for _, t := range timesS {
		x := 2*(t-first)/(last-first) - 1
		p := x
		for d := range out {
			out[d] = append(out[d], p)
			p *= x
		}
	}
	for d := range out {
		m := mean(out[d])
		for i := range out[d] {
			out[d][i] -= m
		}
	}
	return out
}

// improve fits a correction of the axis and of the drift to the displacements of all contours' points.
func (f *tubeFrame) improve(curves []Curve, round int) bool {
	const everyUm = 0.2
	type sample struct {
		s, across float64
		frame     int
		x, y      float64
	}
	var all []sample
	low, high := math.Inf(1), math.Inf(-1)
	for i, c := range curves {
		stride := max(1, int(everyUm/0.1))
		last := 0
		px, py := f.moved(i, c.XUm[0], c.YUm[0])
		_, _, last = f.nearest(px, py)
		for j := 0; j < len(c.XUm); j += stride {
			px, py = f.moved(i, c.XUm[j], c.YUm[j])
			var s, across float64
			s, across, last = f.foot(px, py, last)
			all = append(all, sample{s, across, i, px, py})
			low, high = math.Min(low, s), math.Max(high, s)
		}
	}
	path := newPathSpline(low, high)
	nodes := path.count
	if nodes > 2000 || len(all) < 4*nodes {
		return false
	}
	// The first rounds move the axis alone, then the drift comes in.
	params := nodes
	if round > 0 {
		params += 3 * driftDegree
	}
	ata, atb := mat.NewSymDense(params, nil), mat.NewVecDense(params, nil)
	row := make([]float64, params)
	var touched []int
	for _, p := range all {
		k, weight := path.at(p.s)
		touched = touched[:0]
		for j, w := range weight {
			touched = append(touched, k+j)
			row[k+j] = w
		}
		if params > nodes {
			_, _, nx, ny := f.at(p.s)
			arm := -(p.y-f.midY)*nx + (p.x-f.midX)*ny
			for d, c := range f.columns {
				v := c[p.frame]
				for q, w := range []float64{nx * v, ny * v, arm * v} {
					i := nodes + 3*d + q
					row[i] = w
					touched = append(touched, i)
				}
			}
		}
		for _, i := range touched {
			atb.SetVec(i, atb.AtVec(i)+row[i]*p.across)
			for _, j := range touched {
				if j >= i {
					ata.SetSym(i, j, ata.At(i, j)+row[i]*row[j])
				}
			}
		}
	}
	perNode := float64(len(all)) / float64(nodes)
	path.stiffen(ata, 0.02*perNode)
	if params > nodes {
		// Drift that the contours can't tell stays 0: along a straight axis, and a turn about the centre of an arc, which is like sliding
		// along it; stages shift rather than turn.
		for d := range f.columns {
			for q, now := range []float64{f.dx[d], f.dy[d], f.turn[d]} {
				w := 1e-5 * float64(len(all))
				if q == 2 {
					w = 0.3 * float64(len(all))
				}
				i := nodes + 3*d + q
				ata.SetSym(i, i, ata.At(i, i)+w)
				atb.SetVec(i, atb.AtVec(i)-w*now)
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(ata) {
		return false
	}
	var solved mat.VecDense
	if chol.SolveVecTo(&solved, atb) != nil {
		return false
	}
	for d := range f.columns {
		if params > nodes {
			f.dx[d] += solved.AtVec(nodes + 3*d)
			f.dy[d] += solved.AtVec(nodes + 3*d + 1)
			f.turn[d] += solved.AtVec(nodes + 3*d + 2)
		}
	}
	var x, y []float64
	for s := low; s <= high+1e-9; s += 0.1 {
		k, weight := path.at(s)
		shift := 0.0
		for j, w := range weight {
			shift += w * solved.AtVec(k+j)
		}
		ax, ay, nx, ny := f.at(s)
		x, y = append(x, ax+shift*nx), append(y, ay+shift*ny)
	}
	if len(x) < 3 {
		return false
	}
	f.axis = newAxis(x, y)
	if !f.smooth() {
		return false
	}
	f.alongIsTold = f.bends() > toldBend
	return true
}

// smooth takes from the axis what is finer than its nodes: a path is the curve of its spline, whatever it was made from.
func (f *tubeFrame) smooth() bool {
	path := newPathSpline(0, f.length())
	ata := mat.NewSymDense(path.count, nil)
	atx, aty := mat.NewVecDense(path.count, nil), mat.NewVecDense(path.count, nil)
	for i := range f.x {
		k, weight := path.at(f.step * float64(i))
		for a, wa := range weight {
			atx.SetVec(k+a, atx.AtVec(k+a)+wa*f.x[i])
			aty.SetVec(k+a, aty.AtVec(k+a)+wa*f.y[i])
			for b := a; b < len(weight); b++ {
				ata.SetSym(k+a, k+b, ata.At(k+a, k+b)+wa*weight[b])
			}
		}
	}
	path.stiffen(ata, 1e-3)
	var chol mat.Cholesky
	var cx, cy mat.VecDense
	if !chol.Factorize(ata) || chol.SolveVecTo(&cx, atx) != nil || chol.SolveVecTo(&cy, aty) != nil {
		return false
	}
	x, y := make([]float64, len(f.x)), make([]float64, len(f.x))
	for i := range f.x {
		k, weight := path.at(f.step * float64(i))
		for j, w := range weight {
			x[i], y[i] = x[i]+w*cx.AtVec(k+j), y[i]+w*cy.AtVec(k+j)
		}
	}
	f.axis = newAxis(x, y)
	return true
}

// toldBend is the root mean square, rad, of the axis's direction about its mean beyond which its bends tell drift along it.
const toldBend = 0.15

// bends is the root mean square of the axis's direction about its mean, rad.
func (a axis) bends() float64 {
	c := Curve{XUm: a.x, YUm: a.y}
	ch, ok := newChords(c)
	if !ok {
		return 0
	}
	m, v := mean(ch.angle), 0.0
	for _, x := range ch.angle {
		v += (x - m) * (x - m) / float64(len(ch.angle))
	}
	return math.Sqrt(v)
}

// nearest is foot from anywhere.
func (a axis) nearest(px, py float64) (s, across float64, last int) {
	best := math.Inf(1)
	for i := range a.x {
		if d := math.Hypot(px-a.x[i], py-a.y[i]); d < best {
			best, last = d, i
		}
	}
	return a.foot(px, py, last)
}
