package tables

import (
	"io"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/trace"
)

const (
	digitsResult = 6 // significant digits of an estimate
	decimalsCos  = 8 // of a mean cosine, which is close to 1 for a stiff filament
)

// Write writes every table of r and the summary into dir, which it makes if need be. summary.json comes
// last, so that a folder that has it has all the tables. r is left as it was; its contours are
// printed with the decimals of [trace.Filament.Quantise].
func Write(dir string, r *job.Result) error {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return err
	}
	for _, table := range []struct {
		name    string
		columns []string
		rows    func(out *rowWriter, r *job.Result)
	}{
		{FilamentsFile, filamentColumns, writeFilaments},
		{EstimatesFile, estimateColumns, writeEstimates},
		{FramesFile, frameColumns, writeFrames},
		{ContoursFile, contourColumns, writeContours},
		{ModesFile, modeColumns, writeModes},
		{TangentFile, tangentColumns, writeTangent},
		{TubeFile, tubeColumns, writeTube},
		{LagsFile, lagColumns, writeLags},
	} {
		err := WriteFile(dir, table.name, func(w io.Writer) error {
			out := newRowWriter(w, table.columns)
			table.rows(out, r)
			return out.flush()
		})
		if err != nil {
			return err
		}
	}
	return WriteFile(dir, SummaryFile, func(w io.Writer) error { return writeSummary(w, r) })
}

func writeFilaments(out *rowWriter, r *job.Result) {
	for i := range r.Filaments {
		f := &r.Filaments[i]
		out.write(strconv.Itoa(f.ID), strconv.Itoa(f.First), strconv.Itoa(f.Last),
			strconv.Itoa(f.FramesUsed), strconv.Itoa(len(f.Contours)-f.FramesUsed),
			fixed(f.LengthUm, trace.DecimalsPositionUm), fixed(f.LengthSDUm, trace.DecimalsPositionUm),
			string(f.Ends[0]), string(f.Ends[1]),
			digits(f.SNR, trace.DigitsBrightness), digits(f.PhotonsPerUm, trace.DigitsBrightness),
			digits(f.BackgroundPerUm2, trace.DigitsBrightness),
			fixed(f.PSFUm*1000, trace.DecimalsErrorNm), fixed(f.LocalisationUm*1000, trace.DecimalsErrorNm),
			digits(f.Shapes, digitsResult), f.Thermal, f.Confinement,
			digits(f.LpUm, digitsResult), digits(f.LpLowUm, digitsResult), digits(f.LpHighUm, digitsResult), f.LpFrom,
			digits(f.Tube.RmsUm, digitsResult), digits(f.Tube.RmsLowUm, digitsResult), digits(f.Tube.RmsHighUm, digitsResult),
			digits(f.Tube.MeshUm, digitsResult), digits(f.Tube.MeshLowUm, digitsResult), digits(f.Tube.MeshHighUm, digitsResult), f.Tube.MeshFrom,
			strings.Join(f.Flags, ";"))
	}
}

func writeEstimates(out *rowWriter, r *job.Result) {
	for _, f := range r.Filaments {
		for _, e := range f.Estimates {
			out.write(strconv.Itoa(f.ID), e.Quantity, e.Method, digits(e.Value, digitsResult),
				digits(e.Low, digitsResult), digits(e.High, digitsResult), e.Note)
		}
	}
}

func writeFrames(out *rowWriter, r *job.Result) {
	for _, f := range r.Filaments {
		// What is printed is what a contour is after Quantise, whether it was called before or not.
		for _, c := range quantised(f.Filament).Contours {
			x, y := centre(c)
			out.write(strconv.Itoa(f.ID), strconv.Itoa(c.Frame), fixed(timeOf(r, c.Frame), trace.DecimalsTimeS),
				flag(c.Used()), string(c.Reason), fixed(c.LengthUm, trace.DecimalsPositionUm),
				fixed(endToEnd(c), trace.DecimalsPositionUm), fixed(x, trace.DecimalsPositionUm), fixed(y, trace.DecimalsPositionUm),
				digits(c.SNR, trace.DigitsBrightness), digits(c.PhotonsPerUm, trace.DigitsBrightness),
				fixed(c.WidthUm*1000, trace.DecimalsErrorNm), fixed(medianError(c)*1000, trace.DecimalsErrorNm),
				digits(c.NoiseUm3, trace.DigitsNoise),
				fixed(c.LengthSEUm, trace.DecimalsPositionUm), digits(c.BackgroundPerUm2, trace.DigitsBrightness),
				string(c.Ends[0]), string(c.Ends[1]),
				fixed(c.EndsSEUm[0], trace.DecimalsPositionUm), fixed(c.EndsSEUm[1], trace.DecimalsPositionUm))
		}
	}
}

