package trace

import (
	"fmt"
	"math"

	"wend/imaging"
	"wend/imaging/ridge"
)

// Conditions are what [Survey] found out about a movie, and what every frame is traced with.
type Conditions struct {
	// WidthPx is the standard deviation of a line's profile in pixels, the pixel's own
	// width included.
	WidthPx float64
	// KnotWidths is the distance between the knots of the centreline, in line widths.
	KnotWidths float64
	Camera     imaging.Camera
	// Misfit is the usual χ² per pixel of a fit: 1 for a line that is as the model says; 0 if unknown.
	Misfit float64
	// MaxCount is the largest value a pixel can have, +Inf if unknown.
	MaxCount float64
}

// ResolvedKnots is the shortest wavelength that contours carry unchanged, in knots: above it the amplitude of a wave
// is right within 4 % wherever its crests lie between the knots.
const ResolvedKnots = 2.6

// ResolvedWidths is the shortest wavelength that contours traced with c carry unchanged, in line
// widths (the standard deviation of the profile): [ResolvedKnots] knots. What is shorter than two knots they do not carry
// at all, neither signal nor noise.
func (c Conditions) ResolvedWidths() float64 { return ResolvedKnots * c.KnotWidths }

// Tracer finds and fits the contours of one frame after another. It keeps its memory between
// frames; give each goroutine its own.
type Tracer struct {
	options    Options
	conditions Conditions
	background imaging.Frame
	binned     binnedFrame
	ridges     ridge.Map
	detector   detector
	fitter     fitter
	owner      ownerMap
	// observe, if set, is called after every fit, while the fitter still holds it.
	observe func(f *fitter, r fitted)
}

// NewTracer makes a Tracer. The error says which option cannot be.
func NewTracer(o Options, c Conditions) (*Tracer, error) {
	if !(o.PixelUm > 0) {
		return nil, fmt.Errorf("trace: pixel size %g µm, want a positive one", o.PixelUm)
	}
	if !(c.WidthPx > 0) {
		return nil, fmt.Errorf("trace: line width %g pixels, want a positive one", c.WidthPx)
	}
	if !(c.KnotWidths >= 2) {
		return nil, fmt.Errorf("trace: knots %g line widths apart, want 2 or more", c.KnotWidths)
	}
	return &Tracer{options: o.withDefaults(), conditions: c}, nil
}

// Frame returns the contours of a frame, longest-lasting reasons included: contours that must
// not be used carry a Reason. frame is left as it was. number is stored as the contours' Frame.
func (t *Tracer) Frame(frame imaging.Frame, number int) ([]Contour, error) {
	candidates, err := t.detect(frame)
	if err != nil {
		return nil, fmt.Errorf("trace: frame %d: %w", number, err)
	}
	width := t.conditions.WidthPx
	var out []Contour
	for i, c := range candidates {
		if c.spot {
			continue
		}
		t.fitter.camera, t.fitter.width, t.fitter.knots = t.conditions.Camera, width, t.conditions.KnotWidths
		others := func(pixel int) bool { return t.owner.foreign(pixel, i) }
		r, err := t.fitter.fit(frame, t.background, others, c.path)
		// A line out of focus is wider: fit it again with its own width.
		if err == nil && math.Abs(r.widthStep) > 0.1*width && math.Abs(r.widthStep) > 4*r.widthSE {
			t.fitter.width = min(max(width+r.widthStep, 0.7*width), 2*width)
			if again, e := t.fitter.fit(frame, t.background, others, c.path); e == nil {
				r = again
			}
		}
		// A line that is dimmer than others, or so smeared by its motion that its short waves are lost, is fitted with knots
		// further apart.
		knots := chooseKnots(r.knotNoise())
		if r.lengthening > mostLengthening {
			knots = max(knots, 1.5*t.fitter.knots)
		}
		if err == nil && knots > 1.4*t.fitter.knots {
			t.fitter.knots = knots
			if again, e := t.fitter.fit(frame, t.background, others, c.path); e == nil {
				r = again
			}
		}
		if err == nil && t.observe != nil {
			t.observe(&t.fitter, r)
		}
		out = append(out, t.contour(frame, number, c, r, err))
	}
	markTouching(out, 4.7*width*t.options.PixelUm)
	return out, nil
}

// detect leaves the frame's background, ridge map and pixel owners behind, and returns candidates.
func (t *Tracer) detect(frame imaging.Frame) ([]candidate, error) {
	imaging.EstimateBackground(frame, backgroundBlockPx, &t.background)
	o, width := t.options, t.conditions.WidthPx
	// A filter much wider than a pixel sees as much in fewer, larger pixels.
	bin := max(1, int(ridgeWidths*width/leastRidgePx))
	t.binned.average(frame, t.background, bin, t.conditions.Camera)
	scale := width / float64(bin)
	err := ridge.Compute(t.binned.Frame, ridge.Options{SigmaPx: ridgeWidths * scale, NoiseCounts: 1 / float64(bin),
		Floor: ridgeFloor}, &t.ridges)
	if err != nil {
		return nil, err
	}
	px := o.PixelUm * float64(bin)
	candidates := t.detector.find(&t.ridges, o.StrengthLow, o.StrengthHigh, scale, o.GapUm/px, o.MinLengthUm/px/2)
	for _, c := range candidates {
		for i, p := range c.path {
			// The centre of the first large pixel is the mean of the small ones' centres.
			c.path[i] = p.times(float64(bin)).plus(xy{float64(bin-1) / 2, float64(bin-1) / 2})
		}
	}
	t.owner.assign(candidates, frame, t.conditions)
	return candidates, nil
}

// leastRidgePx is the least scale of the ridge filter, in its own pixels, to which pixels are put
// together; ridgeFloor is the strength below which the map is not worked out.
const (
	leastRidgePx = 1.2
	ridgeFloor   = 1.5
)

