// Package tablestest makes results of invented filaments for the tests of tables and report: shapes drawn
// from worm-like-chain equilibrium, variances and correlations computed from these very shapes.
package tablestest

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/cmd/wend/internal/job"
	"wend/imaging"
	"wend/modes"
	"wend/trace"
)

// PersistenceUm is the persistence length of every invented filament, µm.
const PersistenceUm = 17.0

const (
	pixelUm   = 0.108
	intervalS = 0.1
	exposureS = 0.02
	psfUm     = 0.132
	noiseNm   = 14.0
	stepUm    = 0.1
	dragPaS   = 2.4e-3
	kT        = 1.380649e-23 * (273.15 + 22)
)

// Result returns a stack's result with so many filaments followed through so many frames, the same for
// the same arguments. Of three or more filaments the second gives a lower bound and the third is refused
// as not thermal; of any number, the frames of some are dropped for several reasons.
func Result(filaments, frames int) *job.Result {
	rng := rand.New(rand.NewPCG(uint64(filaments), uint64(frames)))
	side := 256
	if filaments > 3 {
		side = 512
	}
	r := &job.Result{
		Name: "invented", StackPath: "/some/folder/invented.ome.tif",
		SHA256:  "9f2c5e0b7c1d4a6f8e3b2a1908f7e6d5c4b3a29180f0e1d2c3b4a5968778695a",
		Version: "0.1.0", RidgeImplementation: "plain Go",
		Settings: job.Settings{PixelUm: pixelUm, IntervalS: intervalS, ExposureS: exposureS, TemperatureC: 22, Setting: "free", Channel: 1,
			MinLengthUm: 2, FirstFrame: 0, LastFrame: -1, Gain: math.NaN(), Offset: math.NaN(),
			Sources: map[string]string{"pixel_um": "OME-XML PhysicalSizeX", "interval_s": "OME-XML TimeIncrement", "exposure_s": "flag",
				"temperature_c": "assumed", "setting": "flag"}},
		Info: imaging.Info{Path: "/some/folder/invented.ome.tif", Width: side, Height: side, Pages: frames, SizeC: 1, SizeZ: 1, SizeT: frames,
			DimensionOrder: "XYCZT", PixelType: "uint16", MaxCount: 65535, Format: "TIFF", ByteOrder: "little endian", Compression: "none", Layout: "strips"},
		Camera:       imaging.Camera{GainCounts: 2.1, OffsetCounts: 100, ReadVariance: 6.5, Source: "estimated from the stack"},
		PictureFrame: frames / 2,
	}
	for k := 0; k < frames; k++ {
		r.TimesS = append(r.TimesS, float64(k)*intervalS)
	}
	trace.QuantiseTimes(r.TimesS)
	columns := int(math.Ceil(math.Sqrt(float64(filaments))))
	cell := float64(side) * pixelUm / float64(max(columns, 1))
	for i := 0; i < filaments; i++ {
		cx, cy := (float64(i%columns)+0.5)*cell, (float64(i/columns)+0.5)*cell
		length := math.Min(6.5+1.9*float64((i*3)%4), 0.8*cell)
		r.Filaments = append(r.Filaments, filament(rng, i+1, frames, length, cx, cy, r.TimesS))
	}
	if filaments >= 3 {
		bound(&r.Filaments[1])
		refuse(&r.Filaments[2])
	}
	if filaments == 0 {
		r.Warnings = append(r.Warnings, job.Warning{Code: "no_filament", Text: "No filament was found. Check the channel, the focus and --min-length-um."})
	}
	r.Warnings = append(r.Warnings, job.Warning{Code: "temperature_assumed", Text: "No temperature was given: 22 °C is assumed. The persistence length does not depend on it, the bending rigidity does."})
	r.Picture = picture(rng, r, side)
	return r
}

