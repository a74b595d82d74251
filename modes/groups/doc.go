// Package groups answers: what do several filaments of one condition say together about the population that they come from?
//
// Start with [Pool]: each filament enters with its own likelihood of the logarithm of a positive quantity, a persistence length, say, as a [Member]; out comes the
// population's geometric mean with its interval and the spreads between filaments and between preparations.
//
// # Theory
//
// ln θ of filament i in preparation j is normal about μ + p_j with the spread between filaments, p_j normal about 0 with the spread between preparations. A
// filament's likelihood is integrated over its own θ, so that a wide one weighs little, and a lower bound, which is flat above, says what it says and
// no more: neither does the stiffest filament drop out nor does it count as a value. The spreads are most likely with the mean integrated out
// (restricted maximum likelihood). The interval of the mean is t's, with as many degrees of freedom as preparations, or filaments where preparations can't be told
// apart, less one, and the larger of two standard errors: the model's, and that of Hartung and Knapp (Stat. Med. 20:3875 (2001), cited from memory), from how far
// the units lie apart.
//
// # Limits
//
// Two units at least for an interval. The mean is a geometric one; spreads are standard deviations of logarithms. No files, no pixels.
package groups
