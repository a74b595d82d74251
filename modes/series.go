package modes

// Curve is a filament's centreline in one frame: points along it in µm, from the same end in
// every frame, in order, roughly equally spaced (0.05 to 0.2 µm).
type Curve struct {
	XUm, YUm []float64
}

// Series is what the contours of one filament say: one entry per used frame, in order of time.
type Series struct {
	// TimesS is the time of each frame, s, ascending; gaps are allowed.
	TimesS []float64
	Curves []Curve
	// NoiseUm3 is the noise density P of each frame's centreline, µm³: a beam mode of
	// wavenumber q carries the error variance P·exp((q·PSFUm)²).
	NoiseUm3 []float64
	// MotionNoise is the share of the undulation that an exposure averages away which the curves show
	// again as noise, because the line was smeared: a property of how they were traced. 0: none.
	MotionNoise float64
	// PSFUm is the standard deviation of the line's profile, µm.
	PSFUm float64
	// LengthUm is the contour length, one for all frames: that of the curves without what noise adds to them.
	LengthUm float64
	// LengthSDUm is the scatter of the measured lengths over frames, and LengthSEUm the
	// standard error predicted for one frame's.
	LengthSDUm, LengthSEUm float64
	// IntervalS is the nominal frame interval and ExposureS the exposure of a frame, s.
	IntervalS, ExposureS float64
	// TemperatureK is the sample's temperature, K.
	TemperatureK float64
	// ChamberUm is the depth of the chamber, µm; 0 where it is not known.
	ChamberUm float64
	// RadiusUm is the filament's radius, µm, ViscosityPaS the medium's viscosity, Pa·s, and HeightUm the height of the filament's axis over a wall, µm; 0
	// where they are not known.
	RadiusUm, ViscosityPaS, HeightUm float64
	// KnownLpUm is a persistence length known from free filaments, µm, with its 95 % interval; 0 where there is none.
	KnownLpUm, KnownLpLowUm, KnownLpHighUm float64
	// ActinMgPerMl is the concentration of the actin network around the filament, mg/mL, MeshPrefactor and MeshFiniteTerm the numbers to use in the relation between
	// tube and mesh, see [MeshOptions]; 0 where nothing is given.
	ActinMgPerMl, MeshPrefactor, MeshFiniteTerm float64
	// Processed says that the images were denoised, resampled or compressed with loss, so that NoiseUm3 is not to be trusted.
	Processed bool
	// Frames is how many frames the filament was followed through, used or not; 0 where that is not known.
	Frames int
	// FreeEnds says whether both ends were seen.
	FreeEnds bool
}