func filament(rng *rand.Rand, id, frames int, length, cx, cy float64, times []float64) job.Filament {
	const modesDrawn = 25
	nan := math.NaN()
	amplitude := make([]float64, modesDrawn+1)
	scale := func(n int) float64 { return length / (float64(n) * math.Pi) / math.Sqrt(PersistenceUm) }
	relax := func(n int) float64 {
		k := (float64(n) + 0.5) * math.Pi / length * 1e6
		return dragPaS / (PersistenceUm * 1e-6 * kT * math.Pow(k, 4))
	}
	for n := 1; n <= modesDrawn; n++ {
		amplitude[n] = rng.NormFloat64() * scale(n)
	}
	direction := rng.Float64() * 2 * math.Pi
	f := job.Filament{Filament: trace.Filament{ID: id, First: 0, Last: frames - 1}}
	reasons := []trace.Reason{trace.ReasonFaint, trace.ReasonLength, trace.ReasonCrossing, trace.ReasonMissing}
	for k := 0; k < frames; k++ {
		for n := 1; n <= modesDrawn; n++ {
			phi := math.Exp(-intervalS / relax(n))
			amplitude[n] = phi*amplitude[n] + math.Sqrt(1-phi*phi)*rng.NormFloat64()*scale(n)
		}
		direction += 0.01 * rng.NormFloat64()
		cx += 0.01 * rng.NormFloat64()
		cy += 0.01 * rng.NormFloat64()
		c := trace.Contour{Frame: k, LengthUm: length + 0.05*rng.NormFloat64(), LengthSEUm: 0.045, Ends: [2]trace.End{trace.EndFree, trace.EndFree},
			EndsSEUm: [2]float64{0.03, 0.03}, PhotonsPerUm: 600 * math.Exp(-float64(k)/float64(4*frames)) * (1 + 0.03*rng.NormFloat64()),
			BackgroundPerUm2: 690 + 10*rng.NormFloat64(), SNR: 9 + rng.NormFloat64(), WidthUm: psfUm + 0.002*rng.NormFloat64(), NoiseUm3: noiseNm * noiseNm * 1e-6 * stepUm}
		if rng.Float64() < 0.12 {
			c.Reason = reasons[rng.IntN(len(reasons))]
			switch c.Reason {
			case trace.ReasonLength:
				c.LengthUm *= 0.6 + 0.25*rng.Float64()
			case trace.ReasonMissing:
				f.Contours = append(f.Contours, c)
				continue
			}
		}
		steps := int(c.LengthUm / stepUm)
		x, y := cx-0.45*length*math.Cos(direction), cy-0.45*length*math.Sin(direction)
		for j := 0; j <= steps; j++ {
			s := float64(j) * stepUm
			theta := direction
			for n := 1; n <= modesDrawn; n++ {
				theta += math.Sqrt(2/length) * amplitude[n] * math.Cos(float64(n)*math.Pi*s/length)
			}
			dx, dy := noiseNm*1e-3*rng.NormFloat64(), noiseNm*1e-3*rng.NormFloat64()
			c.Points = append(c.Points, trace.Point{SUm: s, XUm: x + dx*math.Sin(theta), YUm: y + dy*math.Cos(theta), SEUm: noiseNm * 1e-3 * (0.9 + 0.2*rng.Float64())})
			x += stepUm * math.Cos(theta)
			y += stepUm * math.Sin(theta)
		}
		f.Contours = append(f.Contours, c)
	}
	f.Quantise()
	for _, c := range f.Contours {
		if c.Used() {
			f.FramesUsed++
		}
	}
	f.LengthUm, f.LengthSDUm = trace.RoundDecimals(length, 5), 0.05
	f.SNR, f.PhotonsPerUm, f.BackgroundPerUm2, f.PSFUm, f.LocalisationUm = 9, 560, 690, psfUm, noiseNm*1e-3
	f.Ends = [2]trace.End{trace.EndFree, trace.EndFree}
	f.LpUm, f.LpLowUm, f.LpHighUm, f.TangentFitLpUm, f.TangentFitIntercept = nan, nan, nan, nan, nan
	analyse(&f, relax)
	return f
}

