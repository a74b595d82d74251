//go:build !cgo || nocv

package ridge

// active is the engine behind Compute.
var active = plain
