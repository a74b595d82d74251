package imaging

// Frame is one grey image plane. Pix is row-major, Width*Height long, in camera counts.
// Pixel (x, y) is Pix[y*Width+x]; its centre is at x, y in pixels, so that the origin of
// image coordinates is the centre of the top-left pixel, x to the right and y down.
type Frame struct {
	Width, Height int
	Pix           []float32
}

// NewFrame makes a Frame of zeros.
func NewFrame(width, height int) Frame {
	return Frame{Width: width, Height: height, Pix: make([]float32, width*height)}
}

// Resize gives f the shape width by height, reusing its memory where it suffices. The
// pixel values are undefined afterwards.
func (f *Frame) Resize(width, height int) {
	n := width * height
	if cap(f.Pix) < n {
		f.Pix = make([]float32, n)
	}
	f.Width, f.Height, f.Pix = width, height, f.Pix[:n]
}

// At returns the value of pixel (x, y).
func (f Frame) At(x, y int) float32 { return f.Pix[y*f.Width+x] }
