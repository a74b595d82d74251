package chain

import "math"

// Boltzmann is the Boltzmann constant in J/K, exact since the SI of 2019.
const Boltzmann = 1.380649e-23

// ZeroCelsius is 0 °C in K.
const ZeroCelsius = 273.15

// KT returns the thermal energy (J) at tempK (K).
func KT(tempK float64) float64 { return Boltzmann * tempK }

// WaterViscosity returns the viscosity of water (Pa·s) at 0.1 MPa and tempK (K), NaN
// outside 253 K to 383 K.
// Source: Pátek, Hrubý, Klomfar, Součková & Harvey, J. Phys. Chem. Ref. Data 38:21 (2009).
func WaterViscosity(tempK float64) float64 {
	if !(tempK >= 253 && tempK <= 383) {
		return math.NaN()
	}
	x := tempK / 300
	return 1e-6 * (280.68*math.Pow(x, -1.9) + 511.45*math.Pow(x, -7.7) +
		61.131*math.Pow(x, -19.6) + 0.45903*math.Pow(x, -40))
}

// DragNearWall returns the drag per length (Pa·s) of a long rod that moves parallel to one
// plane wall and across its own axis: 4πη/arccosh(h/a), for viscosity eta (Pa·s), radius a
// and height h of the axis above the wall, both in one unit. Along its axis the rod feels
// half of it. NaN unless height > radius > 0.
// Source: Jeffrey & Onishi, Q. J. Mech. Appl. Math. 34:129 (1981), cited from memory.
func DragNearWall(eta, radius, height float64) float64 {
	if !(radius > 0 && height > radius) {
		return math.NaN()
	}
	return 4 * math.Pi * eta / math.Acosh(height/radius)
}

// DragUnbounded returns the drag per length (Pa·s) of bending at wavenumber q across the
// axis of a thin rod in unbounded fluid: 4πη/[ln(2/(qa)) − γ_E + ½], for viscosity eta
// (Pa·s) and radius a in the unit of 1/q. It holds for qa ≪ 1; NaN for qa outside (0, 1].
// Source: the long-wave limit of the Oseen kernel averaged over the rod's surface.
func DragUnbounded(eta, q, radius float64) float64 {
	qa := q * radius
	if !(qa > 0 && qa <= 1) {
		return math.NaN()
	}
	const eulerGamma = 0.57721566490153286
	return 4 * math.Pi * eta / (math.Log(2/qa) - eulerGamma + 0.5)
}
