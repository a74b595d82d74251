// Package chain answers the question: what would a filament of known stiffness do? It holds
// the theory of the worm-like chain, draws shapes and movements from it, and gives the
// bending modes in which both are exact.
//
// Start with [BeamMode], the shape of a mode, and [NewChain], a filament that moves.
//
// # Units
//
// Lengths are micrometres and times seconds, so that a persistence length over a length or
// a time over a relaxation time needs no factor. Energies are J, viscosities and drags per
// length Pa·s. Mode amplitudes b_n are µm^{3/2}.
//
// # Theory
//
// The bending energy is ½κ∫(dθ/ds)² ds with κ = Lp·kT. For a chain in a plane,
// θ(s) = θ₀ + Σ b_n ψ_n′(s) with the modes ψ_n of a beam with free ends makes the energy
// ½κΣ k_n⁴ b_n² for any bend: amplitudes are independent, of variance L⁴/(Lp (k_nL)⁴).
//
// # Limits
//
// Dynamics is that of local drag: no hydrodynamic coupling between modes, and drag forces
// those of a nearly straight filament. A chain bent through more than about a radian still
// has exact equilibrium shapes and only approximate relaxation times.
package chain
