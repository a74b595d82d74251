package main

import (
	"errors"
	"fmt"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/job"
)

func newLookCommand() *cobra.Command {
	request := job.NewRequest()
	cmd := &cobra.Command{
		Use:   "look STACK…",
		Short: "say what a stack holds, and what will go wrong",
		Long: `Prints, for each TIFF stack, its pages and axes, the calibration with its source,
brightness, saturation, camera offset, gain and noise, the apparent line width and
the filaments in the first frame, and warnings about what measure would stumble over.
It writes no files.`,
		Example: `  wend look movie.tif`,
		Args:    stacksWanted,
		RunE: func(cmd *cobra.Command, paths []string) error {
			failed := false
			for i, p := range paths {
				if err := cmd.Context().Err(); err != nil {
					return err
				}
				look, err := job.LookAt(p, request)
				if errors.Is(err, job.ErrUsage) {
					return err
				}
				if err != nil {
					fmt.Fprintf(cmd.ErrOrStderr(), "wend: %v\n", err)
					failed = true
					continue
				}
				if i > 0 {
					fmt.Fprintln(cmd.OutOrStdout())
				}
				if err := look.Print(cmd.OutOrStdout()); err != nil {
					return err
				}
			}
			if failed {
				return errSomeFailed
			}
			return nil
		},
	}
	f := cmd.Flags()
	f.SortFlags = false
	addCalibrationFlags(f, &request)
	return cmd
}
