package report

import (
	"fmt"
	"html/template"
	"math"
	"strconv"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables"
	"wend/modes"
)

// page is what the template shows.
type page struct {
	CheckPlace                                 template.HTML // what a check fills later
	Name, File, Version, SHA256, Ridge, Camera string
	Style                                      template.CSS
	Overall                                    string
	Answers                                    []answerView
	Rows                                       []summaryRow
	Picture                                    template.HTML
	PictureNote                                string
	Flags                                      []codeRow // those in the table, once each
	Warnings                                   []job.Warning
	Filaments                                  []filamentView
	Drops                                      []dropRow
	DropTotal, ContourTotal                    int
	Methods                                    []string
	Cites                                      []string
	Settings                                   []settingRow
	Codes                                      []codeGroup
	Confined                                   bool
}

type answerView struct {
	ID       int
	Sentence string
}

type summaryRow struct {
	ID, Used, All                           int
	Length, Lp, Interval, From, Shapes      string
	Thermal, Flags, Localisation, SNR, Ends string
}

type filamentView struct {
	ID             int
	Open           bool
	Sentence, Line string
	Flags          []codeRow
	Figures        []figureView
	VarianceUnit   string // of the modes
	Modes          []modeRow
	Estimates      []estimateRow
	Drops          []dropRow
	Dropped, All   int
}

type figureView struct {
	SVG     template.HTML
	Title   string
	Caption string
	File    string // the table with its numbers
	Wide    bool
}

type modeRow struct{ Mode, Wavelength, Variance, Noise, Blur, Lp, Interval, Relaxation, Shapes, Used string }

type estimateRow struct{ Quantity, Method, Value, Interval, Note string }

type dropRow struct {
	Reason  string
	Count   int
	Meaning string
}

type codeRow struct{ Code, Meaning string }

type codeGroup struct {
	Kind  string
	Codes []codeRow
}

type settingRow struct{ Name, Value, Source string }

// newPage collects all that the page shows.
func newPage(r *job.Result) *page {
	p := &page{Name: r.Name, File: tables.BaseName(r.StackPath), Version: r.Version, SHA256: r.SHA256, Ridge: r.RidgeImplementation,
		Overall: overall(r), Warnings: r.Warnings, Methods: methodsParagraph(r), Settings: settings(r), Confined: r.Settings.Setting == "network"}
	c := r.Camera
	dark := fmt.Sprintf("no light at %s counts, where read noise counts as light", digits(c.OffsetCounts, 4))
	if c.ReadVariance > 0 {
		dark = fmt.Sprintf("offset %s counts, read noise %s counts rms", digits(c.OffsetCounts, 4), digits(math.Sqrt(c.ReadVariance), 3))
	}
	p.Camera = fmt.Sprintf("%s counts per photoelectron, %s (%s)", digits(c.GainCounts, 3), dark, c.Source)
	few := len(r.Filaments) <= 3
	drops := map[string]int{}
	for i := range r.Filaments {
		f := &r.Filaments[i]
		if few {
			p.Answers = append(p.Answers, answerView{f.ID, answer(f)})
		}
		p.Rows = append(p.Rows, newSummaryRow(f))
		v := newFilamentView(r, f)
		v.Open = few
		p.Filaments = append(p.Filaments, v)
		for _, d := range v.Drops {
			drops[d.Reason] += d.Count
		}
		p.DropTotal += v.Dropped
		p.ContourTotal += v.All
	}
	if !few {
		p.Flags = flagRows(r)
	}
	p.Drops = dropRows(drops)
	p.Codes = codeGroups()
	methods := strings.Join(p.Methods, " ")
	for _, cite := range citations {
		if strings.Contains(methods, cite.key) {
			p.Cites = append(p.Cites, cite.text)
		}
	}
	return p
}

