package ridge

import "wend/imaging"

// plain filters in Go: the engine of builds without OpenCV, and what the other is tested against.
var plain = &engine{
	name:         func() string { return "plain Go" },
	newWorkspace: func() workspace { return new(plainWorkspace) },
}

// plainWorkspace slides down the frame. It keeps the rows within the filter's reach, already
// filtered along x, in a ring, so that they stay in the processor's cache.
type plainWorkspace struct {
	f imaging.Frame
	k *kernel
	// padded is a row of the frame with its mirrored margins.
	padded []float32
	// ring[d][j] is a row filtered along x with derivative d: row y stands at (y+radius) mod (2·radius+1).
	ring [3][][]float32
	// xx, yy, xy are the rows that hessian returns.
	xx, yy, xy []float32
}

func (p *plainWorkspace) load(f imaging.Frame, k *kernel) error {
	rows := 2*k.radius + 1
	if len(p.xx) != f.Width || len(p.ring[0]) != rows {
		p.padded = make([]float32, f.Width+2*k.radius)
		for d := range p.ring {
			p.ring[d] = make([][]float32, rows)
			for j := range p.ring[d] {
				p.ring[d][j] = make([]float32, f.Width)
			}
		}
		p.xx, p.yy, p.xy = make([]float32, f.Width), make([]float32, f.Width), make([]float32, f.Width)
	}
	p.f, p.k = f, k
	for y := -k.radius; y < k.radius; y++ {
		p.filterRow(y)
	}
	return nil
}

func (p *plainWorkspace) close() {}

// filterRow filters row y along x into the ring; rows beyond the frame are mirrored.
func (p *plainWorkspace) filterRow(y int) {
	r, w := p.k.radius, p.f.Width
	src := p.f.Pix[mirror(y, p.f.Height)*w:][:w]
	copy(p.padded[r:], src)
	for i := 1; i <= r; i++ {
		p.padded[r-i] = src[i]
		p.padded[r+w-1+i] = src[w-1-i]
	}
	j := (y + r) % (2*r + 1)
	out0, out1, out2 := p.ring[0][j][:w], p.ring[1][j][:w], p.ring[2][j][:w]
	g0, g1, g2 := p.k.smooth[r:][:r+1], p.k.first[r:][:r+1], p.k.second[r:][:r+1]
	for x := range out0 {
		win := p.padded[x:][:2*r+1]
		v := win[r]
		s0, s1, s2 := g0[0]*v, float32(0), g2[0]*v
		right := win[r:][:r+1]
		for i := 1; i <= r; i++ { // the filters are even, odd, even
			after, before := right[i], win[r-i]
			sum := after + before
			s0 += g0[i] * sum
			s1 += g1[i] * (after - before)
			s2 += g2[i] * sum
		}
		out0[x], out1[x], out2[x] = s0, s1, s2
	}
}

func (p *plainWorkspace) hessian(y int) (xx, yy, xy []float32) {
	r, w := p.k.radius, p.f.Width
	rows := 2*r + 1
	p.filterRow(y + r)
	xx, yy, xy = p.xx[:w], p.yy[:w], p.xy[:w]
	mid := (y + r) % rows
	g, h := p.k.smooth[r], p.k.second[r]
	m0, m2 := p.ring[0][mid][:w], p.ring[2][mid][:w]
	for x := range xx {
		xx[x] = g * m2[x]
		yy[x] = h * m0[x]
		xy[x] = 0
	}
	for i := 1; i <= r; i++ {
		below, above := (y+r+i)%rows, (y+r-i)%rows
		b0, b1, b2 := p.ring[0][below][:w], p.ring[1][below][:w], p.ring[2][below][:w]
		a0, a1, a2 := p.ring[0][above][:w], p.ring[1][above][:w], p.ring[2][above][:w]
		g0, g1, g2 := p.k.smooth[r+i], p.k.first[r+i], p.k.second[r+i]
		for x := range xx {
			xx[x] += g0 * (b2[x] + a2[x])
			yy[x] += g2 * (b0[x] + a0[x])
			xy[x] += g1 * (b1[x] - a1[x])
		}
	}
	return xx, yy, xy
}

func (p *plainWorkspace) gradient(x, y int) (gx, gy float32) {
	r := p.k.radius
	rows := 2*r + 1
	mid := (y + r) % rows
	gx = p.k.smooth[r] * p.ring[1][mid][x]
	for i := 1; i <= r; i++ {
		below, above := (y+r+i)%rows, (y+r-i)%rows
		gx += p.k.smooth[r+i] * (p.ring[1][below][x] + p.ring[1][above][x])
		gy += p.k.first[r+i] * (p.ring[0][below][x] - p.ring[0][above][x])
	}
	return gx, gy
}
