package job

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"slices"
	"sync"

	"wend/imaging"
	"wend/imaging/ridge"
	"wend/modes"
	"wend/modes/chain"
	"wend/trace"
)

// Movie is an open stack with its settings, ready to be measured.
type Movie struct {
	Settings Settings
	stack    *imaging.Stack
	path     string
	hash     string
	damage   error // what ends the readable frames early
}

// Open opens the stack at path and settles its calibration. Wrong use wraps ErrUsage; anything else is
// a bad stack. With r.ReadableFrames every frame is decoded once, and the movie ends before the first that
// cannot be. The caller closes the Movie.
func Open(path string, r Request) (*Movie, error) {
	m, err := open(path, r)
	if err != nil || !r.ReadableFrames {
		return m, err
	}
	last, damage, err := readableUntil(m.source(), m.Settings.FirstFrame, m.Settings.LastFrame)
	if err != nil {
		m.Close()
		return nil, err
	}
	m.Settings.LastFrame = last
	if damage != nil {
		m.damage = damage
	}
	return m, nil
}

// Check finds what [Open] would refuse without decoding any frame; the error is Open's.
func Check(path string, r Request) error {
	m, err := open(path, r)
	if err != nil {
		return err
	}
	return m.Close()
}

func open(path string, r Request) (*Movie, error) {
	if err := r.Check(); err != nil {
		return nil, err
	}
	stack, err := imaging.Open(path, imaging.OpenOptions{ReadableFrames: r.ReadableFrames})
	if err != nil {
		return nil, err
	}
	s, err := r.resolve(stack.Info(), stack.Frames())
	if err != nil {
		stack.Close()
		return nil, err
	}
	return &Movie{Settings: s, stack: stack, path: path, damage: stack.Damage()}, nil
}

// source is the channel that is measured.
func (m *Movie) source() trace.Source { return channel{m.stack, m.Settings.Channel - 1} }

// Close closes the stack.
func (m *Movie) Close() error { return m.stack.Close() }

// Frames is how many frames will be measured.
func (m *Movie) Frames() int { return m.Settings.LastFrame - m.Settings.FirstFrame + 1 }

// Hash returns the SHA-256 of the stack's file, in hex.
func (m *Movie) Hash() (string, error) {
	if m.hash == "" {
		hash, err := imaging.HashFile(m.path)
		if err != nil {
			return "", err
		}
		m.hash = hash
	}
	return m.hash, nil
}

// channel is one channel of a stack as a source of frames.
type channel struct {
	stack  *imaging.Stack
	number int // from 0
}

func (c channel) Frames() int { return c.stack.Frames() }

func (c channel) ReadFrame(t int, dst *imaging.Frame) error {
	return c.stack.ReadFrame(c.number, t, dst)
}

// Measure traces and analyses the movie with a pool of workers (0: one per core). progress, if not
// nil, is called with the number of frames done. The error is ctx's when it ends.
func (m *Movie) Measure(ctx context.Context, workers int, progress func(done int)) (*Result, error) {
	hash, err := m.Hash()
	if err != nil {
		return nil, err
	}
	info := m.stack.Info()
	r, err := Measure(ctx, m.source(), info, m.Settings, workers, progress)
	if errors.Is(err, imaging.ErrDamaged) {
		return nil, hinted(err)
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %w", m.path, err)
	}
	r.StackPath, r.SHA256 = m.path, hash
	for _, w := range info.Warnings {
		r.Warnings = append(r.Warnings, Warning{"file", w})
	}
	if m.damage != nil {
		r.Warnings = append(r.Warnings, Warning{"damaged", "Only the intact frames at the start of a damaged stack were measured: " + m.damage.Error()})
	}
	return r, nil
}

