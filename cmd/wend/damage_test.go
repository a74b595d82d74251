package main

import (
	"bytes"
	"os"
	"strings"
	"testing"
)

// A stack that was cut, and one with a page spoilt inside, fail with a hint; with --readable-frames their good
// frames are measured, and the report says so.
func TestDamagedStack(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	whole, err := os.ReadFile("made/synth.ome.tif")
	if err != nil {
		t.Fatal(err)
	}
	spoilt := bytes.Clone(whole)
	for i := len(whole) * 3 / 4; i < len(whole)*3/4+400; i++ {
		spoilt[i] ^= 0x5a
	}
	for name, content := range map[string][]byte{"cut.ome.tif": whole[:len(whole)*3/4], "spoilt.ome.tif": spoilt} {
		if err := os.WriteFile(name, content, 0o644); err != nil {
			t.Fatal(err)
		}
		_, stderr := must(t, exitSomeFailed, "measure", name, "--setting", "free")
		for _, want := range []string{name, "page", "--readable-frames"} {
			if !strings.Contains(stderr, want) {
				t.Errorf("%s: %q does not say %q", name, stderr, want)
			}
		}
		stdout, _ := must(t, exitDone, "measure", name, "--setting", "free", "--readable-frames", "--redo")
		if !strings.Contains(stdout, "intact") {
			t.Errorf("%s: the table does not say that frames are missing:\n%s", name, stdout)
		}
		rows := table(t, "wend-out/"+strings.TrimSuffix(name, ".ome.tif")+"/frames.csv")
		if len(rows) < 10 || len(rows) > 20 {
			t.Errorf("%s: %d frames measured, want the first three quarters of 24", name, len(rows))
		}
		if stdout, _ := must(t, exitDone, "measure", name, "--setting", "free", "--readable-frames"); !strings.Contains(stdout, "done before") {
			t.Errorf("%s: finished, and done again:\n%s", name, stdout)
		}
	}
}

// A page that look comes to and that is spoilt inside is told with the way out; with --readable-frames, where the movie ends.
func TestLookAtSpoiltPage(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", nil)
	spoilt, err := os.ReadFile("made/synth.ome.tif")
	if err != nil {
		t.Fatal(err)
	}
	for i := len(spoilt) * 1 / 2; i < len(spoilt)*9/10; i += 50 { // many pages, so that look comes to one
		spoilt[i] ^= 0x5a
	}
	if err := os.WriteFile("spoilt.tif", spoilt, 0o644); err != nil {
		t.Fatal(err)
	}
	_, stderr := must(t, exitSomeFailed, "look", "spoilt.tif")
	if !strings.Contains(stderr, "page") || !strings.Contains(stderr, "--readable-frames") {
		t.Errorf("look does not say where and what to do: %q", stderr)
	}
	stdout, _ := must(t, exitDone, "look", "spoilt.tif", "--readable-frames")
	if !strings.Contains(stdout, "measure will end with frame 1") {
		t.Errorf("look does not say where the movie ends:\n%s", stdout)
	}
}
