// Command accuracy measures wend against truth and prints a table: how many frames are traced, how far
// the contours are from the true ones, how long they are, and how well the persistence length and its
// interval hold. Without arguments it makes its own movies:
//
//	make accuracy                         every case
//	make accuracy ARGS='-movies 8'        fewer movies a case
//	make accuracy ARGS='a.tif b.ome.tif'  stacks with NAME.truth.csv and NAME.truth.json beside them
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

	"wend/cmd/wend/internal/job"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	os.Exit(run(ctx, os.Args[1:], os.Stdout, os.Stderr))
}

func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	flags := flag.NewFlagSet("accuracy", flag.ContinueOnError)
	flags.SetOutput(stderr)
	movies := flags.Int("movies", 14, "movies `per case`")
	seed := flags.Uint64("seed", 1, "`seed` of the first movie")
	only := flags.String("case", "", "only the case with this `name`")
	verbose := flags.Bool("v", false, "a line for every filament")
	if err := flags.Parse(args); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			return 0
		}
		return 2
	}
	var details io.Writer
	if *verbose {
		details = stdout
	}
	fmt.Fprint(stdout, header)
	if flags.NArg() > 0 {
		for _, path := range flags.Args() {
			s, err := external(ctx, path)
			if err != nil {
				fmt.Fprintf(stderr, "accuracy: %v\n", err)
				return 1
			}
			s.print(stdout, details)
		}
		return 0
	}
	for _, c := range cases() {
		if *only != "" && c.name != *only {
			continue
		}
		s, err := c.measure(ctx, *movies, *seed)
		if err != nil {
			fmt.Fprintf(stderr, "accuracy: %s: %v\n", c.name, err)
			return 1
		}
		s.print(stdout, details)
	}
	return 0
}

// measure makes and measures the movies of a case, one per core at a time.
func (c accuracyCase) measure(ctx context.Context, movies int, seed uint64) (*score, error) {
	scores := make([]*score, movies)
	errs := make([]error, movies)
	var wait sync.WaitGroup
	slots := make(chan struct{}, runtime.GOMAXPROCS(0))
	for i := range movies {
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			scores[i], errs[i] = synthetic(ctx, c.options(i, seed+uint64(i)))
		})
	}
	wait.Wait()
	if err := errors.Join(errs...); err != nil {
		return nil, err
	}
	total := &score{name: c.name}
	for _, s := range scores {
		total.add(s)
	}
	return total, nil
}

// judge compares a result with the truth of its movie.
func judge(name string, r *job.Result, truth truth) *score {
	s := &score{name: name, frames: len(r.TimesS) - r.Settings.FirstFrame}
	s.compare(r, truth)
	return s
}
