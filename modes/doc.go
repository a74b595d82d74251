// Package modes answers: what do a filament's contours, frame after frame, say about its stiffness?
//
// Start with [Analyse], which takes the contours of one filament as a [Series] and fills a
// [Result]; [AnalyseNetwork] is the same for a filament in the tube that its neighbours leave it; [BeamAmplitudes] turns a single contour into bending-mode amplitudes.
//
// # Units
//
// Lengths µm, times s, temperatures K, noise densities and variances of beam amplitudes µm³, angles rad.
// Intervals are 95 %. What the data can't support is NaN, and a flag or a reason says why.
//
// # Theory
//
// A worm-like chain in the image plane: bending energy ½κ∫θ′² with κ = Lp·kT, free ends, local drag. The recommended estimate is the
// exact likelihood of the beam-mode amplitudes over time ([wend/modes/likelihood]). Beside it stand the classic ones: the
// variances of the cosine modes of the tangent angle (Gittes, Mickey, Nettleton and Howard, J. Cell Biol.
// 120:923 (1993), cited from memory), the tangent correlation and the mean-square distance between the ends, each corrected for noise and exposure as
// far as the theory goes. Their intervals count independent shapes, not frames.
//
// # Limits
//
// Two frames at least, and a bending mode long against the blurred line. One drag for all modes. The equilibrium
// holds for any size of bend; the dynamics, and with them the blur, for bends below about a radian.
package modes
