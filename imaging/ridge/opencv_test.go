//go:build cgo && !nocv

package ridge

import (
	"regexp"
	"testing"
)

func TestOpenCVIsNamedAndKeepsToOneThread(t *testing.T) {
	if got := Implementation(); !regexp.MustCompile(`^OpenCV [0-9]+\.[0-9]+\.[0-9]+`).MatchString(got) {
		t.Errorf("Implementation is %q, want OpenCV and its version", got)
	}
	active.newWorkspace().close()
	if n := cvThreads(); n != 1 {
		t.Errorf("OpenCV uses %d threads, want 1", n)
	}
}
