package tables

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/modes"
	"wend/trace"
)

// maxFrames bounds the frame numbers that a table may hold, so that a wrong one cannot ask for all memory.
const maxFrames = 10_000_000

// Read reads back what [Write] wrote into dir: everything but Picture and
// the fitted line of the tangent correlation, which is NaN. Writing the result again gives the same bytes.
func Read(dir string) (*job.Result, error) {
	f, err := os.Open(filepath.Join(dir, SummaryFile))
	if err != nil {
		return nil, fmt.Errorf("tables: %w", err)
	}
	defer f.Close()
	summary, err := ReadSummary(f)
	if err != nil {
		return nil, err
	}
	r := &job.Result{}
	summary.fill(r)
	if r.Filaments, err = ReadFilaments(dir); err != nil {
		return nil, err
	}
	traces, times, err := ReadTraces(dir)
	if err != nil {
		return nil, err
	}
	// Frames without any filament are in no table: their times are not known.
	for len(times) < summary.Counts.Frames+summary.Settings.FirstFrame.Value && len(times) < maxFrames {
		times = append(times, math.NaN())
	}
	r.TimesS = times
	estimates, err := ReadEstimates(dir)
	if err != nil {
		return nil, err
	}
	modeRows, err := ReadModes(dir)
	if err != nil {
		return nil, err
	}
	tangent, err := ReadTangent(dir)
	if err != nil {
		return nil, err
	}
	places, lags, err := readTubes(dir)
	if err != nil {
		return nil, err
	}
	byID := make(map[int]trace.Filament, len(traces))
	for _, t := range traces {
		byID[t.ID] = t
	}
	for i := range r.Filaments {
		f := &r.Filaments[i]
		t, ok := byID[f.ID]
		if !ok {
			return nil, fmt.Errorf("tables: filament %d is in %s and not in %s", f.ID, FilamentsFile, FramesFile)
		}
		f.Filament = t
		f.Estimates, f.Modes, f.Tangent = estimates[f.ID], modeRows[f.ID], tangent[f.ID]
		f.Tube.Places, f.Tube.Lags = places[f.ID], lags[f.ID]
	}
	return r, nil
}

// ReadFilaments reads filaments.csv: numbers of the filament as a whole, without contours.
func ReadFilaments(dir string) ([]job.Filament, error) {
	var filaments []job.Filament
	need := []string{"filament", "first_frame", "last_frame", "frames_used", "lp_um", "lp_low_um", "lp_high_um"}
	err := eachRow(dir, FilamentsFile, need, func(g *getter) error {
		f := job.Filament{}
		f.ID, f.First, f.Last, f.FramesUsed = g.int("filament"), g.int("first_frame"), g.int("last_frame"), g.int("frames_used")
		f.LengthUm, f.LengthSDUm = g.float("length_um"), g.float("length_sd_um")
		f.Ends = [2]trace.End{trace.End(g.text("end_0")), trace.End(g.text("end_1"))}
		f.SNR, f.PhotonsPerUm, f.BackgroundPerUm2 = g.float("snr"), g.float("photons_per_um"), g.float("background_per_um2")
		f.PSFUm, f.LocalisationUm = g.float("psf_nm")/1000, g.float("localisation_nm")/1000
		f.Shapes, f.Thermal, f.Confinement = g.float("shapes"), g.text("thermal"), g.text("confinement")
		f.LpUm, f.LpLowUm, f.LpHighUm, f.LpFrom = g.float("lp_um"), g.float("lp_low_um"), g.float("lp_high_um"), g.text("lp_from")
		f.Tube.RmsUm, f.Tube.RmsLowUm, f.Tube.RmsHighUm = g.float("tube_rms_um"), g.float("tube_rms_low_um"), g.float("tube_rms_high_um")
		f.Tube.MeshUm, f.Tube.MeshLowUm, f.Tube.MeshHighUm, f.Tube.MeshFrom = g.float("mesh_um"), g.float("mesh_low_um"), g.float("mesh_high_um"), g.text("mesh_from")
		f.TangentFitLpUm, f.TangentFitIntercept = math.NaN(), math.NaN()
		if flags := g.text("flags"); flags != "" {
			f.Flags = strings.Split(flags, ";")
		}
		filaments = append(filaments, f)
		return nil
	})
	if err != nil {
		return nil, err
	}
	return filaments, nil
}

