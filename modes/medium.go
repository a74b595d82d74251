package modes

import (
	"math"

	"wend/modes/chain"
)

// medium enters what follows where radius, viscosity or height are known: Young's modulus of a solid cylinder, E = κ/(πr⁴/4), and the drag that theory
// expects of a rod there, to hold the fitted one against. It takes the rigidity from the estimates.
func (r *Result) medium(a amplitudes, s Series, o Options) {
	if s.RadiusUm > 0 {
		second := math.Pi * math.Pow(s.RadiusUm*1e-6, 4) / 4 // m⁴
		for _, e := range r.Estimates {
			if e.Quantity == QuantityRigidity && e.Method == MethodLikelihood {
				r.add(QuantityModulus, MethodLikelihood, e.Value/second, e.Low/second, e.High/second, "of a solid cylinder of the given radius")
				break
			}
		}
	}
	if s.RadiusUm > 0 || s.ViscosityPaS > 0 || s.HeightUm > 0 {
		drag, note := a.expectedDrag(s, o)
		nan := math.NaN()
		r.add(QuantityExpected, MethodTheory, drag, nan, nan, note)
	}
}

// expectedDrag is the transverse drag per length of a rod, Pa·s: over a wall where the height is known, otherwise in unbounded fluid at the wavelength of the first
// mode; in water where the viscosity is not known.
func (a amplitudes) expectedDrag(s Series, o Options) (dragPaS float64, note string) {
	radius, viscosity, in := o.RadiusUm, chain.WaterViscosity(a.temperatureK), "water"
	if s.RadiusUm > 0 {
		radius = s.RadiusUm
	}
	if s.ViscosityPaS > 0 {
		viscosity, in = s.ViscosityPaS, "the given medium"
	}
	if s.HeightUm > 0 {
		return chain.DragNearWall(viscosity, radius, s.HeightUm), "a long rod in " + in + " at the given height over one wall; a second wall adds to it"
	}
	return chain.DragUnbounded(viscosity, a.k[0], radius), "a thin rod in " + in + " far from walls, at the wavelength of the first mode"
}
