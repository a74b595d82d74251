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
// Methods 7:377 (2010), cited from memory), and a wave of wavenumber q is seen with
// exp(-q²s²/2) of its amplitude, so that no contour can have less noise than P·exp(q²s²),
// P = s²/(λJ). Nothing is smoothed on top: the knots are as close as the light of the movie allows,
// 2.2 to 8 line widths ([Conditions].KnotWidths), whatever the shapes. Waves above
// [Conditions.ResolvedWidths] line widths then come through with their amplitude and with little
// more than that noise. A free end carries neither a moment nor a shear force: no bending mode has
// a curvature there or a change of it, and without knowing that an end is several times as noisy as the middle.
//
// # Limits
//
// A filament must be at least [Options].MinLengthUm long. Filaments that cross or come
// within two line widths of one another are followed but those frames are not used.
package trace
