package movie

import (
	"fmt"
	"math"

	"wend/imaging/synth"
	"wend/modes/chain"
)

// place makes the filaments and finds each a home inside the field, apart from those
// before it.
func (m *Movie) place() error {
	o := m.opts
	rng := o.random(forPlacing, 0, 0)
	var placed []chain.Curve
	for i := range o.Filaments {
		length := o.LengthUm * (1 + o.LengthSpread*(2*rng.Float64()-1))
		opts := chain.Options{LengthUm: length, LpUm: o.LpUm, DragPaS: o.drag(), TempK: o.TempK(),
			CurvaturePerUm: o.BendPerUm, WanderUm: o.WanderUm, TurnRad: o.TurnRad}
		if o.TubeRmsUm > 0 {
			opts.TubeStiffness = chain.TubeStiffness(o.TubeRmsUm, o.LpUm, o.TempK())
		}
		c, err := chain.NewChain(opts)
		if err != nil {
			return fmt.Errorf("movie: filament %d: %w", i+1, err)
		}
		// The first shape does not depend on home, so it can be tried at many.
		var shape chain.Curve
		c.Curve(c.Equilibrium(o.random(forMoving, i, -1)), &shape)
		margin := math.Min(2, c.EndRmsUm()) + 5*o.PSFUm
		swing := 0.0
		if o.TubeRmsUm == 0 && !math.IsInf(o.TurnRad, 1) {
			swing = math.Min(2*o.TurnRad, math.Pi/2)
		}
		if !math.IsInf(o.WanderUm, 1) {
			margin += 2 * o.WanderUm
		}
		found := false
		const tries = 4000
		for try := 0; try < tries && !found; try++ {
			home := chain.Pose{
				XUm:      rng.Float64() * float64(o.WidthPx-1) * o.PixelUm,
				YUm:      rng.Float64() * float64(o.HeightPx-1) * o.PixelUm,
				AngleRad: (2*rng.Float64() - 1) * math.Pi,
			}
			trial := moved(shape, home, 0)
			if !m.inside(trial, margin) || !m.inside(moved(shape, home, swing), margin) || !m.inside(moved(shape, home, -swing), margin) {
				continue
			}
			if !o.AllowCrossing && tooNear(trial, placed, 10*o.PSFUm) {
				continue
			}
			found = true
			placed = append(placed, trial)
			m.chains = append(m.chains, c.At(home))
		}
		if !found {
			return fmt.Errorf("movie: %w: filament %d of %d (%.3g µm long) found no place in %.4g × %.4g µm with %.2g µm to the edges, want a larger field, fewer or shorter filaments, or crossings allowed",
				ErrOptions, i+1, o.Filaments, length, float64(o.WidthPx)*o.PixelUm, float64(o.HeightPx)*o.PixelUm, margin)
		}
	}
	return nil
}

// moved returns c turned about the origin by home's angle and turn, then shifted to home.
func moved(c chain.Curve, home chain.Pose, turn float64) chain.Curve {
	sin, cos := math.Sincos(home.AngleRad + turn)
	out := chain.Curve{X: make([]float64, len(c.X)), Y: make([]float64, len(c.X))}
	for i := range c.X {
		out.X[i] = home.XUm + c.X[i]*cos - c.Y[i]*sin
		out.Y[i] = home.YUm + c.X[i]*sin + c.Y[i]*cos
	}
	return out
}

// inside tells whether all of c is at least marginUm from the field's edges.
func (m *Movie) inside(c chain.Curve, marginUm float64) bool {
	low := marginUm - m.opts.PixelUm/2
	right := (float64(m.opts.WidthPx)-0.5)*m.opts.PixelUm - marginUm
	bottom := (float64(m.opts.HeightPx)-0.5)*m.opts.PixelUm - marginUm
	for i := range c.X {
		if !(c.X[i] >= low && c.X[i] <= right && c.Y[i] >= low && c.Y[i] <= bottom) {
			return false
		}
	}
	return true
}

// tooNear tells whether c comes within gapUm of any of others.
func tooNear(c chain.Curve, others []chain.Curve, gapUm float64) bool {
	points, _ := c.Resample(gapUm / 3)
	for _, other := range others {
		theirs, _ := other.Resample(gapUm / 3)
		for i := range points.X {
			for j := range theirs.X {
				if math.Hypot(points.X[i]-theirs.X[j], points.Y[i]-theirs.Y[j]) < gapUm {
					return true
				}
			}
		}
	}
	return false
}

// scatterDirt places spots and hot pixels, each of a brightness like half a µm of filament.
func (m *Movie) scatterDirt() {
	o := m.opts
	rng := o.random(forDirt, 0, 0)
	for range o.Spots {
		m.scene.Spots = append(m.scene.Spots, synth.Spot{
			XUm:     rng.Float64() * float64(o.WidthPx-1) * o.PixelUm,
			YUm:     rng.Float64() * float64(o.HeightPx-1) * o.PixelUm,
			Photons: 0.5 * o.PhotonsPerUm * math.Exp(0.5*rng.NormFloat64()),
		})
	}
	for range o.HotPixels {
		m.scene.HotPixels = append(m.scene.HotPixels, synth.HotPixel{
			X: rng.IntN(o.WidthPx), Y: rng.IntN(o.HeightPx),
			Photons: 0.5 * o.PhotonsPerUm * math.Exp(0.5*rng.NormFloat64()),
		})
	}
}
