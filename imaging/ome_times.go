package imaging

import (
	"fmt"
	"math"
	"slices"
)

// median returns the middle of v, which it sorts; NaN for none.
func median(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	slices.Sort(v)
	n := len(v)
	if n%2 == 1 {
		return v[n/2]
	}
	return (v[n/2-1] + v[n/2]) / 2
}

// timing fills the times of c from the planes of the first channel and slice. The times at
// which planes were taken come before the nominal increment, as only they know of dropped
// frames. frames is the number of frames that the file really has.
func (o *omeImage) timing(c *Calibration, frames int) (warnings []string) {
	warn := func(format string, args ...any) { warnings = append(warnings, fmt.Sprintf(format, args...)) }
	increment := math.NaN()
	if o.hasIncrement {
		v, err := quantity("OME-XML TimeIncrement", o.increment, o.incrUnit, secondsPer, "s")
		switch {
		case err != nil:
			warn("%v; it was not used", err)
		case v > 0:
			increment = v
			c.IntervalS = Measured{Value: v, Source: "OME-XML TimeIncrement"}
		case v < 0:
			warn("OME-XML TimeIncrement is %.4g s, want a positive time; it was not used", v)
		}
	}

	times := make([]float64, frames)
	for i := range times {
		times[i] = math.NaN()
	}
	var exposures []float64
	var timeErr, exposureErr error
	given := 0
	for _, p := range o.planes {
		if p.c != 0 || p.z != 0 || p.t >= frames {
			continue
		}
		if p.deltaT != "" {
			v, err := quantity("OME-XML Plane DeltaT", p.deltaT, p.deltaTUnit, secondsPer, "s")
			if err != nil {
				timeErr = err
			} else {
				if math.IsNaN(times[p.t]) {
					given++
				}
				times[p.t] = v
			}
		}
		if p.exposure != "" {
			v, err := quantity("OME-XML Plane ExposureTime", p.exposure, p.exposeUnit, secondsPer, "s")
			switch {
			case err != nil:
				exposureErr = err
			case v > 0:
				exposures = append(exposures, v)
			}
		}
	}
	if timeErr != nil {
		warn("%v; the times of the planes were not used", timeErr)
	} else if given > 0 && frames > 1 {
		warnings = append(warnings, c.planeTimes(times, given, increment)...)
	}
	if exposureErr != nil {
		warn("%v; it was not used", exposureErr)
	}
	if len(exposures) > 0 {
		m := median(exposures)
		c.ExposureS = Measured{Value: m, Source: "OME-XML Plane ExposureTime"}
		if lo, hi := exposures[0], exposures[len(exposures)-1]; hi > 1.02*lo {
			warn("the exposure changes from %.4g to %.4g s within the movie; its median was taken", lo, hi)
		}
	}
	return warnings
}

// planeTimes takes over the times of the frames, in s, where they make sense.
func (c *Calibration) planeTimes(times []float64, given int, increment float64) (warnings []string) {
	warn := func(format string, args ...any) { warnings = append(warnings, fmt.Sprintf(format, args...)) }
	if given < len(times) {
		warn("OME-XML gives the time of %d of %d frames; these times were not used", given, len(times))
		return warnings
	}
	steps := make([]float64, len(times)-1)
	for i := range steps {
		steps[i] = times[i+1] - times[i]
		if !(steps[i] > 0) {
			warn("the times of the planes in OME-XML do not rise from frame %d to frame %d; they were not used", i, i+1)
			return warnings
		}
	}
	m := median(slices.Clone(steps))
	long, where := 0, 0
	for i, s := range steps {
		if s > 1.5*m {
			if long == 0 {
				where = i
			}
			long++
		}
	}
	if long > 0 {
		warn("%d of %d steps between frames are longer than 1.5 intervals, the first after frame %d: frames were dropped", long, len(steps), where)
	}
	if math.Abs(m/increment-1) > 0.02 {
		warn("OME-XML TimeIncrement is %.4g s, but its planes were taken %.4g s apart; the latter was taken", increment, m)
	}
	c.IntervalS = Measured{Value: m, Source: "OME-XML Plane DeltaT"}
	c.TimesS = make([]float64, len(times))
	for i, t := range times {
		c.TimesS[i] = t - times[0]
	}
	return warnings
}
