package movie

import (
	"bufio"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"sync"

	"wend/cmd/wend/internal/tables"
	"wend/imaging"
	"wend/trace"
)

// The files that [Movie.Write] makes.
const (
	StackFile = "synth.ome.tif"
	TruthFile = "truth.json"
)

// ErrOccupied is wrapped where a folder holds contours that are not a synthetic movie's.
var ErrOccupied = errors.New("folder in use")

// Write makes the folder dir where it is missing and in it the movie, [StackFile], its true contours,
// contours.csv, and what it was made from, [TruthFile]. An earlier synthetic movie there is
// replaced; contours without a [TruthFile] beside them are measured ones, and an error that
// wraps ErrOccupied. frameDone, if not nil, is called after each frame, in order. When ctx
// ends, the movie is given up and its error returned.
func (m *Movie) Write(ctx context.Context, dir string, frameDone func(frame int)) error {
	if present(dir, tables.ContoursFile) && !present(dir, TruthFile) {
		return fmt.Errorf("movie: %s: %w: it holds %s without %s, want another folder", dir, ErrOccupied, tables.ContoursFile, TruthFile)
	}
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return fmt.Errorf("movie: %w", err)
	}
	truth, err := m.writeStack(ctx, filepath.Join(dir, StackFile), frameDone)
	if err != nil {
		return err
	}
	filaments := make([]FilamentTruth, m.Filaments())
	for i := range filaments {
		filaments[i] = m.Describe(i)
		for _, contours := range truth {
			if m.LeavesField(contours[i]) {
				filaments[i].FramesLeavingTheField++
			}
		}
	}
	if err := tables.WriteFile(dir, TruthFile, func(w io.Writer) error {
		enc := json.NewEncoder(w)
		enc.SetIndent("", "  ")
		return enc.Encode(struct {
			Settings  settings        `json:"settings"`
			Filaments []FilamentTruth `json:"filaments"`
		}{m.settings(), filaments})
	}); err != nil {
		return err
	}
	return tables.WriteFile(dir, tables.ContoursFile, func(w io.Writer) error { return writeContours(w, truth) })
}

func present(dir, name string) bool {
	_, err := os.Stat(filepath.Join(dir, name))
	return !errors.Is(err, fs.ErrNotExist)
}

// writeStack writes the frames and returns their true contours, [frame][filament]. Frames
// are made a few at a time, side by side.
func (m *Movie) writeStack(ctx context.Context, path string, frameDone func(int)) (truth [][]Contour, err error) {
	o := m.opts
	meta := imaging.StackMeta{Width: o.WidthPx, Height: o.HeightPx, Frames: o.Frames,
		PixelUm: o.PixelUm, IntervalS: o.IntervalS, ExposureS: o.ExposureS}
	if o.Noiseless {
		meta.PixelType = "float32"
	}
	w, err := imaging.CreateStack(path, meta)
	if err != nil {
		return nil, fmt.Errorf("movie: %w", err)
	}
	defer func() {
		if closed := w.Close(); err == nil && closed != nil {
			err = fmt.Errorf("movie: %w", closed)
		}
	}()
	truth = make([][]Contour, o.Frames)
	batch := make([]imaging.Frame, min(o.Frames, runtime.GOMAXPROCS(0)))
	for first := 0; first < o.Frames; first += len(batch) {
		n := min(len(batch), o.Frames-first)
		var wg sync.WaitGroup
		for k := range n {
			wg.Go(func() {
				m.Frame(first+k, &batch[k])
				truth[first+k] = m.Truth(first + k)
			})
		}
		wg.Wait()
		for k := range n {
			if err := ctx.Err(); err != nil {
				return nil, fmt.Errorf("movie: frame %d: %w", first+k, err)
			}
			if err := w.WriteFrame(batch[k]); err != nil {
				return nil, fmt.Errorf("movie: %w", err)
			}
			if frameDone != nil {
				frameDone(first + k)
			}
		}
	}
	return truth, nil
}

