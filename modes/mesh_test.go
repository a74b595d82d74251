package modes

import (
	"math"
	"testing"

	"wend/modes/likelihood"
)

// L⊥ = 0.32 ξ^(6/5) Lp^(-1/5) (Hinsch, Wilhelm and Frey 2007, abstract), worked out on paper for Lp = 17 µm and ξ = 0.2774/√c: 0.155, 0.102, 0.059, 0.039, 0.026 µm at 0.1, 0.2, 0.5, 1
// and 2 mg/mL. The relation inverts, and an error of the width is one of 5/6 in the mesh.
func TestMeshHinsch(t *testing.T) {
	o := DefaultMeshOptions()
	for _, tc := range []struct{ c, want float64 }{{0.1, 0.155}, {0.2, 0.102}, {0.5, 0.059}, {1, 0.039}, {2, 0.026}} {
		mesh := 0.2774 / math.Sqrt(tc.c)
		if got := o.rms(MeshHinsch, mesh, 17, 10); !(math.Abs(got-tc.want) < 6e-4) {
			t.Errorf("%g mg/mL: %.4f µm, want %.3f", tc.c, got, tc.want)
		}
		if got := ActinMesh(tc.c); !(math.Abs(got/mesh-1) < 0.01) {
			t.Errorf("mesh of %g mg/mL: %.4f µm, want %.4f", tc.c, got, mesh)
		}
	}
	for _, relation := range []string{MeshHinsch, MeshHinschFinite} {
		for _, mesh := range []float64{0.15, 0.4, 1.2} {
			if got := o.mesh(relation, o.rms(relation, mesh, 17, 10), 17, 10); !(math.Abs(got/mesh-1) < 1e-9) {
				t.Errorf("%s: mesh %g comes back as %g", relation, mesh, got)
			}
		}
	}
	if g := math.Log(o.mesh(MeshHinsch, 0.11, 17, 10)/o.mesh(MeshHinsch, 0.1, 17, 10)) / math.Log(1.1); !(math.Abs(g-5./6) < 1e-6) {
		t.Errorf("mesh grows with the width to the power %.4f, want 5/6", g)
	}
	// A long filament has no finite-length term.
	if a, b := o.rms(MeshHinschFinite, 0.3, 17, 1e6)/0.31, o.rms(MeshHinsch, 0.3, 17, 1)/0.32; !(math.Abs(a/b-1) < 1e-4) {
		t.Errorf("an endless filament: %.6f and %.6f", a, b)
	}
}

// The relations differ by less than a factor of two in the mesh, and limits follow the width.
func TestMeshes(t *testing.T) {
	r := Result{Tube: noTube()}
	r.meshes(likelihood.Interval{Value: 0.1, Low: 0.09, High: 0.11}, 17, 12, Series{ActinMgPerMl: 0.5})
	if r.Tube.MeshFrom != MeshHinsch || !(r.Tube.MeshLowUm < r.Tube.MeshUm && r.Tube.MeshUm < r.Tube.MeshHighUm) || len(r.Estimates) != 3 {
		t.Fatalf("%+v", r)
	}
	for _, e := range r.Estimates[1:] {
		if ratio := e.Value / r.Tube.MeshUm; !(ratio > 0.5 && ratio < 2) {
			t.Errorf("%s: %.3f µm, the recommended %.3f", e.Method, e.Value, r.Tube.MeshUm)
		}
	}
	none := Result{Tube: noTube()}
	none.meshes(likelihood.Interval{Value: 0.1, Low: 0.09, High: 0.11}, math.NaN(), 12, Series{})
	if !math.IsNaN(none.Tube.MeshUm) || len(none.Estimates) != 0 {
		t.Errorf("without a stiffness: %+v", none.Tube)
	}
}
