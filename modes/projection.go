package modes

import "math"

// leastProjection is the share of the persistence length that the planar theory must be expected to find at least.
const leastProjection = 0.95

// ProjectionFactor returns by what factor the planar theory makes a persistence length too small at most, for a filament of lengthUm in a chamber of depth
// chamberUm: tilted by α out of the plane, lengths in the image are short by cos α and the persistence length by cos³α, and the chamber lets
// sin α be chamberUm/lengthUm. Out-of-plane bending of a filament that has the room takes a few per cent more.
func ProjectionFactor(chamberUm, lengthUm float64) float64 {
	sin := math.Min(1, chamberUm/lengthUm)
	return math.Pow(1-sin*sin, 1.5)
}
