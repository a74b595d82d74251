package main

import (
	"bytes"
	"context"
	"errors"
	"io/fs"
	"os"
	"strings"
	"testing"

	"wend/cmd/wend/internal/movie"
)

// cancelAt ends the context when text comes by.
type cancelAt struct {
	bytes.Buffer
	text   string
	cancel context.CancelFunc
}

func (c *cancelAt) Write(p []byte) (int, error) {
	if bytes.Contains(p, []byte(c.text)) {
		c.cancel()
	}
	return c.Buffer.Write(p)
}

// A run that is interrupted in its second stack ends with 130, keeps the first, leaves nothing of the second, and
// goes on from there when it is started again.
func TestInterrupted(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) { o.Frames = 8 })
	for _, name := range []string{"one.tif", "two.tif"} {
		if err := os.Link("made/synth.ome.tif", name); err != nil {
			t.Fatal(err)
		}
	}
	args := []string{"measure", "one.tif", "two.tif", "--setting", "free"}
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var stdout bytes.Buffer
	stderr := cancelAt{text: "[2/2]", cancel: cancel}
	if status := run(ctx, args, &stdout, &stderr); status != exitInterrupted {
		t.Fatalf("exit status %d, want 130:\n%s", status, stderr.String())
	}
	if !strings.Contains(stderr.String(), "interrupted") || strings.Contains(stderr.String(), "failed") {
		t.Errorf("standard error: %q", stderr.String())
	}
	first := bytesOf(t, "wend-out")
	if len(first) < 11 {
		t.Errorf("%d files of the first stack, want 11 or more", len(first))
	}
	for name := range first {
		if !strings.HasPrefix(name, "one") {
			t.Errorf("%s was left by the stack that was not finished", name)
		}
	}
	again, _ := must(t, exitDone, args...)
	if !strings.Contains(again, "one: done before") || strings.Contains(again, "two: done before") {
		t.Errorf("the second run does not go on from there:\n%s", again)
	}
	for name, text := range bytesOf(t, "wend-out") {
		if was, ok := first[name]; ok && was != text {
			t.Errorf("%s was changed by the second run", name)
		}
	}
}

// New results that could not be written whole leave no summary, by which they would be taken for finished ones.
func TestHalfReplacedIsNotFinished(t *testing.T) {
	t.Chdir(t.TempDir())
	filamentMovie(t, "made", func(o *movie.Options) { o.Frames = 8 })
	args := []string{"measure", "made/synth.ome.tif", "--setting", "free"}
	must(t, exitDone, args...)
	// A folder in the place of a table: it cannot be replaced.
	if err := os.Remove("wend-out/synth/contours.csv"); err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll("wend-out/synth/contours.csv/x", 0o755); err != nil {
		t.Fatal(err)
	}
	_, stderr := must(t, exitSomeFailed, append(args, "--frames", "1-7")...)
	if !strings.Contains(stderr, "contours.csv") {
		t.Errorf("standard error does not name the file: %q", stderr)
	}
	if _, err := os.Stat("wend-out/synth/summary.json"); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("a folder with tables of two runs has a summary: %v", err)
	}
}