func writeContours(out *rowWriter, r *job.Result) {
	for _, f := range r.Filaments {
		id := strconv.Itoa(f.ID)
		for _, c := range f.Contours {
			frame := strconv.Itoa(c.Frame)
			for k, p := range c.Line() {
				out.write(id, frame, strconv.Itoa(k), fixed(trace.RoundDecimals(p.SUm, trace.DecimalsArcUm), trace.DecimalsArcUm),
					fixed(trace.RoundDecimals(p.XUm, trace.DecimalsPositionUm), trace.DecimalsPositionUm),
					fixed(trace.RoundDecimals(p.YUm, trace.DecimalsPositionUm), trace.DecimalsPositionUm),
					fixed(trace.RoundDecimals(p.SEUm*1000, trace.DecimalsErrorNm), trace.DecimalsErrorNm))
			}
		}
	}
}

func writeModes(out *rowWriter, r *job.Result) {
	for _, f := range r.Filaments {
		for _, m := range f.Modes {
			d := func(v float64) string { return digits(v, digitsResult) }
			out.write(strconv.Itoa(f.ID), strconv.Itoa(m.Mode), d(m.WavelengthUm), d(m.MeanAmplitude), d(m.Variance), d(m.NoiseVariance),
				d(m.BlurFactor), d(m.ThermalVariance), d(m.LpUm), d(m.LpLowUm), d(m.LpHighUm), d(m.RelaxationS), d(m.Shapes),
				flag(m.Used), m.Reason)
		}
	}
}

func writeTangent(out *rowWriter, r *job.Result) {
	for _, f := range r.Filaments {
		for _, s := range f.Tangent {
			out.write(strconv.Itoa(f.ID), digits(s.SeparationUm, digitsResult), fixed(s.CosMean, decimalsCos),
				fixed(s.CosLow, decimalsCos), fixed(s.CosHigh, decimalsCos), strconv.Itoa(s.Pairs), flag(s.Used))
		}
	}
}

func writeTube(out *rowWriter, r *job.Result) {
	d := func(v float64) string { return digits(v, digitsResult) }
	for _, f := range r.Filaments {
		for _, p := range f.Tube.Places {
			out.write(strconv.Itoa(f.ID), d(p.SUm), d(p.RmsUm), d(p.RmsLowUm), d(p.RmsHighUm), d(p.NoiseUm))
		}
	}
}

func writeLags(out *rowWriter, r *job.Result) {
	d := func(v float64) string { return digits(v, digitsResult) }
	for _, f := range r.Filaments {
		for _, l := range f.Tube.Lags {
			out.write(strconv.Itoa(f.ID), d(l.LagS), d(l.TransverseMSDUm2), d(l.LongitudinalMSDUm2), strconv.Itoa(l.Pairs))
		}
	}
}

func quantised(f trace.Filament) trace.Filament {
	f.Contours = slices.Clone(f.Contours)
	for i := range f.Contours {
		f.Contours[i].Points = slices.Clone(f.Contours[i].Points)
	}
	f.Quantise()
	return f
}

func timeOf(r *job.Result, frame int) float64 {
	if frame < 0 || frame >= len(r.TimesS) {
		return math.NaN()
	}
	return trace.RoundDecimals(r.TimesS[frame], trace.DecimalsTimeS)
}

func endToEnd(c trace.Contour) float64 {
	if c.Count() < 2 {
		return math.NaN()
	}
	line := c.Line()
	a, b := line[0], line[len(line)-1]
	return math.Hypot(b.XUm-a.XUm, b.YUm-a.YUm)
}

// centre returns the mean of the contour's points, µm.
func centre(c trace.Contour) (x, y float64) {
	for _, p := range c.Line() {
		x += p.XUm
		y += p.YUm
	}
	n := float64(c.Count())
	return x / n, y / n // NaN without points
}

func medianError(c trace.Contour) float64 {
	n := c.Count()
	if n == 0 {
		return math.NaN()
	}
	se := make([]float64, n)
	for i, p := range c.Line() {
		se[i] = p.SEUm
	}
	slices.Sort(se)
	return (se[(n-1)/2] + se[n/2]) / 2
}
