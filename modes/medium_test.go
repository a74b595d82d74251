package modes

import (
	"math"
	"testing"
)

// Young's modulus of F-actin from its rigidity: 7.29e-26 N·m² and a radius of 2.8 nm give 1.5 GPa with I = πr⁴/4; Kojima et al., PNAS 91:12962 (1994), measured 1.8 GPa by
// stretching (values from memory). The identity E·I = κ needs no stored number.
func TestYoungsModulus(t *testing.T) {
	f := ordinary
	f.frames = 40
	s := f.series(t)
	s.RadiusUm = 0.0028
	r := Analyse(s, DefaultOptions())
	e, k := estimate(t, r, QuantityModulus, MethodLikelihood), estimate(t, r, QuantityRigidity, MethodLikelihood)
	second := math.Pi / 4 * math.Pow(2.8e-9, 4)
	if !(math.Abs(e.Value*second/k.Value-1) < 1e-12) || !(e.Low < e.Value && e.Value < e.High) {
		t.Errorf("modulus %g (%g to %g) Pa, rigidity %g N·m²", e.Value, e.Low, e.High, k.Value)
	}
	if scaled := e.Value * 7.29e-26 / k.Value; !(scaled > 1.2e9 && scaled < 2.8e9) {
		t.Errorf("modulus %.3g Pa at the rigidity of actin, want 1.2 to 2.8 GPa", scaled)
	}
}

// The drag to expect near a wall: F/(ηU) of a rod whose axis is five radii over the wall is 5.48168 (4π/arccosh 5, Jeffrey and Onishi 1981, cited from memory).
func TestExpectedDrag(t *testing.T) {
	f := ordinary
	f.frames = 30
	s := f.series(t)
	s.RadiusUm, s.ViscosityPaS, s.HeightUm = 0.01, 2e-3, 0.05
	r := Analyse(s, DefaultOptions())
	if e := estimate(t, r, QuantityExpected, MethodTheory); !(math.Abs(e.Value/(5.48168*2e-3)-1) < 1e-5) {
		t.Errorf("drag %g Pa·s", e.Value)
	}
	// With a thousand times the viscosity the fitted drag is far too low.
	s.ViscosityPaS = 2
	if r := Analyse(s, DefaultOptions()); !has(r, FlagDrag) || r.Thermal == ThermalYes {
		t.Errorf("flags %v, thermal %s", r.Flags, r.Thermal)
	}
}