// ridgeWidths is the scale of the ridge filter in line widths w. A line's response over the filter's
// noise grows with the scale σ as σ³/(σ²+w²)^1.5, 0.35 at w, 0.58 at 1.5 w, 0.72 at 2 w; what lies
// closer together than the scale runs together.
const ridgeWidths = 2.0

// backgroundBlockPx is the side of the blocks over which the background is taken as smooth.
const backgroundBlockPx = 32

// contour turns a fit in pixels into a Contour in µm: the one place where pixels become µm.
func (t *Tracer) contour(frame imaging.Frame, number int, c candidate, r fitted, fitErr error) Contour {
	px := t.options.PixelUm
	out := Contour{Frame: number, Ends: [2]End{EndFree, EndFree}}
	points, se := r.points, r.se
	if fitErr != nil {
		points, se = c.path, nil
		out.Reason = ReasonFit
		r.length = arcLengths(points)[len(points)-1]
	}
	s := arcLengths(points)
	for i, p := range points {
		q := Point{SUm: s[i] * px, XUm: p.x * px, YUm: p.y * px, SEUm: math.NaN()}
		if se != nil {
			q.SEUm = se[i] * px
		}
		out.Points = append(out.Points, q)
	}
	out.LengthUm, out.LengthSEUm = r.length*px, r.lengthSE*px
	out.EndsSEUm = [2]float64{r.endsSE[0] * px, r.endsSE[1] * px}
	for k, p := range [2]xy{points[0], points[len(points)-1]} {
		if t.atBorder(frame, p) {
			out.Ends[k] = EndBorder
		}
	}
	nan := math.NaN()
	out.PhotonsPerUm, out.BackgroundPerUm2, out.SNR, out.WidthUm, out.NoiseUm3 = nan, nan, nan, nan, nan
	if fitErr == nil {
		cam := t.conditions.Camera
		out.PhotonsPerUm = r.brightness / cam.GainCounts / px
		out.BackgroundPerUm2 = (r.background - cam.OffsetCounts) / cam.GainCounts / (px * px)
		out.SNR = r.brightness / (math.Sqrt(2*math.Pi) * r.width) / math.Sqrt(cam.Variance(r.background))
		out.WidthUm = math.Sqrt(max(sq(r.width+r.widthStep)-1.0/12, 0)) * px
		out.NoiseUm3 = r.noise * px * px * px
	}
	switch {
	case out.Ends[0] == EndBorder || out.Ends[1] == EndBorder || t.nearBorder(frame, points):
		out.Reason = ReasonBorder
	case c.tangled:
		out.Reason = ReasonCrossing
	case out.Reason != "":
	case t.owner.saturated(points, t.conditions) > 0.02:
		out.Reason = ReasonSaturated
	case r.chi2PerPixel > worstMisfit*max(t.conditions.Misfit, 1):
		out.Reason = ReasonBranched
	case r.meanWidth > widestLine*t.conditions.WidthPx:
		out.Reason = ReasonWide
	case out.SNR < faintestSNR || !(median(se) < r.width):
		out.Reason = ReasonFaint
	}
	return out
}

// worstMisfit is how many times its usual value χ² per pixel may be before a line is taken for something else:
// a branch or another line on top of it leaves light that one line cannot explain.
const worstMisfit = 1.5

// widestLine is how many times as wide as the movie's lines one may be before it is taken for two side by
// side, or for one out of focus.
const widestLine = 1.7

// faintestSNR is the peak brightness over the background's noise in one pixel below which a
// line is not measured: the pixels then no longer decide between the line and its neighbourhood.
const faintestSNR = 0.5

// atBorder tells whether an end lies so near the border that the line may go on beyond it.
func (t *Tracer) atBorder(f imaging.Frame, p xy) bool {
	m := 2.5 * t.conditions.WidthPx
	return p.x < m || p.y < m || p.x > float64(f.Width-1)-m || p.y > float64(f.Height-1)-m
}

// nearBorder tells whether the line's light falls over the border anywhere.
func (t *Tracer) nearBorder(f imaging.Frame, points []xy) bool {
	m := 1.5 * t.conditions.WidthPx
	for _, p := range points {
		if p.x < m || p.y < m || p.x > float64(f.Width-1)-m || p.y > float64(f.Height-1)-m {
			return true
		}
	}
	return false
}

// markTouching gives contours that come nearer than limit (µm) to one another the reason crossing.
func markTouching(list []Contour, limit float64) {
	for a := range list {
		for b := a + 1; b < len(list); b++ {
			if nearerThan(list[a].Points, list[b].Points, limit) {
				for _, c := range []*Contour{&list[a], &list[b]} {
					if c.Reason == "" {
						c.Reason = ReasonCrossing
					}
				}
			}
		}
	}
}

func nearerThan(a, b []Point, limit float64) bool {
	if len(a) == 0 || len(b) == 0 {
		return false
	}
	lo, hi := bounds(a)
	for _, p := range b {
		if p.XUm < lo.x-limit || p.YUm < lo.y-limit || p.XUm > hi.x+limit || p.YUm > hi.y+limit {
			continue
		}
		for _, q := range a {
			if sq(p.XUm-q.XUm)+sq(p.YUm-q.YUm) < limit*limit {
				return true
			}
		}
	}
	return false
}

func bounds(p []Point) (lo, hi xy) {
	lo, hi = xy{math.Inf(1), math.Inf(1)}, xy{math.Inf(-1), math.Inf(-1)}
	for _, q := range p {
		lo = xy{min(lo.x, q.XUm), min(lo.y, q.YUm)}
		hi = xy{max(hi.x, q.XUm), max(hi.y, q.YUm)}
	}
	return lo, hi
}