// ReadTraces reads frames.csv and contours.csv: every filament with every contour, and the time of each
// frame by its number, NaN where no filament was there. What [trace.Filament.Quantise] left in memory
// before writing comes back to the bit. Frames of a filament must follow one another without a gap.
func ReadTraces(dir string) (filaments []trace.Filament, timesS []float64, err error) {
	index := map[int]int{}
	need := []string{"filament", "frame", "time_s", "used", "reason", "noise_um3"}
	err = eachRow(dir, FramesFile, need, func(g *getter) error {
		id, frame, used, time := g.int("filament"), g.int("frame"), g.bool("used"), g.float("time_s")
		c := trace.Contour{Frame: frame, Reason: trace.Reason(g.text("reason")), LengthUm: g.float("length_um"), LengthSEUm: g.float("length_se_um"),
			Ends: [2]trace.End{trace.End(g.text("end_0")), trace.End(g.text("end_1"))}, EndsSEUm: [2]float64{g.float("end_0_se_um"), g.float("end_1_se_um")},
			PhotonsPerUm: g.float("photons_per_um"), BackgroundPerUm2: g.float("background_per_um2"), SNR: g.float("snr"),
			WidthUm: g.float("width_nm") / 1000, NoiseUm3: g.float("noise_um3")}
		if g.err != nil {
			return g.err
		}
		if used != (c.Reason == "") {
			return g.t.wrong(0, "used", "1 without and 0 with a reason")
		}
		if frame < 0 || frame > maxFrames {
			return g.t.wrong(0, "frame", fmt.Sprintf("0 to %d", maxFrames))
		}
		k, seen := index[id]
		if !seen {
			k = len(filaments)
			index[id] = k
			filaments = append(filaments, trace.Filament{ID: id, First: frame, Last: frame - 1})
		}
		f := &filaments[k]
		if frame != f.Last+1 {
			return g.t.wrong(0, "frame", fmt.Sprintf("%d, the next of filament %d", f.Last+1, id))
		}
		f.Last = frame
		f.Contours = append(f.Contours, c)
		for len(timesS) <= frame {
			timesS = append(timesS, math.NaN())
		}
		timesS[frame] = time
		return nil
	})
	if err == nil {
		err = readContours(dir, filaments, index)
	}
	if err != nil {
		return nil, nil, err
	}
	return filaments, timesS, nil
}

func readContours(dir string, filaments []trace.Filament, index map[int]int) error {
	err := eachRow(dir, ContoursFile, contourColumns, func(g *getter) error {
		id, frame, point := g.int("filament"), g.int("frame"), g.int("point")
		p := trace.Point{SUm: g.float("s_um"), XUm: g.float("x_um"), YUm: g.float("y_um"), SEUm: g.float("se_nm") / 1000}
		k, ok := index[id]
		if g.err != nil {
			return g.err
		}
		if !ok || frame < filaments[k].First || frame > filaments[k].Last {
			return g.t.wrong(0, "frame", fmt.Sprintf("a frame that %s has for filament %d", FramesFile, id))
		}
		c := &filaments[k].Contours[frame-filaments[k].First]
		if point != len(c.Points) {
			return g.t.wrong(0, "point", fmt.Sprint(len(c.Points)))
		}
		c.Points = append(c.Points, p)
		return nil
	})
	if err != nil {
		return err
	}
	for _, f := range filaments {
		for _, c := range f.Contours {
			if c.Reason == "" && len(c.Points) < 2 {
				return fmt.Errorf("tables: %s: filament %d frame %d: %d points of a contour in use, want 2 or more", ContoursFile, f.ID, c.Frame, len(c.Points))
			}
		}
	}
	return nil
}

