package imaging

import (
	"fmt"
	"math"
)

// maxPixelUm is the largest pixel that is believed. A fluorescence camera's pixel is below
// 30 µm without any magnification (common practice).
const maxPixelUm = 50

// resolutionUm returns the pixel size that the resolution tags give, NaN where they give
// none: without a unit they hold the ratio of width and height only (TIFF 6.0, section 8),
// and the 72 or 96 dots per inch that programs fill in, pixels of a quarter of a millimetre and
// more, are no calibration.
func (p *page) resolutionUm() (Measured, []string) {
	none := Measured{Value: math.NaN()}
	var unitUm float64
	switch p.resUnit {
	case 2:
		unitUm = 25400
	case 3:
		unitUm = 10000
	default:
		return none, nil
	}
	if math.IsNaN(p.xres) {
		return none, nil
	}
	x := unitUm / p.xres
	perInch := p.xres * 25400 / unitUm
	if x > maxPixelUm {
		return none, []string{fmt.Sprintf("the resolution tags give %.4g dots per inch (pixels of %.4g µm), a screen's or printer's setting and no calibration; they were not used", perInch, x)}
	}
	m := Measured{Value: x, Source: "TIFF resolution tags"}
	if y := unitUm / p.yres; math.Abs(y/x-1) > 0.01 {
		return m, []string{fmt.Sprintf("pixels are not square: %.4g µm wide and %.4g µm high; the width was taken for both", x, y)}
	}
	return m, nil
}
