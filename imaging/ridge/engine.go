package ridge

import (
	"math"
	"sync"

	"wend/imaging"
)

// workspace is one implementation of the derivative filters, for one goroutine at a time.
type workspace interface {
	// load takes in a frame that check has passed.
	load(f imaging.Frame, k *kernel) error
	// hessian returns row y of the second derivatives, valid until the next call. Rows
	// are asked for in order, from 0, each once.
	hessian(y int) (xx, yy, xy []float32)
	// gradient returns the first derivatives at a pixel of the row last asked for.
	gradient(x, y int) (gx, gy float32)
	// close frees what Go does not.
	close()
}

// engine computes maps with one kind of workspace, and keeps the idle ones: as many as there
// were calls at a time.
type engine struct {
	name         func() string
	newWorkspace func() workspace

	mu   sync.Mutex
	idle []*slot
}

// slot is a workspace with the kernel that it used last.
type slot struct {
	ws workspace
	k  *kernel
}

func (e *engine) take() *slot {
	e.mu.Lock()
	defer e.mu.Unlock()
	if n := len(e.idle); n > 0 {
		b := e.idle[n-1]
		e.idle = e.idle[:n-1]
		return b
	}
	return &slot{ws: e.newWorkspace()}
}

func (e *engine) put(b *slot) {
	e.mu.Lock()
	defer e.mu.Unlock()
	e.idle = append(e.idle, b)
}

func (e *engine) drain() {
	e.mu.Lock()
	idle := e.idle
	e.idle = nil
	e.mu.Unlock()
	for _, b := range idle {
		b.ws.close()
	}
}

func (e *engine) compute(f imaging.Frame, o Options, dst *Map) error {
	if err := check(f, o); err != nil {
		return err
	}
	b := e.take()
	defer e.put(b)
	if b.k == nil || b.k.sigma != o.SigmaPx {
		b.k = newKernel(o.SigmaPx)
	}
	if err := b.ws.load(f, b.k); err != nil {
		return err
	}
	dst.resize(f.Width, f.Height)
	for y := range f.Height {
		scanRow(b.ws, b.k, o, y, dst)
	}
	return nil
}

// scanRow turns row y of the derivatives into row y of the map. Nearly all pixels of a frame
// are background; they leave after a few multiplications, before any root or angle.
func scanRow(ws workspace, k *kernel, o Options, y int, dst *Map) {
	w := dst.Width
	xx, yy, xy := ws.hessian(y)
	xx, yy, xy = xx[:w], yy[:w], xy[:w]
	row := y * w
	unit := k.noise * o.NoiseCounts // counts/px² per unit of strength
	least := float32(o.Floor * unit)
	var noise []float32
	if o.Noise != nil {
		noise = o.Noise[row : row+w]
	}
	for x, a := range xx {
		// The eigenvalues are mean ± √q. The response √q−mean reaches least only if
		// √q reaches least+mean.
		if noise != nil {
			unit = k.noise * float64(noise[x])
			least = float32(o.Floor * unit)
		}
		b, c := yy[x], xy[x]
		mean, half := (a+b)*0.5, (a-b)*0.5
		q := half*half + c*c
		if m := least + mean; m > 0 && q < m*m {
			continue
		}
		if mean >= 0 { // a dark line's curvature is the stronger
			continue
		}
		root := math.Sqrt(float64(q))
		response := root - float64(mean)
		cos, sin := 1.0, 0.0
		if root > 0 {
			// The normal's angle θ has cos 2θ = −half/root, sin 2θ = −c/root.
			cos = math.Sqrt(max(0, (1-float64(half)/root)/2))
			sin = math.Sqrt(max(0, (1+float64(half)/root)/2))
			if c > 0 {
				sin = -sin
			}
		}
		gx, gy := ws.gradient(x, y)
		dst.Strength[row+x] = float32(response / unit)
		dst.Theta[row+x] = float32(math.Atan2(sin, cos))
		dst.Offset[row+x] = float32(crest((float64(gx)*cos+float64(gy)*sin)/response, k.sigma))
	}
}

// crest turns the Newton step t towards a zero of the gradient into the distance to the crest
// (px). For a Gaussian line of standard deviation s the step from the distance d is
// d/(1−d²/S²), S² = s²+σ², too long by 7 % at d = ½ for s = σ = 1 and without bound beyond; this
// solves for d with s = σ.
func crest(t, sigma float64) float64 {
	return 2 * t / (1 + math.Sqrt(1+2*t*t/(sigma*sigma)))
}
