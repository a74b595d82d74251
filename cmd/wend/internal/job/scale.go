package job

import (
	"math"

	"wend/imaging"
	"wend/trace"
)

// leastNoise is the noise of a pixel, in counts, below which frames are scaled up: a camera's own counts have
// noise of about one or more, and what follows takes rounding to whole counts into account. Floating-point
// stacks may hold anything, often values from 0 to 1.
const leastNoise, scaledNoise = 0.5, 10.0

// scaled is a source whose frames are multiplied by a factor.
type scaled struct {
	trace.Source
	factor float32
}

func (s scaled) ReadFrame(t int, dst *imaging.Frame) error {
	if err := s.Source.ReadFrame(t, dst); err != nil {
		return err
	}
	for i := range dst.Pix {
		dst.Pix[i] *= s.factor
	}
	return nil
}

// inCounts returns src as a source of floating-point frames whose noise is that of counts, and the factor on its
// values; 1 where nothing needs to be done. first is the frame that is looked at.
func inCounts(src trace.Source, info imaging.Info, first int) (trace.Source, float64, error) {
	if info.PixelType != "float32" {
		return src, 1, nil
	}
	var frame, background imaging.Frame
	if err := src.ReadFrame(first, &frame); err != nil {
		return nil, 0, err
	}
	// The background's own floor of half a count would hide small values: look at them enlarged.
	high := 0.0
	for _, v := range frame.Pix {
		high = max(high, math.Abs(float64(v)))
	}
	if high == 0 {
		return src, 1, nil
	}
	enlarge := 1e6 / high
	for i := range frame.Pix {
		frame.Pix[i] *= float32(enlarge)
	}
	imaging.EstimateBackground(frame, 32, &background)
	noise := imaging.NoiseStd(frame, background) / enlarge
	if !(noise > 0) || noise >= leastNoise {
		return src, 1, nil
	}
	factor := scaledNoise / noise
	return scaled{src, float32(factor)}, factor, nil
}

// hintIn returns what is known of a camera in the units of frames multiplied by factor.
func hintIn(factor, gain, offset, maxCount float64) trace.CameraHint {
	return trace.CameraHint{GainCounts: gain * factor, OffsetCounts: offset * factor, MaxCount: maxCount * factor}
}

// cameraOut returns a camera that was found in frames multiplied by factor in the units of the file.
func cameraOut(c imaging.Camera, factor float64) imaging.Camera {
	c.GainCounts /= factor
	c.OffsetCounts /= factor
	c.ReadVariance /= factor * factor
	return c
}
