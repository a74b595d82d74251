package main

import (
	"fmt"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/movie"
)

// newSynthCommand returns the command that makes synthetic movies. Wrong options are errors
// that wrap movie.ErrOptions or movie.ErrOccupied, before anything is written.
func newSynthCommand() *cobra.Command {
	o := movie.DefaultOptions()
	var out string
	cmd := &cobra.Command{
		Use:   "synth --out DIR [flags]",
		Short: "make a synthetic movie with its truth",
		Long: `Makes a fluorescence movie of worm-like chains whose stiffness is known: shapes
drawn from thermal equilibrium, moving against their drag, averaged over each
exposure and seen through a Gaussian point-spread function and a camera.

DIR then holds
  synth.ome.tif  the movie, with its calibration
  contours.csv   the true centrelines, a point every 0.1 µm, in the columns of
                 a measured contours.csv
  truth.json     every setting, and each filament's length_um, lp_um, drag and
                 slowest relaxation time

The same settings and seed give the same bytes. Filaments start apart and inside
the field and are held there softly: --wander-um and --turn-rad are the rms of
their motion as a whole, inf lets it go free. With --tube-rms-um each lies in a
harmonic tube along its own axis instead, and --wander-um is its sliding.`,
		Example: `  wend synth --out demo --frames 50 --lp-um 12 --length-um 8 --seed 7`,
		Args:    cobra.NoArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			if out == "" {
				return fmt.Errorf("synth: %w: no folder for the movie, want --out DIR", movie.ErrOptions)
			}
			m, err := movie.New(o)
			if err != nil {
				return fmt.Errorf("synth: %w", err)
			}
			if err := m.Write(cmd.Context(), out, nil); err != nil {
				return fmt.Errorf("synth: %w", err)
			}
			fmt.Fprintf(cmd.OutOrStdout(), "%s: %d frames, filaments: %d\n", out, m.Frames(), m.Filaments())
			return nil
		},
	}
	f := cmd.Flags()
	f.SortFlags = false
	f.StringVar(&out, "out", "", "`folder` to write to (required)")
	f.IntVar(&o.Frames, "frames", o.Frames, "`number` of frames")
	f.IntVar(&o.WidthPx, "width-px", o.WidthPx, "width of a frame, `pixels`")
	f.IntVar(&o.HeightPx, "height-px", o.HeightPx, "height of a frame, `pixels`")
	f.Float64Var(&o.PixelUm, "pixel-um", o.PixelUm, "`side` of a pixel in the sample, µm")
	f.Float64Var(&o.IntervalS, "interval-s", o.IntervalS, "`time` from frame to frame, s")
	f.Float64Var(&o.ExposureS, "exposure-s", o.ExposureS, "exposure `time`, s; 0 for an instant")
	f.Float64Var(&o.TemperatureC, "temperature-c", o.TemperatureC, "`temperature`, °C")
	f.IntVar(&o.Filaments, "filaments", o.Filaments, "`number` of filaments")
	f.Float64Var(&o.LengthUm, "length-um", o.LengthUm, "contour `length`, µm")
	f.Float64Var(&o.LengthSpread, "length-spread", o.LengthSpread, "lengths are uniform in length-um × (1 ± `fraction`)")
	f.Float64Var(&o.LpUm, "lp-um", o.LpUm, "persistence `length`, µm")
	f.Float64Var(&o.DragPaS, "drag-pa-s", o.DragPaS, "transverse `drag` per length, Pa·s; 0 for a thin rod in water 1 µm above a wall")
	f.Float64Var(&o.BendPerUm, "bend-per-um", o.BendPerUm, "`curvature` of the stress-free shape, 1/µm")
	f.Float64Var(&o.TubeRmsUm, "tube-rms-um", o.TubeRmsUm, "bulk `rms` displacement in a harmonic tube, µm; 0 for free filaments")
	f.Float64Var(&o.WanderUm, "wander-um", o.WanderUm, "`rms` motion of a centre, µm, or inf")
	f.Float64Var(&o.TurnRad, "turn-rad", o.TurnRad, "`rms` turning, rad, or inf")
	f.BoolVar(&o.AllowCrossing, "allow-crossing", o.AllowCrossing, "let filaments start across each other")
	f.IntVar(&o.SubSteps, "sub-steps", o.SubSteps, "`number` of positions in an exposure; 0 for 8 to 32 by need")
	f.Float64Var(&o.PSFUm, "psf-um", o.PSFUm, "standard `deviation` of the point-spread function, µm")
	f.Float64Var(&o.PhotonsPerUm, "photons-per-um", o.PhotonsPerUm, "`photons` per µm of filament and frame")
	f.Float64Var(&o.BackgroundPerPx, "background-per-px", o.BackgroundPerPx, "background `photons` per pixel and frame")
	f.Float64Var(&o.Uneven, "uneven", o.Uneven, "`fraction` by which the background is uneven, 0 to 1")
	f.Float64Var(&o.DyePerUm, "dye-per-um", o.DyePerUm, "dye `molecules` per µm, placed at random; 0 for an even line")
	f.IntVar(&o.Spots, "spots", o.Spots, "`number` of bright spots")
	f.IntVar(&o.HotPixels, "hot-pixels", o.HotPixels, "`number` of hot camera pixels")
	f.Float64Var(&o.BleachTo, "bleach-to", o.BleachTo, "brightness in the last frame as a `fraction` of the first")
	f.Float64Var(&o.Flicker, "flicker", o.Flicker, "relative standard `deviation` of the brightness from frame to frame")
	f.Float64Var(&o.Gain, "gain", o.Gain, "camera `counts` per electron")
	f.Float64Var(&o.Offset, "offset", o.Offset, "camera `counts` without light")
	f.Float64Var(&o.ReadNoiseE, "read-noise-e", o.ReadNoiseE, "read noise, `electrons`")
	f.BoolVar(&o.Noiseless, "noiseless", o.Noiseless, "expected counts without any noise, as 32-bit float")
	f.Uint64Var(&o.Seed, "seed", o.Seed, "`number` that makes another movie of the same kind")
	return cmd
}