// Measure traces and analyses the frames of src; info and s say what they are. It fills everything of
// the Result but the name, the path and the hash.
func Measure(ctx context.Context, src trace.Source, info imaging.Info, s Settings, workers int, progress func(done int)) (*Result, error) {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	counts, factor, err := inCounts(src, info, s.FirstFrame)
	if err != nil {
		return nil, err
	}
	correlation, err := noiseCorrelation(src, s.FirstFrame, s.LastFrame)
	if err != nil {
		return nil, err
	}
	hint := hintIn(factor, s.Gain, s.Offset, info.MaxCount)
	conditions, traced, err := trace.Movie(ctx, counts, s.FirstFrame, s.LastFrame,
		trace.Options{PixelUm: s.PixelUm, MinLengthUm: s.MinLengthUm}, hint, workers, progress)
	if err != nil {
		return nil, err
	}
	width := conditions.WidthPx * s.PixelUm
	r := &Result{Version: Version, RidgeImplementation: ridge.Implementation(), Settings: s, Info: info,
		Camera: cameraOut(conditions.Camera, factor), Optics: Optics{width, width * conditions.ResolvedWidths(), correlation}, TimesS: times(info, s)}
	trace.QuantiseTimes(r.TimesS)
	r.Filaments = analyseAll(ctx, traced, r.TimesS, s, r.Optics, workers)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	r.PictureFrame = bestFrame(r.Filaments, s)
	if err := src.ReadFrame(r.PictureFrame, &r.Picture); err != nil {
		return nil, err
	}
	r.Warnings = append(r.Warnings, warnings(r)...)
	return r, nil
}

// analyseAll quantises and analyses the filaments, several at a time, in their order. When ctx ends the rest is left out.
func analyseAll(ctx context.Context, traced []trace.Filament, timesS []float64, s Settings, optics Optics, workers int) []Filament {
	out := make([]Filament, len(traced))
	var wait sync.WaitGroup
	slots := make(chan struct{}, workers)
	for i := range traced {
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			if ctx.Err() == nil {
				traced[i].Quantise()
				out[i] = Analyse(traced[i], timesS, s, optics)
			}
		})
	}
	wait.Wait()
	return out
}

// times gives the time of every frame up to the last one measured: the file's own where it has one
// for each frame and the interval was not set by hand, otherwise multiples of the interval.
func times(info imaging.Info, s Settings) []float64 {
	out := make([]float64, s.LastFrame+1)
	own := info.Calibration.TimesS
	for t := range out {
		if len(own) > s.LastFrame && s.Sources["interval_s"] != "flag" {
			out[t] = own[t]
		} else {
			out[t] = float64(t) * s.IntervalS
		}
	}
	return out
}

// Analyse turns a traced filament (quantised already) into numbers. optics is what its
// movie resolves.
func Analyse(f trace.Filament, timesS []float64, s Settings, optics Optics) Filament {
	series := SeriesOf(f, timesS, s, optics)
	o := modes.DefaultOptions()
	o.ResolutionPSF = optics.ResolvedUm / optics.LineWidthUm
	o.ContourPSF = o.ResolutionPSF / trace.ResolvedKnots * 2 // half a wave from knot to knot
	analyse := modes.Analyse
	if s.Setting == "network" {
		analyse = modes.AnalyseNetwork
	}
	out := Filament{Filament: f, Result: analyse(series, o),
		FramesUsed: len(series.Curves)}
	var lengths, snr, photons, background, width, errors []float64
	ends := [2]map[trace.End]int{{}, {}}
	for _, c := range f.Contours {
		for k, e := range c.Ends {
			if c.Count() > 0 {
				ends[k][e]++
			}
		}
		if !c.Used() {
			continue
		}
		lengths = append(lengths, c.LengthUm)
		snr = append(snr, c.SNR)
		photons = append(photons, c.PhotonsPerUm)
		background = append(background, c.BackgroundPerUm2)
		width = append(width, c.WidthUm)
		var se []float64
		for _, p := range c.Line() {
			se = append(se, p.SEUm)
		}
		errors = append(errors, median(se))
	}
	out.LengthUm, out.LengthSDUm = median(lengths), deviation(lengths)
	out.SNR, out.PhotonsPerUm, out.BackgroundPerUm2 = median(snr), median(photons), median(background)
	out.PSFUm, out.LocalisationUm = median(width), median(errors)
	for k := range ends {
		out.Ends[k] = trace.EndFree
		for _, e := range []trace.End{trace.EndBorder, trace.EndDefocused, trace.EndHidden} {
			if ends[k][e] > ends[k][out.Ends[k]] {
				out.Ends[k] = e
			}
		}
	}
	return out
}