// analyse fills in the estimates with the plain moment formulas of the cosine modes.
func analyse(f *job.Filament, relax func(n int) float64) {
	length := f.LengthUm
	const highest = 12
	amplitudes := make([][]float64, highest+1)
	segments := 0
	type sums struct {
		sum   float64
		pairs int
	}
	lags := map[int]*sums{}
	for _, c := range f.Contours {
		if !c.Used() {
			continue
		}
		// Angles over four steps each: the noise of a point is small against 0.4 µm.
		const stride = 4
		var theta []float64
		for j := 0; j+stride < len(c.Points); j += stride {
			a := math.Atan2(c.Points[j+stride].YUm-c.Points[j].YUm, c.Points[j+stride].XUm-c.Points[j].XUm)
			if len(theta) > 0 {
				a += 2 * math.Pi * math.Round((theta[len(theta)-1]-a)/(2*math.Pi))
			}
			theta = append(theta, a)
		}
		segments = len(theta)
		for n := 1; n <= highest; n++ {
			a := 0.0
			for j, t := range theta {
				a += math.Sqrt(2/length) * t * math.Cos(float64(n)*math.Pi*(float64(j)+0.5)/float64(len(theta))) * length / float64(len(theta))
			}
			amplitudes[n] = append(amplitudes[n], a)
		}
		for i := range theta {
			for j := i + 2; j < len(theta); j++ {
				s := lags[j-i]
				if s == nil {
					s = &sums{}
					lags[j-i] = s
				}
				s.sum += math.Cos(theta[j] - theta[i])
				s.pairs++
			}
		}
	}
	var dof, weighted float64
	for n := 1; n <= highest; n++ {
		mean, variance := 0.0, 0.0
		frames := float64(len(amplitudes[n]))
		for _, a := range amplitudes[n] {
			mean += a / frames
		}
		for _, a := range amplitudes[n] {
			variance += (a - mean) * (a - mean) / (frames - 1)
		}
		q := float64(n) * math.Pi / length
		sin := math.Sin(float64(n) * math.Pi / (2 * float64(segments)))
		m := modes.Mode{Mode: n, WavelengthUm: 2 * length / float64(n), MeanAmplitude: mean, Variance: variance,
			NoiseVariance: 4 * noiseNm * noiseNm * 1e-6 / length * (1 + float64(segments-1)*sin*sin), RelaxationS: relax(n)}
		alpha := exposureS / m.RelaxationS
		m.BlurFactor = 2 * (alpha - 1 + math.Exp(-alpha)) / (alpha * alpha)
		m.ThermalVariance = (m.Variance - m.NoiseVariance) // the invented shapes are instantaneous
		phi := math.Exp(-intervalS / m.RelaxationS)
		m.Shapes = math.Max(1.5, frames*(1-phi*phi)/(1+phi*phi))
		switch {
		case m.ThermalVariance < m.NoiseVariance:
			m.Reason = "noise"
		case m.BlurFactor < 0.4:
			m.Reason = "blur"
		default:
			m.Used = true
			dof += m.Shapes
			weighted += m.Shapes * q * q * m.ThermalVariance
		}
		if m.ThermalVariance <= 0 {
			m.ThermalVariance, m.LpUm, m.LpLowUm, m.LpHighUm = math.NaN(), math.NaN(), math.NaN(), math.Inf(1)
		} else {
			m.LpUm = 1 / (q * q * m.ThermalVariance)
			m.LpLowUm, m.LpHighUm = interval(m.LpUm, m.Shapes)
		}
		if m.Used && f.Shapes == 0 {
			f.Shapes = m.Shapes
		}
		f.Modes = append(f.Modes, m)
	}
	f.LpUm = dof / weighted
	f.LpLowUm, f.LpHighUm = interval(f.LpUm, dof)
	f.LpFrom, f.Thermal, f.Confinement = "likelihood", "yes", "free"
	if f.Shapes < 20 {
		f.Flags = append(f.Flags, "few_shapes")
	}
	var sx, sy, sxx, sxy, k float64
	for lag := 2; lag < segments; lag++ {
		s, ok := lags[lag]
		if !ok {
			continue
		}
		cos := s.sum / float64(s.pairs)
		step := length / float64(segments)
		x := float64(lag) * step
		se := (1 - cos) * math.Sqrt(2/math.Max(4, dof/float64(lag)))
		used := x < length/2
		f.Tangent = append(f.Tangent, modes.Separation{SeparationUm: x, CosMean: cos, CosLow: cos - 1.96*se, CosHigh: math.Min(1, cos+1.96*se), Pairs: s.pairs, Used: used})
		if used {
			y := -math.Log(cos)
			sx, sy, sxx, sxy, k = sx+x, sy+y, sxx+x*x, sxy+x*y, k+1
		}
	}
	slope := (k*sxy - sx*sy) / (k*sxx - sx*sx)
	f.TangentFitLpUm, f.TangentFitIntercept = 1/(2*slope), (sy-slope*sx)/k
	low, high := interval(f.TangentFitLpUm, dof/2)
	mLow, mHigh := interval(f.LpUm*1.02, dof*0.9)
	rigidity := f.LpUm * 1e-6 * kT
	f.Estimates = []modes.Estimate{
		{Quantity: "lp_um", Method: "likelihood", Value: f.LpUm, Low: f.LpLowUm, High: f.LpHighUm},
		{Quantity: "lp_um", Method: "modes", Value: f.LpUm * 1.02, Low: mLow, High: mHigh},
		{Quantity: "lp_um", Method: "tangent", Value: f.TangentFitLpUm, Low: low, High: high},
		{Quantity: "lp_um", Method: "distance", Value: f.LpUm * 0.9, Low: f.LpUm * 0.5, High: math.Inf(1), Note: "length error dominates"},
		{Quantity: "bending_rigidity_N_m2", Method: "likelihood", Value: rigidity, Low: f.LpLowUm * 1e-6 * kT, High: f.LpHighUm * 1e-6 * kT},
		{Quantity: "drag_Pa_s", Method: "likelihood", Value: dragPaS, Low: dragPaS * 0.82, High: dragPaS * 1.21},
		{Quantity: "slowest_s", Method: "likelihood", Value: relax(1), Low: relax(1) * 0.8, High: relax(1) * 1.3},
	}
}

