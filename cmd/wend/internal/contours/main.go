// Command contours holds traced centrelines against true ones and against the least error that the photons
// allow, and prints two tables: one of filaments that bend by themselves, one of waves of known amplitude.
//
//	make contours                        every case
//	make contours ARGS='-movies 2'       fewer movies a case
//	make contours ARGS='-case moving'    one case
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime"
	"sync"

	"wend/cmd/wend/internal/movie"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	os.Exit(run(ctx, os.Args[1:], os.Stdout, os.Stderr))
}

// contourCase is a kind of filament.
type contourCase struct {
	name string
	vary func(o *movie.Options)
}

// cases are filaments caught at an instant and such that move while the shutter is open: actin-like in
// water near a wall, and soft ones.
var cases = []contourCase{
	{"still", func(o *movie.Options) { o.ExposureS, o.IntervalS = 0, 20 }},
	{"still, soft", func(o *movie.Options) { o.ExposureS, o.IntervalS, o.LpUm = 0, 20, 3 }},
	{"moving", func(o *movie.Options) {}},
	{"moving, soft", func(o *movie.Options) { o.LpUm = 3 }},
	{"slower", func(o *movie.Options) { o.DragPaS = 12e-3 }},
}

// lightLevels are in photons per µm.
var lightLevels = []float64{150, 300, 600, 1000, 2000}

func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	flags := flag.NewFlagSet("contours", flag.ContinueOnError)
	flags.SetOutput(stderr)
	movies := flags.Int("movies", 4, "movies of 80 frames `per case` and light level")
	seed := flags.Uint64("seed", 1, "`seed` of the first movie")
	only := flags.String("case", "", "only the case with this `name` (waves: the second table)")
	if err := flags.Parse(args); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			return 0
		}
		return 2
	}
	fail := func(err error) int {
		fmt.Fprintf(stderr, "contours: %v\n", err)
		return 1
	}
	fmt.Fprint(stdout, header)
	for _, c := range cases {
		if *only != "" && c.name != *only {
			continue
		}
		for _, light := range lightLevels {
			o := movie.DefaultOptions()
			o.Frames, o.WidthPx, o.HeightPx = 80, 160, 150
			o.PixelUm, o.PSFUm, o.PhotonsPerUm, o.BackgroundPerPx = 0.108, 0.13, light, 8
			o.LengthUm, o.LpUm, o.DragPaS, o.IntervalS, o.ExposureS = 10, 17, 2.4e-3, 0.5, 0.03
			c.vary(&o)
			total, err := inParallel(*movies, (*tally).add, func(i int) (*tally, error) {
				o := o
				o.Seed = *seed + uint64(i)
				return measureShapes(ctx, o)
			})
			if err != nil {
				return fail(err)
			}
			total.print(stdout, c.name, light)
		}
	}
	if *only != "" && *only != "waves" {
		return 0
	}
	fmt.Fprint(stdout, waveHeader())
	for _, light := range lightLevels {
		total, err := inParallel(*movies, (*waves).add, func(i int) (*waves, error) { return measureWaves(ctx, light, *seed+uint64(i)) })
		if err != nil {
			return fail(err)
		}
		total.print(stdout, light)
	}
	return 0
}

// inParallel makes n tallies, one per core at a time, and adds them up in order.
func inParallel[T any](n int, add func(total, part T), measure func(i int) (T, error)) (T, error) {
	parts, errs := make([]T, n), make([]error, n)
	var wait sync.WaitGroup
	slots := make(chan struct{}, runtime.GOMAXPROCS(0))
	for i := range n {
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			parts[i], errs[i] = measure(i)
		})
	}
	wait.Wait()
	var total T
	if err := errors.Join(errs...); err != nil {
		return total, err
	}
	total = parts[0]
	for _, p := range parts[1:] {
		add(total, p)
	}
	return total, nil
}