// SeriesOf is what the analysis sees of a filament: its used frames.
func SeriesOf(f trace.Filament, timesS []float64, s Settings, optics Optics) modes.Series {
	out := modes.Series{PSFUm: optics.LineWidthUm, Processed: optics.Processed(), IntervalS: s.IntervalS, ExposureS: s.ExposureS,
		TemperatureK: s.TemperatureC + chain.ZeroCelsius, ChamberUm: s.ChamberUm, RadiusUm: s.RadiusNm / 1000,
		ViscosityPaS: s.ViscosityMPas / 1000, HeightUm: s.HeightUm,
		KnownLpUm: s.KnownLpUm, KnownLpLowUm: s.KnownLpLowUm, KnownLpHighUm: s.KnownLpHighUm, ActinMgPerMl: s.ActinMgPerMl,
		MeshPrefactor: s.MeshPrefactor, MeshFiniteTerm: s.MeshFiniteTerm}
	var lengths, errors, photons []float64
	unseen := 0
	for _, c := range f.Contours {
		if !c.Used() {
			continue
		}
		photons = append(photons, c.PhotonsPerUm)
		if c.Ends[0] != trace.EndFree || c.Ends[1] != trace.EndFree {
			unseen++
		}
		// modes corrects for what blur hides of a length.
		lengths = append(lengths, c.LengthUm)
		line := c.Line()
		curve := modes.Curve{XUm: make([]float64, len(line)), YUm: make([]float64, len(line))}
		for i, p := range line {
			curve.XUm[i], curve.YUm[i] = p.XUm, p.YUm
		}
		out.Curves = append(out.Curves, curve)
		out.TimesS = append(out.TimesS, timesS[c.Frame])
		out.NoiseUm3 = append(out.NoiseUm3, c.NoiseUm3)
		errors = append(errors, c.LengthSEUm)
	}
	out.Frames = len(f.Contours)
	out.FreeEnds = 10*unseen <= len(lengths)
	out.MotionNoise = trace.MotionNoise(median(photons))
	out.LengthUm, out.LengthSEUm, out.LengthSDUm = median(lengths), median(errors), deviation(lengths)
	return out
}

// bestFrame is the first frame in which the most filaments were used.
func bestFrame(filaments []Filament, s Settings) int {
	count := make(map[int]int)
	for _, f := range filaments {
		for _, c := range f.Contours {
			if c.Used() {
				count[c.Frame]++
			}
		}
	}
	best := s.FirstFrame
	for t := s.FirstFrame; t <= s.LastFrame; t++ {
		if count[t] > count[best] {
			best = t
		}
	}
	return best
}

// median of the values that are numbers; NaN for none.
func median(v []float64) float64 {
	s := slices.DeleteFunc(slices.Clone(v), math.IsNaN)
	if len(s) == 0 {
		return math.NaN()
	}
	slices.Sort(s)
	return (s[(len(s)-1)/2] + s[len(s)/2]) / 2
}

// deviation is the standard deviation; NaN below two values.
func deviation(v []float64) float64 {
	if len(v) < 2 {
		return math.NaN()
	}
	mean := 0.0
	for _, x := range v {
		mean += x / float64(len(v))
	}
	sum := 0.0
	for _, x := range v {
		sum += (x - mean) * (x - mean)
	}
	return math.Sqrt(sum / float64(len(v)-1))
}
