package modes

import (
	"fmt"
	"math"

	"wend/modes/likelihood"
)

// Relations between the width of a tube and the mesh of the network, ξ = √(3/ρ) with ρ the contour length per volume: codes of the method of a mesh_um.
const (
	QuantityMesh          = "mesh_um"
	MeshHinsch            = "hinsch_2007"
	MeshHinschFinite      = "hinsch_2007_finite"
	MeshFromConcentration = "concentration"
)

// MeshOptions are the numbers in the relations between tube and mesh.
type MeshOptions struct {
	// Prefactor of L⊥ = Prefactor·ξ^(6/5)·Lp^(-1/5), and of the same law with its term for finite length, L⊥ = FinitePrefactor·ξ^(6/5)·Lp^(-1/5) +
	// FiniteTerm·ξ²/L. L⊥ is the rms displacement in one direction, not a diameter.
	Prefactor, FinitePrefactor, FiniteTerm float64
}

// DefaultMeshOptions: 0.32 from the abstract of Hinsch, Wilhelm and Frey, Eur. Phys. J. E 24:35 (2007); 0.31 and 0.59 are from memory.
func DefaultMeshOptions() MeshOptions {
	return MeshOptions{Prefactor: 0.32, FinitePrefactor: 0.31, FiniteTerm: 0.59}
}

// rms returns the tube's rms, µm, of a relation for a mesh size ξ, a persistence length and a length, µm.
// Other theories of the entangled solution share the scaling or come near it; their prefactors are not published as an rms in a harmonic tube, and none is guessed.
func (o MeshOptions) rms(relation string, meshUm, lpUm, lengthUm float64) float64 {
	law := math.Pow(meshUm, 1.2) * math.Pow(lpUm, -0.2)
	switch relation {
	case MeshHinsch:
		return o.Prefactor * law
	case MeshHinschFinite:
		return o.FinitePrefactor*law + o.FiniteTerm*meshUm*meshUm/lengthUm
	}
	return math.NaN()
}

// mesh inverts rms, which grows with the mesh.
func (o MeshOptions) mesh(relation string, rmsUm, lpUm, lengthUm float64) float64 {
	low, high := math.Log(1e-3), math.Log(1e3)
	if !(rmsUm > 0) || math.IsInf(rmsUm, 1) || !(lpUm > 0) {
		return math.NaN()
	}
	for range 80 {
		mid := (low + high) / 2
		if o.rms(relation, math.Exp(mid), lpUm, lengthUm) < rmsUm {
			low = mid
		} else {
			high = mid
		}
	}
	return math.Exp((low + high) / 2)
}

// ActinMesh returns the mesh size, µm, of actin at a concentration in mg/mL: ξ = √(3/ρ), ρ = c/(42 kDa)·N_A·2.73 nm per subunit, 39 µm of filament a µm³
// at 1 mg/mL (mass and rise per subunit: common practice).
func ActinMesh(mgPerMl float64) float64 {
	const avogadro, massDa, riseUm = 6.02214076e23, 42e3, 2.73e-3
	perUm3 := mgPerMl * 1e-15 / massDa * avogadro // mg/mL is 1e-15 g a µm³
	return math.Sqrt(3 / (perUm3 * riseUm))
}

// meshes enters the mesh size by every relation, and the first as the recommended one. The limits are those of the width, with the persistence length at its own
// value; lp is NaN where none is known.
func (r *Result) meshes(rms likelihood.Interval, lpUm, lengthUm float64, s Series) {
	o := DefaultMeshOptions()
	if s.MeshPrefactor > 0 {
		o.Prefactor = s.MeshPrefactor
	}
	if s.MeshFiniteTerm > 0 {
		o.FiniteTerm = s.MeshFiniteTerm
	}
	if s.ActinMgPerMl > 0 {
		nan := math.NaN()
		r.add(QuantityMesh, MeshFromConcentration, ActinMesh(s.ActinMgPerMl), nan, nan, fmt.Sprintf("expected of %g mg/mL actin, all of it polymerised", s.ActinMgPerMl))
	}
	if !(rms.Value > 0) || !(lpUm > 0) {
		return
	}
	for _, x := range []struct{ relation, note string }{
		{MeshHinsch, fmt.Sprintf("rms = %g ξ^(6/5) Lp^(-1/5), tightly entangled, long filaments", o.Prefactor)},
		{MeshHinschFinite, fmt.Sprintf("rms = %g ξ^(6/5) Lp^(-1/5) + %g ξ²/L (from memory), for filaments not much longer than the mesh", o.FinitePrefactor, o.FiniteTerm)},
	} {
		value, low, high := o.mesh(x.relation, rms.Value, lpUm, lengthUm), o.mesh(x.relation, rms.Low, lpUm, lengthUm), o.mesh(x.relation, rms.High, lpUm, lengthUm)
		r.add(QuantityMesh, x.relation, value, low, high, x.note+"; statistical limits")
		if x.relation == MeshHinsch {
			r.Tube.MeshUm, r.Tube.MeshLowUm, r.Tube.MeshHighUm, r.Tube.MeshFrom = value, low, high, x.relation
		}
	}
}
