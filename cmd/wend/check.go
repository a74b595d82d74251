package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"slices"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/check"
	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/report"
	"wend/cmd/wend/internal/tables"
)

type checkOptions struct {
	movies, workers int
	seed            uint64
}

func newCheckCommand() *cobra.Command {
	var o checkOptions
	cmd := &cobra.Command{
		Use:   "check RESULTS…",
		Short: "synthetic movies at a measured movie's own conditions: the bias and coverage to expect",
		Long: `Takes the conditions of every measured filament from its results: length, light,
line width, frames, interval, exposure, drag, and its persistence length as the truth.
It makes synthetic movies like that, traces and analyses them with the same code, and
says how far off the estimates are, how often the 95 % intervals hold the truth and
which difference such data can show. RESULTS is a stack's folder or the folder of
several. Written into each stack's folder:

  check.csv     a row a filament
  check.png     every synthetic movie's estimate, with its interval
  report.html   gets a section with both

Measuring the stack again removes an old check.`,
		Example: `  wend check wend-out
  wend check wend-out/movie --movies 50 --seed 3`,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 {
				return errUse{fmt.Errorf("check: no results given: see wend check --help")}
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			return runCheck(cmd.Context(), args, o, cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	f := cmd.Flags()
	f.SortFlags = false
	f.IntVar(&o.movies, "movies", 20, "`number` of synthetic movies a filament")
	f.Uint64Var(&o.seed, "seed", 1, "`seed` of the first movie")
	f.IntVar(&o.workers, "workers", 0, "`number` of movies at a time (default: one per core)")
	return cmd
}

func runCheck(ctx context.Context, paths []string, o checkOptions, stdout, stderr io.Writer) error {
	if o.movies < 2 {
		return errUse{fmt.Errorf("--movies %d, want 2 or more", o.movies)}
	}
	if o.workers < 0 {
		return errUse{fmt.Errorf("--workers %d, want 1 or more", o.workers)}
	}
	if o.workers == 0 {
		o.workers = runtime.GOMAXPROCS(0)
	}
	var dirs []string
	for _, p := range paths {
		found, err := resultFolders(p)
		if err != nil {
			return err
		}
		dirs = append(dirs, found...)
	}
	progress := newProgress(stderr)
	failed := false
	for i, dir := range dirs {
		if err := checkOne(ctx, dir, o, progress.stack(i+1, len(dirs), dir), stdout); err != nil {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			fmt.Fprintf(stderr, "wend: %s: %v\n", dir, err)
			failed = true
		}
	}
	if failed {
		return errSomeFailed
	}
	return nil
}

// resultFolders are the stacks' folders at or right below path.
func resultFolders(path string) ([]string, error) {
	has := func(dir string) bool {
		_, err := os.Stat(filepath.Join(dir, tables.SummaryFile))
		return err == nil
	}
	if has(path) {
		return []string{path}, nil
	}
	entries, err := os.ReadDir(path)
	if err != nil {
		return nil, errUse{fmt.Errorf("%w: want a folder that wend measure wrote", err)}
	}
	var dirs []string
	for _, e := range entries {
		if dir := filepath.Join(path, e.Name()); e.IsDir() && has(dir) {
			dirs = append(dirs, dir)
		}
	}
	slices.Sort(dirs)
	if len(dirs) == 0 {
		return nil, errUse{fmt.Errorf("%s: no results in it: want a folder that wend measure wrote", path)}
	}
	return dirs, nil
}

// checkOne checks the filaments of one stack and writes what came out.
func checkOne(ctx context.Context, dir string, o checkOptions, bar *bar, stdout io.Writer) error {
	defer bar.stop()
	r, err := tables.Read(dir)
	if err != nil {
		return err
	}
	type task struct {
		filament   *job.Filament
		conditions check.Conditions
	}
	var tasks []task
	var without []string
	for i := range r.Filaments {
		f := &r.Filaments[i]
		c, err := check.ConditionsOf(r, f)
		if err != nil {
			without = append(without, err.Error())
			continue
		}
		tasks = append(tasks, task{f, c})
	}
	bar.unit = "movies"
	bar.start(len(tasks) * o.movies)
	var outcomes []check.Outcome
	done := 0
	for _, t := range tasks {
		out, err := check.Run(ctx, t.filament.ID, t.conditions, o.movies, o.seed, o.workers, func() {
			done++
			bar.set(done)
		})
		if err != nil {
			return err
		}
		outcomes = append(outcomes, out)
	}
	bar.stop()
	fmt.Fprintf(stdout, "%s\n", r.Name)
	for _, w := range without {
		fmt.Fprintf(stdout, "  not checked: %s\n", w)
	}
	if len(outcomes) == 0 {
		return nil
	}
	for _, out := range outcomes {
		fmt.Fprintf(stdout, "  filament %d: %s\n", out.Filament, report.CheckSentence(out))
	}
	if err := check.Write(dir, outcomes); err != nil {
		return err
	}
	if err := report.AddCheck(dir, outcomes); err != nil {
		return err
	}
	fmt.Fprintf(stdout, "  report: %s\n", filepath.Join(dir, report.File))
	return nil
}
