package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"github.com/spf13/pflag"

	"wend/cmd/wend/internal/job"
)

// number is a flag without a default: NaN until it is given.
type number struct{ value *float64 }

func (n number) String() string {
	if n.value == nil || math.IsNaN(*n.value) {
		return ""
	}
	return strconv.FormatFloat(*n.value, 'g', -1, 64)
}

func (n number) Set(text string) error {
	v, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsNaN(v) {
		return fmt.Errorf("want a number such as 0.1")
	}
	*n.value = v
	return nil
}

func (n number) Type() string { return "number" }

// frameRange is the flag FIRST-LAST, both included, counted from 0.
type frameRange struct{ r *job.Request }

func (f frameRange) String() string {
	if f.r == nil || f.r.FirstFrame == 0 && f.r.LastFrame < 0 {
		return ""
	}
	return fmt.Sprintf("%d-%d", f.r.FirstFrame, f.r.LastFrame)
}

func (f frameRange) Set(text string) error {
	a, b, ok := strings.Cut(text, "-")
	first, err1 := strconv.Atoi(a)
	last, err2 := strconv.Atoi(b)
	if !ok || err1 != nil || err2 != nil || first < 0 || last < first {
		return fmt.Errorf("want FIRST-LAST such as 0-99, counted from 0, both included")
	}
	f.r.FirstFrame, f.r.LastFrame = first, last
	return nil
}

func (f frameRange) Type() string { return "FIRST-LAST" }

// addCalibrationFlags adds the flags that say how a stack was taken.
func addCalibrationFlags(f *pflag.FlagSet, r *job.Request) {
	f.Var(number{&r.PixelUm}, "pixel-um", "`size` of a pixel in the sample, µm (default: from the file)")
	f.Var(number{&r.IntervalS}, "interval-s", "`seconds` from frame to frame (default: from the file)")
	f.Var(number{&r.ExposureS}, "exposure-s", "`seconds` of exposure (default: from the file); 0: do not correct for blur")
	f.Var(number{&r.TemperatureC}, "temperature-c", "`temperature` of the sample, °C (default: 22, assumed)")
	f.IntVar(&r.Channel, "channel", 0, "`number` of the channel, from 1 (needed where the file has several)")
	f.Var(frameRange{r}, "frames", "use only the frames `FIRST-LAST`, counted from 0, both included")
	f.Var(number{&r.Gain}, "gain", "camera `counts` per photoelectron (default: measured from the stack)")
	f.Var(number{&r.Offset}, "offset", "camera `counts` without light (default: measured from the stack)")
	f.BoolVar(&r.ReadableFrames, "readable-frames", false, "use the intact pages of a damaged stack")
}
