// Package likelihood answers: given the amplitudes of a filament's bending modes in the frames of a
// movie, which stiffness and which drag made them, and how sure can one be?
//
// Start with [Fit], all modes of a filament at once; [LogLikelihood] and [Restricted] are the exact
// densities of one mode underneath.
//
// # Units
//
// Lengths µm, times s, temperatures K, drag per length Pa·s. A mode amplitude b is the
// coefficient of a shape ψ with ∫ψ² = 1, so b is in µm^3/2 and its variance in µm³.
//
// # Theory
//
// A free mode of wavenumber k is an Ornstein-Uhlenbeck process of variance 1/(Lp·k⁴) and
// relaxation time ζ/(kT·Lp·k⁴). A frame shows its mean over the exposure plus independent noise.
// That makes a linear Gaussian state space, whose filter gives the exact likelihood for any exposure
// and for missing frames; for the blurred variance see Wong and Halvorsen, Opt. Express 14:12517 (2006).
// A harmonic tube of stiffness γ per length adds γ to κk⁴ and leaves the modes of a rod with free ends as they are.
// The intrinsic shape is a constant of unknown value per mode and is taken out by
// generalised least squares, so the likelihood is the restricted one (Patterson and Thompson,
// Biometrika 58:545 (1971), cited from memory) and the variance does not shrink by the mean that was subtracted.
//
// # Limits
//
// The exposure may exceed the interval between frames by a clock's error only. A tube is harmonic and the same along the filament.
// The drag is one number for all modes.
package likelihood
