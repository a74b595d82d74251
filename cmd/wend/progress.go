package main

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"time"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
)

// progress shows how far a run is: bars on a terminal, a line a stack elsewhere.
type progress struct {
	out      io.Writer
	terminal bool
}

func newProgress(out io.Writer) progress {
	f, isFile := out.(*os.File)
	if !isFile {
		return progress{out, false}
	}
	info, err := f.Stat()
	return progress{out, err == nil && info.Mode()&os.ModeCharDevice != 0}
}

// bar is the progress of one stack. Its methods may be called after stop, and then do nothing.
type bar struct {
	progress
	label     string
	container *mpb.Progress
	bar       *mpb.Bar
	total     int
	unit      string // what is counted; frames if empty
	reported  time.Time
	stopped   bool
}

// stack makes the bar of stack number of count.
func (p progress) stack(number, count int, path string) *bar {
	label := filepath.Base(path)
	if count > 1 {
		label = fmt.Sprintf("[%d/%d] %s", number, count, label)
	}
	return &bar{progress: p, label: label}
}

func (b *bar) start(frames int) {
	b.total, b.reported = frames, time.Now()
	if b.unit == "" {
		b.unit = "frames"
	}
	if !b.terminal {
		fmt.Fprintf(b.out, "%s: %d %s\n", b.label, frames, b.unit)
		return
	}
	b.container = mpb.New(mpb.WithOutput(b.out), mpb.WithWidth(40))
	b.bar = b.container.AddBar(int64(frames), mpb.BarRemoveOnComplete(),
		mpb.PrependDecorators(decor.Name(b.label+" ")),
		mpb.AppendDecorators(decor.CountersNoUnit("%d/%d "+b.unit), decor.AverageETA(decor.ET_STYLE_GO, decor.WC{W: 8})))
}

// set says that done frames are traced. Calls must not overlap.
func (b *bar) set(done int) {
	const every = 30 * time.Second
	switch {
	case b.stopped:
	case b.bar != nil:
		b.bar.SetCurrent(int64(done))
	case time.Since(b.reported) > every:
		b.reported = time.Now()
		fmt.Fprintf(b.out, "%s: %d of %d %s\n", b.label, done, b.total, b.unit)
	}
}

func (b *bar) stop() {
	if b.stopped {
		return
	}
	b.stopped = true
	if b.bar != nil {
		b.bar.Abort(true)
		b.container.Wait()
	}
}