// interval is the 95 % interval of 1/variance with so many degrees of freedom.
func interval(v, dof float64) (low, high float64) {
	chi := distuv.ChiSquared{K: dof}
	return v * chi.Quantile(0.025) / dof, v * chi.Quantile(0.975) / dof
}

func bound(f *job.Filament) {
	f.LpUm, f.LpHighUm, f.LpFrom = math.NaN(), math.Inf(1), "bound"
	f.Flags = append([]string{"lower_bound"}, f.Flags...)
	f.Estimates[0].Value, f.Estimates[0].High = math.NaN(), math.Inf(1)
}

func refuse(f *job.Filament) {
	f.LpUm, f.LpLowUm, f.LpHighUm, f.LpFrom = math.NaN(), math.NaN(), math.NaN(), ""
	f.Thermal, f.Confinement, f.Flags = "no", "pinned", []string{"pinned", "changing"}
}

// picture renders the filaments of the picture's frame as Gaussian lines with Poisson-like noise.
func picture(rng *rand.Rand, r *job.Result, side int) imaging.Frame {
	p := imaging.NewFrame(side, side)
	photons := make([]float64, side*side)
	for i := range photons {
		photons[i] = 8
	}
	for _, f := range r.Filaments {
		for _, c := range f.Contours {
			if c.Frame != r.PictureFrame {
				continue
			}
			for _, q := range c.Points {
				px, py := q.XUm/pixelUm, q.YUm/pixelUm
				s := psfUm / pixelUm
				for y := int(py) - 5; y <= int(py)+6; y++ {
					for x := int(px) - 5; x <= int(px)+6; x++ {
						if x < 0 || y < 0 || x >= side || y >= side {
							continue
						}
						d2 := (float64(x)-px)*(float64(x)-px) + (float64(y)-py)*(float64(y)-py)
						photons[y*side+x] += 600 * stepUm / (2 * math.Pi * s * s) * math.Exp(-d2/(2*s*s))
					}
				}
			}
		}
	}
	for i, m := range photons {
		p.Pix[i] = float32(math.Max(0, math.Round(100+2.1*m+2.1*math.Sqrt(m+1.5)*rng.NormFloat64())))
	}
	return p
}
