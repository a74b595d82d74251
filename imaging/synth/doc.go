// Package synth answers the question: what would a microscope show of this curve? It turns
// centrelines into the photons that each pixel expects, and those into a camera's counts.
//
// Start with [Scene.Expect], which draws lines through the optics, and [Camera.Expose],
// which adds the noise and the camera.
//
// # Units
//
// Lengths are µm, in image coordinates: the origin is the centre of the top-left pixel, x to
// the right and y down. Light is in photons detected during one exposure, brightness of a
// line in photons per µm.
//
// # Theory
//
// The image of a point is a Gaussian of standard deviation PSFUm, integrated over the area of
// each pixel and cut off at five standard deviations (a loss below one millionth). A line is a row of
// points no more than half a standard deviation apart, at which distance their sum is a
// smooth line to 10⁻³⁰ of its brightness. An exposure is the average of the images of
// the curves that the filament went through, not the image of an average curve.
//
// # Limits
//
// Everything is in focus, the point-spread function has no rings, and pixels do not bleed
// into each other. Uneven light changes the background alone.
package synth
