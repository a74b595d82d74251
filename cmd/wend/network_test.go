package main

import (
	"math"
	"strings"
	"testing"

	"wend/cmd/wend/internal/movie"
)

// One filament in a tube, from the movie to the tables: the simulator knows the tube's width, the measurement its interval.
func TestMeasureNetwork(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) {
		o.Frames, o.WidthPx, o.HeightPx, o.LengthUm, o.LpUm, o.TubeRmsUm = 60, 130, 110, 8, 15, 0.15
		o.PhotonsPerUm, o.IntervalS, o.ExposureS, o.WanderUm = 1500, 0.3, 0.005, 0.3
	})
	stdout, _ := must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "network", "--temperature-c", "22",
		"--known-lp-um", "15", "--known-lp-low-um", "13", "--known-lp-high-um", "17", "--actin-mg-ml", "0.1")
	if !strings.Contains(stdout, "tube rms µm") {
		t.Errorf("the table shows no tube:\n%s", stdout)
	}
	f := table(t, "wend-out/synth/filaments.csv")[0]
	const rms = 0.15
	low, high := number64(t, f["tube_rms_low_um"]), number64(t, f["tube_rms_high_um"])
	if f["confinement"] != "tube" || !(low <= rms && rms <= high && high < 1.6*low) {
		t.Errorf("confinement %s, rms %g to %g µm, want %g inside", f["confinement"], low, high, rms)
	}
	if f["lp_from"] == "known" || f["lp_um"] == "15" {
		t.Errorf("a known stiffness came out as a measured one: %v", f)
	}
	// ξ = (rms·Lp^(1/5)/0.32)^(5/6), worked out here from the table's own width.
	want := math.Pow(number64(t, f["tube_rms_um"])*math.Pow(15, 0.2)/0.32, 5./6)
	if mesh := number64(t, f["mesh_um"]); f["mesh_from"] != "hinsch_2007" || !(math.Abs(mesh/want-1) < 1e-3) {
		t.Errorf("mesh %g µm by %s, want %g", mesh, f["mesh_from"], want)
	}
	methods := map[string]bool{}
	for _, e := range table(t, "wend-out/synth/estimates.csv") {
		methods[e["quantity"]+" "+e["method"]] = true
	}
	for _, want := range []string{"lp_um known", "tube_rms_um likelihood", "tube_diameter_um likelihood", "deflection_um likelihood", "tube_stiffness_N_per_m2 likelihood",
		"mesh_um hinsch_2007", "mesh_um concentration", "sliding_um2_per_s ends", "disengagement_s ends"} {
		if !methods[want] {
			t.Errorf("no estimate %s", want)
		}
	}
	if places, lags := table(t, "wend-out/synth/tube.csv"), table(t, "wend-out/synth/lags.csv"); len(places) < 8 || len(lags) < 8 {
		t.Errorf("%d places and %d lags", len(places), len(lags))
	}
	report := bytesOf(t, "wend-out/synth")["report.html"]
	for _, want := range []string{"rms displacement of", "The tube.", "Width along the axis.", "twice the rms"} {
		if !strings.Contains(report, want) {
			t.Errorf("the report does not say %q", want)
		}
	}
	must(t, exitWrongUse, "measure", "made/synth.ome.tif", "--setting", "free", "--known-lp-um", "15")
	must(t, exitWrongUse, "measure", "made/synth.ome.tif", "--setting", "network", "--known-lp-um", "15", "--known-lp-low-um", "16", "--known-lp-high-um", "17")
}
