// Package check answers: how far can this movie's numbers be trusted? It makes synthetic movies at the conditions of a measured filament, the estimate taken for
// the truth, traces and analyses them with the same code, and counts: bias, how often the intervals hold the truth, the smallest difference that such data can show.
package check