// flagRows lists the flags of all filaments once, in the order of the list of codes, unknown ones last by name.
func flagRows(r *job.Result) []codeRow {
	left := map[string]int{}
	for i := range r.Filaments {
		for _, flag := range r.Filaments[i].Flags {
			left[flag]++
		}
	}
	var rows []codeRow
	for _, c := range tables.Codes() {
		if c.Kind == tables.KindFlag && left[c.Code] > 0 {
			rows = append(rows, codeRow{c.Code, c.Meaning})
			delete(left, c.Code)
		}
	}
	for _, code := range sortedKeys(left) {
		rows = append(rows, codeRow{code, meaning(tables.KindFlag, code)})
	}
	return rows
}

var citations = []struct{ key, text string }{
	{"Gittes et al., 1993", "Gittes F, Mickey B, Nettleton J, Howard J (1993). J. Cell Biol. 120:923."},
	{"Wong and Halvorsen, 2006", "Wong WP, Halvorsen K (2006). Opt. Express 14:12517."},
}

func newSummaryRow(f *job.Filament) summaryRow {
	v := roundInterval(f.LpUm, f.LpLowUm, f.LpHighUm)
	from := f.LpFrom
	if from == "" {
		from = none
	}
	return summaryRow{ID: f.ID, Used: f.FramesUsed, All: len(f.Contours), Length: digits(f.LengthUm, 3), Lp: v.Value, Interval: v.Interval(), From: from,
		Shapes: digits(f.Shapes, 2), Thermal: f.Thermal, Flags: strings.Join(f.Flags, ", "), Localisation: digits(f.LocalisationUm*1000, 2), SNR: digits(f.SNR, 2),
		Ends: string(f.Ends[0]) + ", " + string(f.Ends[1])}
}

func newFilamentView(r *job.Result, f *job.Filament) filamentView {
	v := filamentView{ID: f.ID, Sentence: answer(f), All: len(f.Contours), Dropped: len(f.Contours) - f.FramesUsed}
	row := newSummaryRow(f)
	v.Line = row.Lp + " µm"
	switch outcome(f) {
	case lpMeasured:
		if row.Interval != none {
			v.Line += " (" + row.Interval + ")"
		}
	case lpBound:
		v.Line = row.Interval + " µm"
	case lpNone:
		v.Line = "no persistence length"
	}
	for _, code := range f.Flags {
		v.Flags = append(v.Flags, codeRow{code, meaning(tables.KindFlag, code)})
	}
	drops := map[string]int{}
	for _, c := range f.Contours {
		if !c.Used() {
			reason := string(c.Reason)
			if reason == "" {
				reason = "missing"
			}
			drops[reason]++
		}
	}
	v.Drops = dropRows(drops)
	v.VarianceUnit = "µm"
	if r.Settings.Setting == "network" {
		v.VarianceUnit = "µm³"
	}
	v.addFigures(r, f)
	for _, m := range f.Modes {
		v.Modes = append(v.Modes, newModeRow(m))
	}
	for _, e := range f.Estimates {
		i := roundInterval(e.Value, e.Low, e.High)
		value := i.Value
		if value != none {
			value += i.Power
		}
		v.Estimates = append(v.Estimates, estimateRow{quantityName(e.Quantity), e.Method, value, i.Interval(), e.Note})
	}
	return v
}