// writeContours writes the columns of a measured contours.csv; the truth has no error.
func writeContours(out io.Writer, truth [][]Contour) error {
	buffered := bufio.NewWriter(out)
	w := csv.NewWriter(buffered)
	if err := w.Write([]string{"filament", "frame", "point", "s_um", "x_um", "y_um", "se_nm"}); err != nil {
		return err
	}
	number := func(v float64, decimals int) string {
		return strconv.FormatFloat(trace.RoundDecimals(v, decimals), 'f', decimals, 64)
	}
	for i := range truth[0] {
		for frame, contours := range truth {
			c := contours[i]
			for k := range c.SUm {
				if err := w.Write([]string{strconv.Itoa(i + 1), strconv.Itoa(frame), strconv.Itoa(k),
					number(c.SUm[k], trace.DecimalsArcUm), number(c.XUm[k], trace.DecimalsPositionUm),
					number(c.YUm[k], trace.DecimalsPositionUm), number(0, trace.DecimalsErrorNm)}); err != nil {
					return err
				}
			}
		}
	}
	w.Flush()
	if err := w.Error(); err != nil {
		return err
	}
	return buffered.Flush()
}

// settings is Options as the truth file names them, in flags' words and order, with the drag
// that was used.
type settings struct {
	Frames          int      `json:"frames"`
	WidthPx         int      `json:"width_px"`
	HeightPx        int      `json:"height_px"`
	PixelUm         float64  `json:"pixel_um"`
	IntervalS       float64  `json:"interval_s"`
	ExposureS       float64  `json:"exposure_s"`
	TemperatureC    float64  `json:"temperature_c"`
	Filaments       int      `json:"filaments"`
	LengthUm        float64  `json:"length_um"`
	LengthSpread    float64  `json:"length_spread"`
	LpUm            float64  `json:"lp_um"`
	DragPaS         float64  `json:"drag_pa_s"`
	BendPerUm       float64  `json:"bend_per_um"`
	TubeRmsUm       float64  `json:"tube_rms_um"`
	WanderUm        infinite `json:"wander_um"`
	TurnRad         infinite `json:"turn_rad"`
	AllowCrossing   bool     `json:"allow_crossing"`
	SubSteps        int      `json:"sub_steps"`
	PSFUm           float64  `json:"psf_um"`
	PhotonsPerUm    float64  `json:"photons_per_um"`
	BackgroundPerPx float64  `json:"background_per_px"`
	Uneven          float64  `json:"uneven"`
	DyePerUm        float64  `json:"dye_per_um"`
	Spots           int      `json:"spots"`
	HotPixels       int      `json:"hot_pixels"`
	BleachTo        float64  `json:"bleach_to"`
	Flicker         float64  `json:"flicker"`
	Gain            float64  `json:"gain"`
	Offset          float64  `json:"offset"`
	ReadNoiseE      float64  `json:"read_noise_e"`
	Noiseless       bool     `json:"noiseless"`
	Seed            uint64   `json:"seed"`
}

func (m *Movie) settings() settings {
	o := m.opts
	return settings{o.Frames, o.WidthPx, o.HeightPx, o.PixelUm, o.IntervalS, o.ExposureS, o.TemperatureC,
		o.Filaments, o.LengthUm, o.LengthSpread, o.LpUm, o.drag(), o.BendPerUm, o.TubeRmsUm,
		infinite(o.WanderUm), infinite(o.TurnRad), o.AllowCrossing, o.SubSteps,
		o.PSFUm, o.PhotonsPerUm, o.BackgroundPerPx, o.Uneven, o.DyePerUm, o.Spots, o.HotPixels, o.BleachTo, o.Flicker,
		o.Gain, o.Offset, o.ReadNoiseE, o.Noiseless, o.Seed}
}

// infinite is a number that JSON shows as "inf" where it is +Inf.
type infinite float64

func (v infinite) MarshalJSON() ([]byte, error) {
	if math.IsInf(float64(v), 1) {
		return []byte(`"inf"`), nil
	}
	return json.Marshal(float64(v))
}
