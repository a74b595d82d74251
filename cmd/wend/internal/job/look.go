package job

import (
	"fmt"
	"io"
	"math"
	"strings"

	"wend/imaging"
	"wend/trace"
)

// Look is what a stack holds, seen before it is measured.
type Look struct {
	Info    imaging.Info
	Frames  int
	Channel int // from 1
	// First and Last are the median counts of the first and the last frame, Least and Most the extreme ones of the frames looked at.
	First, Last, Least, Most float64
	// Saturated is the share of pixels at the largest possible count.
	Saturated  float64
	Conditions trace.Conditions
	// Lines are the filaments of the first frame, LineSNR their median brightness over the background's noise in a pixel.
	Lines    int
	LineSNR  float64
	PixelUm  float64 // NaN if unknown
	Warnings []string
}

// nominalPixelUm stands in for a pixel size that is not known, where only pixels matter.
const nominalPixelUm = 0.1

// LookAt opens the stack at path and measures what can be seen in a dozen of its frames. Values in r beat the file's.
func LookAt(path string, r Request) (*Look, error) {
	r.Setting = "free"
	if err := r.Check(); err != nil {
		return nil, err
	}
	stack, err := imaging.Open(path, imaging.OpenOptions{ReadableFrames: r.ReadableFrames})
	if err != nil {
		return nil, err
	}
	defer stack.Close()
	l := &Look{Info: stack.Info(), Frames: stack.Frames(), Channel: max(1, r.Channel), PixelUm: r.PixelUm}
	if l.Channel > l.Info.SizeC {
		return nil, usage("%s: --channel %d: %s", path, l.Channel, channelList(l.Info))
	}
	if math.IsNaN(l.PixelUm) {
		l.PixelUm = l.Info.Calibration.PixelUm.Value
	}
	src := channel{stack, l.Channel - 1}
	first, last := r.FirstFrame, r.LastFrame
	if last < 0 {
		last = l.Frames - 1
	}
	if first >= l.Frames || last >= l.Frames {
		return nil, usage("%s: --frames %d-%d, but the stack has the frames 0-%d", path, first, last, l.Frames-1)
	}
	var damage error
	if r.ReadableFrames {
		if last, damage, err = readableUntil(src, first, last); err != nil {
			return nil, err
		}
	}
	if err := l.examine(src, first, last, r); err != nil {
		return nil, hinted(err)
	}
	l.warn(r)
	if damage != nil {
		l.Warnings = append(l.Warnings, fmt.Sprintf("the stack is damaged, and measure will end with frame %d: %v", last, damage))
	}
	return l, nil
}

// examine fills in what the frames first to last (both included) show.
func (l *Look) examine(src trace.Source, first, last int, r Request) error {
	if err := l.brightness(src, first, last); err != nil {
		return err
	}
	o := trace.Options{PixelUm: l.PixelUm}
	if math.IsNaN(o.PixelUm) {
		o.PixelUm = nominalPixelUm
	}
	if !math.IsNaN(r.MinLengthUm) {
		o.MinLengthUm = r.MinLengthUm
	}
	counts, factor, err := inCounts(src, l.Info, first)
	if err != nil {
		return err
	}
	l.Conditions, err = trace.Survey(counts, first, last, o, hintIn(factor, r.Gain, r.Offset, l.Info.MaxCount))
	if err != nil {
		return err
	}
	tracer, err := trace.NewTracer(o, l.Conditions)
	if err != nil {
		return err
	}
	var frame imaging.Frame
	if err := counts.ReadFrame(first, &frame); err != nil {
		return err
	}
	contours, err := tracer.Frame(frame, first)
	if err != nil {
		return err
	}
	var snr []float64
	for _, c := range contours {
		snr = append(snr, c.SNR)
	}
	l.Lines, l.LineSNR = len(contours), median(snr)
	l.Conditions.Camera = cameraOut(l.Conditions.Camera, factor)
	return nil
}

// brightness reads a dozen frames for their counts.
func (l *Look) brightness(src trace.Source, first, last int) error {
	const most = 12
	n := min(most, last-first+1)
	l.Least, l.Most = math.Inf(1), math.Inf(-1)
	saturated, all := 0, 0
	var frame imaging.Frame
	for i := range n {
		t := first
		if n > 1 {
			t += i * (last - first) / (n - 1)
		}
		if err := src.ReadFrame(t, &frame); err != nil {
			return err
		}
		counts := make([]float64, 0, len(frame.Pix))
		for _, v := range frame.Pix {
			x := float64(v)
			counts = append(counts, x)
			l.Least, l.Most = min(l.Least, x), max(l.Most, x)
			if x >= l.Info.MaxCount {
				saturated++
			}
		}
		all += len(frame.Pix)
		l.Last = median(counts)
		if i == 0 {
			l.First = l.Last
		}
	}
	l.Saturated = float64(saturated) / float64(all)
	return nil
}

