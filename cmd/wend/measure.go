package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/report"
	"wend/cmd/wend/internal/tables"
)

// measureOptions are the flags of a run, beside those of a stack.
type measureOptions struct {
	out     string
	workers int
	redo    bool
}

func newMeasureCommand() *cobra.Command {
	request := job.NewRequest()
	var o measureOptions
	cmd := &cobra.Command{
		Use:   "measure STACK…",
		Short: "trace filaments and measure their stiffness: the main job",
		Long: `Traces the filaments of each TIFF stack through its frames and measures their
persistence length. For every stack a folder OUT/NAME is written:

  report.html     the answer with its interval, figures, warnings, methods
  traced.png      a frame with its contours
  filaments.csv   a row a filament: length, persistence length with 95 % interval, flags
  estimates.csv   every quantity by every method
  frames.csv      a row a filament and frame, with the reason where it was not used
  contours.csv    the contours, µm, with the standard error of every point
  modes.csv, tangent.csv, summary.json and more

Several stacks also get OUT/conditions.csv: all their filaments together, as one
condition.

Calibration that the file does not hold must be given. A stack whose results are
there already, from the same file, settings and version, is not done again.`,
		Example: `  wend measure movie.ome.tif --setting free
  wend measure *.tif --setting free --pixel-um 0.108 --interval-s 0.5 --exposure-s 0.05 --out results`,
		Args: stacksWanted,
		RunE: func(cmd *cobra.Command, paths []string) error {
			return measure(cmd.Context(), paths, request, o, cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	f := cmd.Flags()
	f.SortFlags = false
	f.StringVar(&request.Setting, "setting", "", "`free` or network: filaments that fluctuate freely in a thin chamber,\nor one labelled filament among unlabelled neighbours (required)")
	addCalibrationFlags(f, &request)
	f.Var(number{&request.ChamberUm}, "chamber-um", "`depth` of the chamber, µm: filaments that it lets tilt out of the plane are flagged")
	f.Var(number{&request.RadiusNm}, "radius-nm", "`radius` of the filament, nm: gives Young's modulus and the drag to expect")
	f.Var(number{&request.ViscosityMPas}, "viscosity-mpas", "`viscosity` of the medium, mPa·s (default: that of water)")
	f.Var(number{&request.HeightUm}, "height-um", "`height` of the filament over the chamber's wall, µm: gives the drag to expect there")
	f.Var(number{&request.KnownLpUm}, "known-lp-um", "`length`: persistence length known from free filaments, µm, for --setting network")
	f.Var(number{&request.KnownLpLowUm}, "known-lp-low-um", "`length`: lower end of its 95 % interval, µm")
	f.Var(number{&request.KnownLpHighUm}, "known-lp-high-um", "`length`: upper end of its 95 % interval, µm")
	f.Var(number{&request.ActinMgPerMl}, "actin-mg-ml", "`concentration` of an actin network, mg/mL: the mesh to expect beside the measured one")
	f.Var(number{&request.MeshPrefactor}, "mesh-prefactor", "`A` of rms = A·ξ^(6/5)·Lp^(-1/5), the relation of tube and mesh (default: 0.32)")
	f.Var(number{&request.MeshFiniteTerm}, "mesh-finite-term", "`B` of the term B·ξ²/L for filaments of finite length (default: 0.59)")
	f.Var(number{&request.MinLengthUm}, "min-length-um", "`length` of the shortest filament wanted, µm (default: 2)")
	f.StringVar(&o.out, "out", "wend-out", "`folder` for the results")
	f.IntVar(&o.workers, "workers", 0, "`number` of frames traced at a time (default: one per core)")
	f.BoolVar(&o.redo, "redo", false, "do finished stacks again")
	return cmd
}

// measure does every stack it can. Wrong use of any of them stops it before any work.
func measure(ctx context.Context, paths []string, request job.Request, o measureOptions, stdout, stderr io.Writer) error {
	if o.workers < 0 {
		return errUse{fmt.Errorf("--workers %d, want 1 or more", o.workers)}
	}
	if err := request.Check(); err != nil {
		return err
	}
	names := make(map[string]string)
	for _, p := range paths {
		name := resultName(p)
		if other, taken := names[name]; taken {
			return errUse{fmt.Errorf("%s and %s would both write to %s: rename one, or measure them into different --out folders",
				other, p, filepath.Join(o.out, name))}
		}
		names[name] = p
	}
	failures := make(map[string]error)
	for _, p := range paths {
		if err := job.Check(p, request); errors.Is(err, job.ErrUsage) {
			return err
		} else if err != nil {
			failures[p] = err
		}
	}
	if len(failures) < len(paths) {
		unlock, err := lockFolder(o.out)
		if err != nil {
			return err
		}
		defer unlock()
	}
	progress := newProgress(stderr)
	for i, p := range paths {
		err := failures[p]
		if err == nil {
			err = measureOne(ctx, p, request, o, progress.stack(i+1, len(paths), p), stdout)
		}
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err != nil {
			failures[p] = err
			fmt.Fprintf(stderr, "wend: %v\n", err)
		}
	}
	if err := pool(paths, failures, o.out, stdout); err != nil {
		return err
	}
	if len(failures) == 0 {
		return nil
	}
	fmt.Fprintf(stderr, "wend: %d of %d stacks failed:\n", len(failures), len(paths))
	for _, p := range paths {
		if failures[p] != nil {
			fmt.Fprintf(stderr, "  %s\n", p)
		}
	}
	return errSomeFailed
}

// pool writes conditions.csv for several stacks of one call, as one condition, and says what it holds.
func pool(paths []string, failures map[string]error, out string, stdout io.Writer) error {
	var filaments []job.Filament
	stacks := 0
	for _, p := range paths {
		if failures[p] != nil {
			continue
		}
		f, err := tables.ReadFilaments(filepath.Join(out, resultName(p)))
		if err != nil {
			return err
		}
		filaments, stacks = append(filaments, f...), stacks+1
	}
	if stacks < 2 {
		return nil
	}
	rows := tables.PoolFilaments("", filaments, make([]string, len(filaments)))
	if err := tables.WriteConditions(out, rows); err != nil {
		return err
	}
	for _, row := range rows {
		fmt.Fprintf(stdout, "%s\n", report.Population(row, stacks))
	}
	return nil
}

// measureOne measures one stack and writes its folder, unless that is done already.
func measureOne(ctx context.Context, path string, request job.Request, o measureOptions, bar *bar, stdout io.Writer) error {
	defer bar.stop()
	movie, err := job.Open(path, request)
	if err != nil {
		return err
	}
	defer movie.Close()
	name := resultName(path)
	dir := filepath.Join(o.out, name)
	if !o.redo {
		done, err := tables.Finished(dir, name, movie)
		if err != nil {
			return err
		}
		if done {
			result, err := tables.Read(dir)
			if err == nil {
				bar.stop()
				fmt.Fprintf(stdout, "%s: done before, with the same file, settings and version (--redo measures again)\n", dir)
				return report.Table(stdout, result)
			}
		}
	}
	bar.start(movie.Frames())
	result, err := movie.Measure(ctx, o.workers, bar.set)
	if err != nil {
		return err
	}
	result.Name = name
	// A folder with a summary is whole: an older one goes before anything is replaced.
	if err := os.Remove(filepath.Join(dir, tables.SummaryFile)); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	if err := report.RemoveCheck(dir); err != nil {
		return err
	}
	if err := report.Write(dir, result); err != nil {
		return err
	}
	if err := tables.Write(dir, result); err != nil {
		return err
	}
	bar.stop()
	if err := report.Table(stdout, result); err != nil {
		return err
	}
	for _, w := range result.Warnings {
		fmt.Fprintf(stdout, "  note: %s\n", w.Text)
	}
	fmt.Fprintf(stdout, "  report: %s\n", filepath.Join(dir, "report.html"))
	return nil
}

// resultName is a stack's folder in the results: its file name without the extension.
func resultName(path string) string {
	name := filepath.Base(path)
	for _, ext := range []string{".ome.tif", ".ome.tiff", ".ome.btf", ".tif", ".tiff", ".btf"} {
		if n := len(name) - len(ext); n > 0 && strings.EqualFold(name[n:], ext) {
			return name[:n]
		}
	}
	return name
}

// lockFolder keeps other processes out of the results folder until unlock or the end of the process.
func lockFolder(dir string) (unlock func(), err error) {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, fmt.Errorf("results folder: %w: pass another --out", err)
	}
	f, err := os.Open(dir)
	if err != nil {
		return nil, fmt.Errorf("results folder: %w", err)
	}
	if err := lockFile(f); err != nil {
		f.Close()
		return nil, fmt.Errorf("results folder %s is in use by another wend: wait for it, or pass another --out", dir)
	}
	return func() { f.Close() }, nil
}
