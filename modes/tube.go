package modes

import "math"

// Tube is what a filament among neighbours says about the tube that they leave it. NaN where a value could not be estimated.
type Tube struct {
	// RmsUm is the bulk rms displacement in one transverse direction about the tube's axis, µm, with its interval: of an infinite filament in a
	// harmonic tube, free of ends, noise, blur and drift.
	RmsUm, RmsLowUm, RmsHighUm float64
	// MeshUm is the mesh size ξ = √(3/ρ) by the relation MeshFrom, µm; the limits are statistical.
	MeshUm, MeshLowUm, MeshHighUm float64
	MeshFrom                      string
	// Places are along the axis, Lags over time.
	Places []TubePlace
	Lags   []Lag
	// Axis is the tube's axis in the image, µm, in equal steps of arc length.
	Axis Curve
	// DriftXUm and DriftYUm are what was taken as drift of the stage in each frame, µm; the axis stands where the first frame has it.
	DriftXUm, DriftYUm []float64
	// DisplacementUm are displacements across the axis of places more than three deflection lengths from the ends, one a µm and frame, with noise.
	DisplacementUm []float64
	// Spectrum are the normal modes of the rod in the tube, the two rigid ones first.
	Spectrum []TubeMode
}

// TubePlace is a place along the axis of a tube: the rms displacement across it, free of noise and blur, with its interval, and the noise, µm.
type TubePlace struct {
	SUm, RmsUm, RmsLowUm, RmsHighUm, NoiseUm float64
}

// Lag is a lag time: the mean-square displacements over it across and along the axis, µm², noise and blur included, from Pairs pairs of frames.
type Lag struct {
	LagS, TransverseMSDUm2, LongitudinalMSDUm2 float64
	Pairs                                      int
}

// TubeMode is a normal mode of a rod with free ends in a tube, its wavenumber in 1/µm, 0 for the two rigid ones. Variances are those of the amplitude, µm³: as
// seen, the noise in it, and what is left free of noise and blur; then what theory gives a free rod (+Inf for the rigid modes) and the confined one.
type TubeMode struct {
	WavenumberPerUm                       float64
	Variance, NoiseVariance, TubeVariance float64
	FreeTheory, TubeTheory                float64
	BlurFactor                            float64
}

// noTube has no value anywhere.
func noTube() Tube {
	nan := math.NaN()
	return Tube{RmsUm: nan, RmsLowUm: nan, RmsHighUm: nan, MeshUm: nan, MeshLowUm: nan, MeshHighUm: nan}
}