// warn collects what measure would stumble over.
func (l *Look) warn(r Request) {
	l.Warnings = append(l.Warnings, l.Info.Warnings...)
	add := func(format string, args ...any) { l.Warnings = append(l.Warnings, fmt.Sprintf(format, args...)) }
	cal := l.Info.Calibration
	if math.IsNaN(l.PixelUm) {
		add("no pixel size in the file: pass --pixel-um")
	}
	if math.IsNaN(r.IntervalS) && math.IsNaN(cal.IntervalS.Value) {
		add("no frame interval in the file: pass --interval-s")
	}
	if math.IsNaN(r.ExposureS) && math.IsNaN(cal.ExposureS.Value) {
		add("no exposure in the file: pass --exposure-s")
	}
	if l.Info.SizeC > 1 && r.Channel == 0 {
		add("%s: pass --channel; this is channel 1", channelList(l.Info))
	}
	if l.Frames < 20 {
		add("only %d frames: the interval of a persistence length will be wide", l.Frames)
	}
	if l.Saturated > 1e-5 {
		add("%.2g %% of the pixels are saturated: lower the light, the exposure or the camera's gain", 100*l.Saturated)
	}
	switch {
	case l.Lines == 0:
		add("no filament found in the first frame: is it the right channel, is there enough light?")
	case l.Conditions.WidthPx < 0.85:
		add("the lines are only %.2f pixels wide (standard deviation): the pixels are too large to see their shape well; want 1 to 2", l.Conditions.WidthPx)
	case l.Conditions.WidthPx > 4:
		add("the lines are %.1f pixels wide (standard deviation): out of focus, or very small pixels that waste light", l.Conditions.WidthPx)
	}
	if l.Lines > 0 && l.LineSNR < 1 {
		add("the lines are dim: peak %.2f times the background's noise in a pixel", l.LineSNR)
	}
	if l.Conditions.Camera.Source == imaging.CameraFromBackground {
		add("the camera's gain could not be measured from these frames: pass --gain and --offset for right photon numbers")
	}
}

// Print writes the look as aligned text.
func (l *Look) Print(w io.Writer) error {
	var b strings.Builder
	line := func(name, format string, args ...any) {
		fmt.Fprintf(&b, "  %-13s %s\n", name, fmt.Sprintf(format, args...))
	}
	i := l.Info
	fmt.Fprintf(&b, "%s\n", i.Path)
	line("format", "%s, %s, %s, %s, %s", i.Format, i.ByteOrder, i.PixelType, i.Layout, i.Compression)
	line("shape", "%d × %d pixels, pages: %d", i.Width, i.Height, i.Pages)
	line("axes", "frames %d, channels %d, slices %d (order %s)", l.Frames, i.SizeC, i.SizeZ, i.DimensionOrder)
	if len(i.ChannelNames) > 0 {
		line("channels", "%s", strings.Join(i.ChannelNames, ", "))
	}
	calibrated := func(m imaging.Measured, unit string) string {
		if math.IsNaN(m.Value) {
			return "not in the file"
		}
		return fmt.Sprintf("%.6g %s (%s)", m.Value, unit, m.Source)
	}
	line("pixel", "%s", calibrated(i.Calibration.PixelUm, "µm"))
	line("interval", "%s", calibrated(i.Calibration.IntervalS, "s"))
	line("exposure", "%s", calibrated(i.Calibration.ExposureS, "s"))
	line("counts", "%.6g to %.6g, median %.6g in the first frame looked at, %.6g in the last", l.Least, l.Most, l.First, l.Last)
	if math.IsNaN(i.MaxCount) {
		line("saturation", "not known for floating-point pixels")
	} else {
		line("saturation", "%.3g %% of the pixels at %.6g", 100*l.Saturated, i.MaxCount)
	}
	c := l.Conditions.Camera
	line("camera", "gain %.3g counts per photoelectron, zero-light level %.4g counts (%s)", c.GainCounts, c.OffsetCounts, c.Source)
	line("noise", "%.3g counts in a background pixel", math.Sqrt(max(c.ReadVariance+c.GainCounts*(l.First-c.OffsetCounts), 0)))
	width := fmt.Sprintf("%.2f pixels", l.Conditions.WidthPx)
	if !math.IsNaN(l.PixelUm) {
		width += fmt.Sprintf(" or %.0f nm", 1000*l.PixelUm*l.Conditions.WidthPx)
	}
	if l.Lines == 0 {
		line("lines", "none found in the first frame")
	} else {
		line("lines", "%d in the first frame, %s wide (standard deviation of the profile, pixel included), peak %.1f times the noise", l.Lines, width, l.LineSNR)
	}
	for _, warning := range l.Warnings {
		fmt.Fprintf(&b, "  warning: %s\n", warning)
	}
	_, err := io.WriteString(w, b.String())
	return err
}
