package job

import (
	"wend/imaging"
	"wend/modes"
	"wend/trace"
)

// Settings are the choices for one stack, after flag, sheet and file metadata were weighed.
type Settings struct {
	PixelUm      float64
	IntervalS    float64
	ExposureS    float64
	TemperatureC float64
	Setting      string // free, network or adsorbed
	Channel      int    // from 1
	MinLengthUm  float64
	Sample
	// FirstFrame and LastFrame bound the frames analysed, both included, from 0; LastFrame -1 means to the end.
	FirstFrame, LastFrame int
	Gain, Offset          float64 // NaN: estimated from the stack
	ReadableFrames        bool
	// Sources says for each calibrated value where it came from: "pixel_um" → "flag", "OME-XML", …
	Sources map[string]string
}

// Filament is one filament with what its contours say.
type Filament struct {
	trace.Filament
	modes.Result
	// LengthUm is the median over used frames and LengthSDUm the scatter.
	LengthUm, LengthSDUm float64
	FramesUsed           int
	// Medians over used frames.
	SNR, PhotonsPerUm, BackgroundPerUm2, PSFUm, LocalisationUm float64
	Ends                                                       [2]trace.End
}

// Warning is something the user must read though the numbers stand: a short stable code and a sentence.
type Warning struct {
	Code, Text string
}

// Optics is what a movie resolves, in µm: the standard deviation of a line's profile, pixel and motion
// included, and the shortest wavelength that its contours carry unchanged; and by how much the noise of neighbouring pixels is alike, see [imaging.NoiseCorrelation], NaN where that
// is not known.
type Optics struct {
	LineWidthUm, ResolvedUm, NoiseCorrelation float64
}

// Processed says whether the images are not as the camera took them.
func (o Optics) Processed() bool { return o.NoiseCorrelation > imaging.ProcessedAbove }

// Result is everything that one stack gave.
type Result struct {
	// Name is the folder of the results, StackPath the input as the user gave it, SHA256 its hash in hex.
	Name, StackPath, SHA256 string
	Version                 string
	RidgeImplementation     string
	Settings                Settings
	Info                    imaging.Info
	Camera                  imaging.Camera
	Optics                  Optics
	// TimesS is the time of every frame of the stack that was analysed, by frame number.
	TimesS    []float64
	Filaments []Filament
	Warnings  []Warning
	// Picture is the frame drawn in traced.png, and PictureFrame its number.
	Picture      imaging.Frame
	PictureFrame int
}
