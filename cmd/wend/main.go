// Command wend measures how stiff single filaments are, and how tightly their surroundings hold
// them, from fluorescence movies of their thermal undulations. `wend --help` lists the commands.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
)

// The exit statuses.
const (
	exitDone        = 0
	exitSomeFailed  = 1
	exitWrongUse    = 2
	exitInterrupted = 130
)

// errSomeFailed is returned by a command that did what it could; the failures are printed already.
var errSomeFailed = errors.New("some stacks failed")

// errUse marks errors of flags and arguments.
type errUse struct{ error }

func main() {
	// The contours of a long movie are most of the memory; a heap twice their size buys little speed.
	debug.SetGCPercent(40)
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	os.Exit(run(ctx, os.Args[1:], os.Stdout, os.Stderr))
}

// run is the whole program: it returns the exit status.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	root := newRootCommand()
	root.SetArgs(args)
	root.SetOut(stdout)
	root.SetErr(stderr)
	err := root.ExecuteContext(ctx)
	var use errUse
	switch {
	case err == nil:
		return exitDone
	case ctx.Err() != nil:
		fmt.Fprintln(stderr, "wend: interrupted; what is finished is kept, and the same command goes on from there")
		return exitInterrupted
	case errors.Is(err, errSomeFailed):
		return exitSomeFailed
	case errors.As(err, &use), errors.Is(err, job.ErrUsage), errors.Is(err, movie.ErrOptions), errors.Is(err, movie.ErrOccupied):
		fmt.Fprintf(stderr, "wend: %v\n", err)
		return exitWrongUse
	default:
		fmt.Fprintf(stderr, "wend: %v\n", err)
		return exitSomeFailed
	}
}

func newRootCommand() *cobra.Command {
	root := &cobra.Command{
		Use:   "wend",
		Short: "stiffness of single filaments from movies of their thermal undulations",
		Long: `wend measures the persistence length of single filaments from fluorescence movies
of their thermal undulations: TIFF stacks in; contours, numbers with 95 % intervals,
pictures and a report out. Lengths are µm, times s. For research, not for diagnosis.`,
		Example: `  wend look movie.tif
  wend measure movie.tif --setting free --pixel-um 0.108 --interval-s 0.5 --exposure-s 0.05`,
		Version:       job.Version,
		SilenceErrors: true,
		SilenceUsage:  true,
		Args: func(_ *cobra.Command, args []string) error {
			if len(args) > 0 && args[0] != "help" {
				return errUse{fmt.Errorf("no command %q: see wend --help", args[0])}
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			if len(args) > 1 { // wend help COMMAND
				of, _, err := cmd.Find(args[1:])
				if err != nil || of == cmd {
					return errUse{fmt.Errorf("no command %q: see wend --help", args[1])}
				}
				of.InitDefaultHelpFlag()
				return of.Help()
			}
			return cmd.Help()
		},
	}
	root.SetVersionTemplate("wend {{.Version}}\n")
	root.CompletionOptions.DisableDefaultCmd = true
	root.SetHelpCommand(&cobra.Command{Hidden: true})
	root.AddCommand(newMeasureCommand(), newLookCommand(), newCheckCommand(), newSynthCommand())
	for _, c := range append(root.Commands(), root) {
		c.SetFlagErrorFunc(func(cmd *cobra.Command, err error) error {
			return errUse{fmt.Errorf("%w: see %s --help", err, cmd.CommandPath())}
		})
	}
	return root
}

// stacksWanted is the rule for commands that take stacks.
func stacksWanted(cmd *cobra.Command, args []string) error {
	if len(args) == 0 {
		return errUse{fmt.Errorf("%s: no stack given: see %s --help", cmd.Name(), cmd.CommandPath())}
	}
	return nil
}