func (v *filamentView) addFigures(r *job.Result, f *job.Filament) {
	add := func(svg template.HTML, err error, title, caption, file string, wide bool) {
		switch {
		case err == errNothing:
			return
		case err != nil:
			caption = "This figure could not be drawn. " + caption
		}
		v.Figures = append(v.Figures, figureView{svg, title, caption, file, wide})
	}
	if r.Settings.Setting == "network" && len(f.Tube.Axis.XUm) > 0 {
		const width = "Widths are rms displacements in one transverse direction; a tube's diameter here is twice that."
		svg, err := tubeFigure(f)
		add(svg, err, "The tube", fmt.Sprintf("Up to about %d contours laid over each other, from light (early) to dark (late), with what was found as drift of the stage taken off; the axis, and one bulk rms to each side. %s", contoursLaid, width), tables.TubeFile, true)
		svg, err = tubeSpectrumFigure(f)
		add(svg, err, "Normal modes", "Variance of the modes of a rod with free ends. Crosses: as measured. Circles: after correction for noise and exposure. Line: in the tube, 1/(Lp k⁴ + γ/kT). Dashed: a free rod of the same stiffness. Dotted: what noise alone would give.", tables.ModesFile, false)
		svg, err = displacementFigure(f)
		add(svg, err, "Displacement", "Distribution of the displacement across the axis, of places away from the ends, a µm apart, each about its own mean; the walls of a harmonic tube make it Gaussian, softer ones leave tails above the line.", tables.EstimatesFile, false)
		svg, err = lagFigure(f)
		add(svg, err, "Displacement over time", "Mean-square displacement of places away from the ends, noise and blur included, and of the filament along its axis. The dashed line is where the first must end in a tube of the rms found; the short line has the slope of a filament in a viscous medium.", tables.LagsFile, false)
		svg, err = widthFigure(f)
		add(svg, err, "Width along the axis", "Rms displacement at each place, free of noise and blur, with 95 % intervals. Where the filament's own ends are, it is up to twice the bulk value. "+width, tables.TubeFile, true)
		svg, note, err := lengthFigure(r, f)
		add(svg, err, "Length over time", strings.TrimSpace("Contour length in each frame. Dots: frames used. Crosses: traced, but not used. Pluses at the foot: not found. "+note), tables.FramesFile, true)
		return
	}
	svg, err := modeFigure(f)
	add(svg, err, "Bending modes", "Variance of the cosine modes of the tangent angle. Crosses: as measured. Circles: after correction for noise and exposure, with 95 % intervals; filled ones are used, open ones are not. Line: (L/nπ)²/Lp for the persistence length given, with its interval as a band. Dotted: variance that localisation noise alone would give.", tables.ModesFile, false)
	svg, err = tangentFigure(f)
	add(svg, err, "Tangent correlation", "Mean cosine of the angle between tangents a distance s apart, with 95 % intervals, and the fit of exp(−s/2Lp − c), where c takes up the localisation noise. Filled points are used in the fit; open ones are not.", tables.TangentFile, false)
	svg, err = methodFigure(f)
	add(svg, err, "Methods side by side", "Persistence length by each method with its 95 % interval; an arrow means that there is no upper limit. The filled point is the estimate given, and the band its interval. The methods use the same contours and are not independent.", tables.EstimatesFile, false)
	svg, err = shapesFigure(f)
	add(svg, err, "Shapes", fmt.Sprintf("Up to %d contours, evenly chosen in time from light (early) to dark (late), each turned into its own mean direction, seen with s = 0 at the left.", shapesShown), tables.ContoursFile, false)
	svg, note, err := lengthFigure(r, f)
	add(svg, err, "Length over time", strings.TrimSpace("Contour length in each frame. Dots: frames used. Crosses: traced, but not used. Pluses at the foot: not found. "+note), tables.FramesFile, true)
}

func newModeRow(m modes.Mode) modeRow {
	used := "yes"
	if !m.Used {
		used = "no"
		if m.Reason != "" {
			used += ": " + m.Reason
		}
	}
	i := roundInterval(m.LpUm, m.LpLowUm, m.LpHighUm)
	value := i.Value
	if value != none {
		value += i.Power
	}
	return modeRow{strconv.Itoa(m.Mode), digits(m.WavelengthUm, 3), digits(m.Variance, 3), digits(m.NoiseVariance, 2), digits(m.BlurFactor, 2), value, i.Interval(),
		digits(m.RelaxationS, 2), digits(m.Shapes, 2), used}
}

