//go:build matprofile && cgo && !nocv

package ridge

import (
	"testing"

	"gocv.io/x/gocv"
)

// Every Mat that a call makes is in the pool, and Drain closes them all.
func TestMatsAreClosed(t *testing.T) {
	Drain()
	before := gocv.MatProfile.Count()
	var m Map
	for i := range 5 {
		f := crowdedFrame(60+3*i, 50, uint64(i))
		if err := Compute(f, Options{SigmaPx: 1.2 + 0.3*float64(i), NoiseCounts: 3, Floor: 4}, &m); err != nil {
			t.Fatal(err)
		}
	}
	if n := gocv.MatProfile.Count() - before; n != 9 {
		t.Errorf("%d open Mats after calls one after the other, want the 9 of one workspace", n)
	}
	Drain()
	if n := gocv.MatProfile.Count(); n != before {
		t.Errorf("%d open Mats after Drain, want %d", n, before)
	}
}
