package trace

// Point is a place on a contour, in µm: SUm along it from the end at s = 0, XUm and YUm in
// image coordinates (origin at the centre of the top-left pixel, y down), SEUm the standard
// error across the line.
type Point struct {
	SUm, XUm, YUm, SEUm float64
}

// End tells how an end of a filament was seen.
type End string

// The states of an end.
const (
	EndFree      End = "free"
	EndBorder    End = "border"
	EndDefocused End = "defocused"
	EndHidden    End = "hidden"
)

// Contour is one filament in one frame. Points run from s = 0, about 0.1 µm apart. A contour
// that was not found has no Points; one that must not be used has a Reason.
type Contour struct {
	Frame int
	// Points may be nil where a whole movie was traced, to save memory: read them by [Contour.Line].
	Points []Point
	packed []packedPoint
	// Reason says why the contour must not be used, empty where it may be.
	Reason Reason
	// LengthUm and its standard error.
	LengthUm, LengthSEUm float64
	// Ends at s = 0 and at s = LengthUm, with the standard error of their position along the line (µm).
	Ends     [2]End
	EndsSEUm [2]float64
	// PhotonsPerUm and BackgroundPerUm2 are photoelectrons of the line per µm and of the
	// background per µm².
	PhotonsPerUm, BackgroundPerUm2 float64
	// SNR is the peak line brightness above background over the background's standard
	// deviation in one pixel.
	SNR float64
	// WidthUm is the standard deviation of the line's profile, pixel excluded.
	WidthUm float64
	// NoiseUm3 is the noise density P of the centreline: a mode of displacement with
	// wavenumber q carries the error variance P·exp(q²w²), in µm² for an amplitude normalised as ∫ψ² = 1
	// times µm, that is µm³. w is the movie's line width with the pixel ([Conditions].WidthPx): a pixel blurs along
	// the line as it does across.
	NoiseUm3 float64
}

// MotionNoise returns the share of the undulation that an exposure averages away which contours are expected to show again
// as noise, for a line of photonsPerUm: a smeared line has no Gaussian profile, and its fit is not exactly its mean. Measured on
// synthetic movies (8 background photons per pixel, exposure 0.03 s, Lp 17 µm): at a drag of 2.4 mPa·s 0.07, 0.04, 0.02 and 0.02 with 300, 600, 1000 and
// 2000 photons per µm; at 12 mPa·s 0.10, 0.04, 0.015 and 0.007. Of soft filaments (3 µm) it is up to five times that. 0.04 where the light is not known.
func MotionNoise(photonsPerUm float64) float64 {
	const share, at, least, most = 0.04, 600, 0.008, 0.1
	if !(photonsPerUm > 0) {
		return share
	}
	return min(max(share*at/photonsPerUm, least), most)
}

// Used reports whether the contour may be used.
func (c Contour) Used() bool { return c.Count() > 1 && c.Reason == "" }

// Filament is one filament followed through the frames First to Last. Contours has an entry
// for every one of these frames, in order, also where the filament was not found.
type Filament struct {
	ID          int
	First, Last int
	Contours    []Contour
}
