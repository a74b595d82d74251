package main

import (
	"os"
	"strings"
	"testing"

	"wend/cmd/wend/internal/movie"
)

// A check of a movie: the truth of its synthetic movies is the movie's own estimate, all its files are there, the report has it once however often it is done, the same
// seed gives the same bytes, and measuring again removes it.
func TestCheck(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) { o.Frames = 25 })
	must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free", "--temperature-c", "22")
	const dir = "wend-out/synth"
	stdout, _ := must(t, exitDone, "check", "wend-out", "--movies", "3")
	rows, f := table(t, dir+"/check.csv"), table(t, dir+"/filaments.csv")[0]
	if len(rows) != 1 || rows[0]["true_lp_um"] != f["lp_um"] || rows[0]["movies"] != "3" || !strings.Contains(stdout, "3 movies") {
		t.Fatalf("rows %v, filament %v, output %s", rows, f, stdout)
	}
	n := number64(t, rows[0]["answered"]) + number64(t, rows[0]["bounds"]) + number64(t, rows[0]["refused"])
	if held := number64(t, rows[0]["held"]); n != 3 || held > 3 {
		t.Errorf("%g outcomes of 3 movies, %g held", n, held)
	}
	first := bytesOf(t, dir)
	must(t, exitDone, "check", dir, "--movies", "3", "--workers", "1")
	second := bytesOf(t, dir)
	for _, name := range []string{"check.csv", "check.png", "report.html"} {
		if first[name] == "" || first[name] != second[name] {
			t.Errorf("%s: %d bytes, then %d", name, len(first[name]), len(second[name]))
		}
	}
	if strings.Count(second["report.html"], `id="check"`) != 1 {
		t.Error("the report has the check not once")
	}
	must(t, exitDone, "measure", "made/synth.ome.tif", "--setting", "free", "--temperature-c", "22", "--redo")
	if _, err := os.Stat(dir + "/check.csv"); !os.IsNotExist(err) {
		t.Error("an old check outlives a new measurement")
	}
	must(t, exitWrongUse, "check", "nowhere")
	must(t, exitWrongUse, "check")
}
