package main

import (
	"fmt"
	"math"
	"math/rand/v2"

	"wend/modes"
	"wend/modes/likelihood"
)

// levels name the values of a condition, in the units of the filament's own slowest mode where that is what matters.
type levels struct {
	stiffness, length, frames, interval, exposure, noise, bend, drag string
}

// named lists them in the order of the table.
func (l levels) named() [][2]string {
	return [][2]string{{"Lp µm", l.stiffness}, {"L µm", l.length}, {"frames", l.frames}, {"interval / τ₁", l.interval},
		{"exposure / τ₁", l.exposure}, {"noise", l.noise}, {"bend 1/µm", l.bend}, {"drag mPa·s", l.drag}}
}

// mostNoiseUm3 is the noise of a line of some 100 photons per µm on a background of 8 photons per pixel.
const mostNoiseUm3 = 1e-3

// conditions is the grid: every level of every quantity occurs about equally often, in combinations drawn with a fixed seed. Intervals and
// exposures are in relaxation times of the first mode. The noise equals the thermal variance of the mode whose number is given; "none" stands for a
// thousandth of that of mode 10. No contour is noisier than a line of some 100 photons per µm makes it. Filaments are at most five persistence lengths long.
func conditions(count int) []condition {
	rng := rand.New(rand.NewPCG(2025, 1))
	column := func(values ...float64) []float64 {
		out := make([]float64, count)
		for i := range out {
			out[i] = values[i%len(values)]
		}
		rng.Shuffle(count, func(i, j int) { out[i], out[j] = out[j], out[i] })
		return out
	}
	length, lp := column(3, 6, 10, 18, 30), column(0.5, 1.5, 5, 16, 50, 1000, 6000)
	frames, interval := column(20, 60, 200, 1000), column(0.01, 0.1, 1, 10)
	exposure, noise, scale := column(0, 0.1, 1, 3), column(0, 8, 4, 1.5), column(0.8, 1, 1.25)
	bend, drag := column(0, 0.02, 0.15), column(2.4e-3, 2.4e-2)
	var out []condition
	for i := range count {
		c := condition{dragPaS: drag[i], lengthUm: length[i], lpUm: math.Max(lp[i], length[i]/5), frames: int(frames[i]), noiseScale: scale[i],
			bendPerUm: math.Min(bend[i], 3/length[i])}
		tau := likelihood.ModeProcess(modes.BeamWavenumber(1, c.lengthUm), c.lpUm, c.dragPaS, temperatureK).RelaxationS
		c.intervalS = interval[i] * tau
		c.exposureS = math.Min(exposure[i], interval[i]) * tau
		place, share := 10.0, 1e-3
		if noise[i] > 0 {
			place, share = noise[i], 1
		}
		c.noiseUm3 = share / (c.lpUm * math.Pow((place+0.5)*math.Pi/c.lengthUm, 4))
		c.level = levels{stiffness: step(c.lpUm, 2, 10, 100), length: fmt.Sprint(length[i]), frames: fmt.Sprint(c.frames), interval: fmt.Sprint(interval[i]),
			exposure: fmt.Sprint(math.Min(exposure[i], interval[i])), noise: fmt.Sprint("mode ", noise[i]), bend: fmt.Sprint(bend[i]), drag: fmt.Sprint(drag[i] * 1e3)}
		switch {
		case noise[i] == 0:
			c.level.noise = "none"
		case c.noiseUm3 > mostNoiseUm3:
			c.noiseUm3, c.level.noise = mostNoiseUm3, "of 100 photons"
		}
		out = append(out, c)
	}
	return out
}

// step names the range between edges in which v lies.
func step(v float64, edges ...float64) string {
	low := 0.0
	for _, e := range edges {
		if v < e {
			return fmt.Sprintf("%g to %g", low, e)
		}
		low = e
	}
	return fmt.Sprintf("%g and more", low)
}

// bound is the Cramér–Rao standard deviation of ln Lp in a movie of the condition.
func (c condition) bound() float64 {
	d := likelihood.Data{TemperatureK: temperatureK}
	d.ExposureS = c.exposureS
	for i := range c.frames {
		d.TimesS = append(d.TimesS, float64(i)*c.intervalS)
	}
	o := modes.DefaultOptions()
	for n := 1; n <= o.MaxModes; n++ {
		k := modes.BeamWavenumber(n, c.lengthUm)
		if 2*math.Pi/k < o.ResolutionPSF*psfUm {
			break
		}
		t := likelihood.Track{WavenumberPerUm: k, Amplitude: make([]float64, c.frames)}
		for range c.frames {
			t.NoiseVariance = append(t.NoiseVariance, c.noiseScale*c.noiseUm3*math.Exp(k*k*psfUm*psfUm))
		}
		d.Tracks = append(d.Tracks, t)
	}
	return likelihood.CramerRaoSD(d, c.lpUm, c.dragPaS, 12, rand.New(rand.NewPCG(7, 7)))
}
