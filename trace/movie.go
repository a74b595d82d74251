package trace

import (
	"context"
	"fmt"
	"sync"

	"wend/imaging"
)

// Movie traces the frames first to last (both included) of src with a pool of workers and follows
// the filaments. progress, if not nil, is called after each frame with the number done; calls do
// not overlap. The result does not depend on workers. When ctx ends, so does the work, with its error.
func Movie(ctx context.Context, src Source, first, last int, o Options, hint CameraHint, workers int,
	progress func(done int)) (Conditions, []Filament, error) {
	c, err := Survey(src, first, last, o, hint)
	if err != nil {
		return c, nil, err
	}
	frames := make([][]Contour, last-first+1)
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	next := make(chan int)
	var wait sync.WaitGroup
	var mu sync.Mutex
	done := 0
	for range max(1, min(workers, len(frames))) {
		tracer, err := NewTracer(o, c)
		if err != nil {
			return c, nil, err
		}
		wait.Go(func() {
			var frame imaging.Frame
			for t := range next {
				err := src.ReadFrame(t, &frame)
				if err == nil {
					frames[t-first], err = tracer.Frame(frame, t)
					for i := range frames[t-first] {
						frames[t-first][i].pack()
					}
				}
				if err != nil {
					cancel(fmt.Errorf("trace: %w", err))
					return
				}
				mu.Lock()
				done++
				if progress != nil {
					progress(done)
				}
				mu.Unlock()
			}
		})
	}
feed:
	for t := first; t <= last; t++ {
		select {
		case next <- t:
		case <-ctx.Done():
			break feed
		}
	}
	close(next)
	wait.Wait()
	if err := context.Cause(ctx); err != nil {
		return c, nil, err
	}
	return c, Follow(frames, first, o), nil
}