// dropRows lists reasons in the order of the list of codes, unknown ones last by name.
func dropRows(count map[string]int) []dropRow {
	var rows []dropRow
	left := map[string]int{}
	for k, n := range count {
		left[k] = n
	}
	for _, c := range tables.Codes() {
		if n := left[c.Code]; c.Kind == tables.KindFrame && n > 0 {
			rows = append(rows, dropRow{c.Code, n, c.Meaning})
			delete(left, c.Code)
		}
	}
	for _, k := range sortedKeys(left) {
		rows = append(rows, dropRow{k, left[k], meaning(tables.KindFrame, k)})
	}
	return rows
}

func codeGroups() []codeGroup {
	titles := map[tables.Kind]string{tables.KindFrame: "Why a frame is not used (frames.csv)", tables.KindMode: "Why a mode is not used (modes.csv)",
		tables.KindFlag: "Flags (filaments.csv)", tables.KindMethod: "Methods (estimates.csv, lp_from)", tables.KindThermal: "Thermal (filaments.csv)",
		tables.KindConfinement: "Confinement (filaments.csv)", tables.KindEnd: "Ends (filaments.csv)"}
	var groups []codeGroup
	for _, c := range tables.Codes() {
		if n := len(groups); n == 0 || groups[n-1].Kind != titles[c.Kind] {
			groups = append(groups, codeGroup{Kind: titles[c.Kind]})
		}
		g := &groups[len(groups)-1]
		g.Codes = append(g.Codes, codeRow{c.Code, c.Meaning})
	}
	return groups
}

func settings(r *job.Result) []settingRow {
	s := tables.Summarise(r).Settings
	number := func(p *float64, empty string) string {
		if p == nil {
			return empty
		}
		return plain(*p)
	}
	rows := []settingRow{
		{"pixel size (µm)", number(s.PixelUm.Value, none), s.PixelUm.Source},
		{"frame interval (s)", number(s.IntervalS.Value, none), s.IntervalS.Source},
		{"exposure (s)", number(s.ExposureS.Value, none), s.ExposureS.Source},
		{"temperature (°C)", number(s.TemperatureC.Value, none), s.TemperatureC.Source},
		{"setting", s.Setting.Value, s.Setting.Source},
		{"channel", strconv.Itoa(s.Channel.Value), s.Channel.Source},
		{"shortest filament (µm)", number(s.MinLengthUm.Value, none), s.MinLengthUm.Source},
		{"frames", frameRange(r), s.FirstFrame.Source},
		{"gain (counts per photoelectron)", number(s.Gain.Value, "estimated"), s.Gain.Source},
		{"offset (counts)", number(s.Offset.Value, "estimated"), s.Offset.Source},
	}
	for _, v := range []struct {
		name string
		tables.SettingValue[*float64]
	}{{"chamber depth (µm)", s.ChamberUm}, {"filament radius (nm)", s.RadiusNm}, {"viscosity (mPa·s)", s.ViscosityMPas}, {"height over the wall (µm)", s.HeightUm}, {"persistence length known (µm)", s.KnownLpUm},
		{"its lower limit (µm)", s.KnownLpLowUm}, {"its upper limit (µm)", s.KnownLpHighUm}, {"actin around it (mg/mL)", s.ActinMgPerMl},
		{"prefactor of tube and mesh", s.MeshPrefactor}, {"finite-length term of tube and mesh", s.MeshFiniteTerm}} {
		if v.Value != nil && *v.Value > 0 {
			rows = append(rows, settingRow{v.name, plain(*v.Value), v.Source})
		}
	}
	if s.ReadableFrames.Value {
		rows = append(rows, settingRow{"intact pages of a damaged stack only", "yes", s.ReadableFrames.Source})
	}
	return rows
}

func frameRange(r *job.Result) string {
	last := r.Settings.LastFrame
	if last < 0 || last >= len(r.TimesS) {
		last = len(r.TimesS) - 1
	}
	return fmt.Sprintf("%d to %d", r.Settings.FirstFrame, last)
}
