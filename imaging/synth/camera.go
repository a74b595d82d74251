package synth

import (
	"math"
	"math/rand/v2"

	"wend/imaging"
)

// Camera turns photons into counts of 16 bits.
type Camera struct {
	// Gain is counts per photoelectron, above 0.
	Gain float64
	// Offset is the level without light, in counts.
	Offset float64
	// ReadNoiseE is the standard deviation of the read noise, in electrons.
	ReadNoiseE float64
}

// MaxCount is the largest count that the camera stores.
const MaxCount = math.MaxUint16

// Expose writes one noisy exposure to dst, reusing its memory: photons by Poisson's law,
// Gaussian read noise, rounded and cut to 0…MaxCount. Every photon counts as an electron.
func (c Camera) Expose(im *Image, rng *rand.Rand, dst *imaging.Frame) {
	dst.Resize(im.Width, im.Height)
	for i, mean := range im.Pix {
		e := Poisson(mean, rng)
		if c.ReadNoiseE > 0 {
			e += c.ReadNoiseE * rng.NormFloat64()
		}
		dst.Pix[i] = c.count(e)
	}
}

// ExposeNoiseless writes the expected counts to dst, neither noisy nor rounded.
func (c Camera) ExposeNoiseless(im *Image, dst *imaging.Frame) {
	dst.Resize(im.Width, im.Height)
	for i, mean := range im.Pix {
		dst.Pix[i] = float32(c.Offset + c.Gain*mean)
	}
}

func (c Camera) count(electrons float64) float32 {
	return float32(math.Min(MaxCount, math.Max(0, math.Round(c.Offset+c.Gain*electrons))))
}

// Model returns the noise model that describes c, rounding included.
func (c Camera) Model() imaging.Camera {
	read := c.Gain * c.ReadNoiseE
	return imaging.Camera{GainCounts: c.Gain, OffsetCounts: c.Offset, ReadVariance: read*read + 1.0/12, Source: "synthetic camera"}
}

// Poisson draws from Poisson's law of the given mean, 0 for a mean that is not above 0.
// Source: Hörmann, Insurance: Mathematics and Economics 12:39 (1993), algorithm PTRS
// (constants from memory, held by test), for means of 10 and more.
func Poisson(mean float64, rng *rand.Rand) float64 {
	switch {
	case !(mean > 0):
		return 0
	case mean < 10: // search the cumulative distribution
		u, p, k := rng.Float64(), math.Exp(-mean), 0.0
		for u > p && k < 1000 {
			u -= p
			k++
			p *= mean / k
		}
		return k
	}
	b := 0.931 + 2.53*math.Sqrt(mean)
	a := -0.059 + 0.02483*b
	inverseAlpha := 1.1239 + 1.1328/(b-3.4)
	quick := 0.9277 - 3.6224/(b-2)
	logMean := math.Log(mean)
	for {
		u, v := rng.Float64()-0.5, rng.Float64()
		us := 0.5 - math.Abs(u)
		k := math.Floor((2*a/us+b)*u + mean + 0.43)
		if us >= 0.07 && v <= quick {
			return k
		}
		if k < 0 || (us < 0.013 && v > us) {
			continue
		}
		logFactorial, _ := math.Lgamma(k + 1)
		if math.Log(v*inverseAlpha/(a/(us*us)+b)) <= k*logMean-mean-logFactorial {
			return k
		}
	}
}