// ReadEstimates reads estimates.csv, by filament.
func ReadEstimates(dir string) (map[int][]modes.Estimate, error) {
	all := map[int][]modes.Estimate{}
	return all, eachRow(dir, EstimatesFile, estimateColumns, func(g *getter) error {
		id := g.int("filament")
		all[id] = append(all[id], modes.Estimate{Quantity: g.text("quantity"), Method: g.text("method"), Value: g.float("value"),
			Low: g.float("low"), High: g.float("high"), Note: g.text("note")})
		return nil
	})
}

// ReadModes reads modes.csv, by filament.
func ReadModes(dir string) (map[int][]modes.Mode, error) {
	all := map[int][]modes.Mode{}
	return all, eachRow(dir, ModesFile, modeColumns, func(g *getter) error {
		id := g.int("filament")
		all[id] = append(all[id], modes.Mode{Mode: g.int("mode"), WavelengthUm: g.float("wavelength_um"), MeanAmplitude: g.float("mean_amplitude"),
			Variance: g.float("variance"), NoiseVariance: g.float("noise_variance"), BlurFactor: g.float("blur_factor"),
			ThermalVariance: g.float("thermal_variance"), LpUm: g.float("lp_um"), LpLowUm: g.float("lp_low_um"), LpHighUm: g.float("lp_high_um"),
			RelaxationS: g.float("relaxation_s"), Shapes: g.float("shapes"), Used: g.bool("used"), Reason: g.text("reason")})
		return nil
	})
}

// ReadTangent reads tangent.csv, by filament.
func ReadTangent(dir string) (map[int][]modes.Separation, error) {
	all := map[int][]modes.Separation{}
	return all, eachRow(dir, TangentFile, tangentColumns, func(g *getter) error {
		id := g.int("filament")
		all[id] = append(all[id], modes.Separation{SeparationUm: g.float("separation_um"), CosMean: g.float("cos_mean"), CosLow: g.float("cos_low"),
			CosHigh: g.float("cos_high"), Pairs: g.int("pairs"), Used: g.bool("used")})
		return nil
	})
}

// readTubes reads tube.csv and lags.csv.
func readTubes(dir string) (places map[int][]modes.TubePlace, lags map[int][]modes.Lag, err error) {
	places, lags = map[int][]modes.TubePlace{}, map[int][]modes.Lag{}
	err = eachRow(dir, TubeFile, tubeColumns, func(g *getter) error {
		id := g.int("filament")
		places[id] = append(places[id], modes.TubePlace{SUm: g.float("s_um"), RmsUm: g.float("rms_um"), RmsLowUm: g.float("rms_low_um"),
			RmsHighUm: g.float("rms_high_um"), NoiseUm: g.float("noise_um")})
		return nil
	})
	if err != nil {
		return nil, nil, err
	}
	return places, lags, eachRow(dir, LagsFile, lagColumns, func(g *getter) error {
		id := g.int("filament")
		lags[id] = append(lags[id], modes.Lag{LagS: g.float("lag_s"), TransverseMSDUm2: g.float("transverse_msd_um2"),
			LongitudinalMSDUm2: g.float("longitudinal_msd_um2"), Pairs: g.int("pairs")})
		return nil
	})
}

// eachRow calls use for every row of a file that has columns. An error that a field gave counts before use's own.
func eachRow(dir, name string, columns []string, use func(g *getter) error) error {
	f, err := os.Open(filepath.Join(dir, name))
	if err != nil {
		return fmt.Errorf("tables: %w", err)
	}
	defer f.Close()
	header := func(t *Table) error { return t.Need(columns...) }
	return scan(f, name, header, func(t *Table) error {
		g := getter{t: t}
		err := use(&g)
		if g.err != nil {
			return g.err
		}
		return err
	})
}

// getter reads fields of one row and keeps the first error.
type getter struct {
	t   *Table
	err error
}

func (g *getter) text(column string) string { return g.t.Text(0, column) }

func (g *getter) float(column string) float64 {
	v, err := g.t.Float(0, column)
	g.keep(err)
	return v
}

func (g *getter) int(column string) int {
	v, err := g.t.Int(0, column)
	g.keep(err)
	return v
}

func (g *getter) bool(column string) bool {
	v, err := g.t.Bool(0, column)
	g.keep(err)
	return v
}

func (g *getter) keep(err error) {
	if g.err == nil {
		g.err = err
	}
}
