package imaging

// Measured is a calibrated value with where it came from ("OME-XML PhysicalSizeX", "TIFF
// resolution tags"). Value is NaN and Source empty where the file does not say.
type Measured struct {
	Value  float64
	Source string
}

// Calibration is what a file says about scale and time.
type Calibration struct {
	PixelUm, IntervalS, ExposureS Measured
	// TimesS holds the time of each frame of the first channel, s from the first, where the file
	// gives one for every frame; otherwise nil.
	TimesS []float64
}

// Info is what a stack says about itself.
type Info struct {
	Path          string
	Width, Height int
	// Pages in the file; SizeC channels, SizeZ slices and SizeT frames they stand for. Slices of
	// a single time are taken as frames, so that SizeZ is 1 in an open stack.
	Pages, SizeC, SizeZ, SizeT int
	// DimensionOrder is OME's, "XYCZT" where the file does not say.
	DimensionOrder string
	// ChannelNames has a name, maybe an empty one, for each channel; nil where the file has none.
	ChannelNames []string
	// PixelType is uint8, uint16 or float32; MaxCount is the largest value that the camera
	// could store (NaN for float).
	PixelType string
	MaxCount  float64
	// Format is "TIFF" or "BigTIFF"; ByteOrder "little endian" or "big endian"; Compression
	// and Layout ("strips", "tiles") in words.
	Format, ByteOrder, Compression, Layout string
	Calibration                            Calibration
	// Warnings are plain sentences about what the file left out or contradicts.
	Warnings []string
}
