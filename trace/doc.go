// Package trace answers where the filaments are: it turns the frames of a movie into
// sub-pixel contours with their errors, and follows each filament from frame to frame.
//
// Start with [Movie], which does everything for one movie. Its steps stand alone too:
// [Survey] measures the line width and the camera noise on a few frames, a [Tracer] finds
// and fits the contours of one frame, [Follow] links them through the frames and gives
// every frame that must not be used its [Reason].
//
// # Units
//
// Inside the package positions are pixels; they become µm in one place, [Tracer.Frame].
// Everything exported is in µm, with the origin at the centre of the top-left pixel, x to
// the right and y down. Brightness is in photoelectrons, noise densities are µm³.
//
// # Theory
//
// A centreline is fitted to all pixels of a filament at once by weighted least squares
// under the camera's own noise: a line of light, blurred by a Gaussian, whose normal
// displacement is a cubic B-spline. What the pixels say about displacement is, per length,
// λJ/s² (one-dimensional analogue of Mortensen, Churchman, Spudich & Flyvbjerg, Nat.
// Methods 7:377 (2010), cited from memory), and no knots nearer than about three line widths
// have anything to gain: there the Gaussian has wiped the shape out. How far apart the knots
// are, 3 to 8 line widths, is chosen per movie by the light and the bends that it has
// ([Conditions].KnotWidths). Shapes with wavelengths above [Conditions.ResolvedWidths] line
// widths come through unchanged, because the fit includes the blur instead of smoothing on
// top of it.
//
// # Limits
//
// A filament must be at least [Options].MinLengthUm long. Filaments that cross or come
// within two line widths of one another are followed but those frames are not used.
package trace
