package imaging

import "fmt"

// Values of the tags that decide whether a page is read.
const (
	compressionNone       = 1
	compressionLZW        = 5
	compressionDeflate    = 8
	compressionPackBits   = 32773
	compressionDeflateOld = 32946
	compressionZstd       = 50000

	photometricMinIsWhite = 0
	photometricMinIsBlack = 1

	formatUint  = 1
	formatFloat = 3
)

const wantedKind = "want 8- or 16-bit unsigned or 32-bit float grey"

// pixelBytes is the size of one stored pixel.
func (p *page) pixelBytes() int { return p.bits / 8 }

// pixelType is the name of the pixel type as OME spells it.
func (p *page) pixelType() string {
	switch {
	case p.sampleFormat == formatFloat:
		return "float32"
	case p.bits == 8:
		return "uint8"
	}
	return "uint16"
}

// kind says in a few words what the pixels of a page are.
func (p *page) kind() string {
	number := ""
	switch p.sampleFormat {
	case formatUint, 4:
		if p.samples == 1 && (p.photometric == photometricMinIsBlack || p.photometric == photometricMinIsWhite) {
			number = "unsigned "
		}
	case 2:
		number = "signed "
	case formatFloat:
		number = "float "
	case 5, 6:
		number = "complex "
	default:
		number = fmt.Sprintf("sample format %d ", p.sampleFormat)
	}
	colour := "grey"
	switch p.photometric {
	case photometricMinIsWhite, photometricMinIsBlack:
		if p.samples > 1 {
			colour = fmt.Sprintf("grey with %d samples per pixel", p.samples)
		}
	case 2:
		colour = "RGB"
		if p.samples > 3 {
			colour = fmt.Sprintf("RGB with %d samples per pixel", p.samples)
		}
	case 3:
		colour = "palette colour"
	case 4:
		colour = "transparency mask"
	case 5:
		colour = "CMYK"
	case 6:
		colour = "YCbCr colour"
	case 8, 9, 10:
		colour = "CIELab colour"
	case -1:
		colour = "pixels without a photometric tag"
	default:
		colour = fmt.Sprintf("photometric kind %d", p.photometric)
	}
	bits := fmt.Sprintf("%d-bit ", p.bits)
	if p.bits < 0 {
		bits = "mixed-depth "
	}
	return bits + number + colour
}

// compressionWords names a compression; ok says whether it is read.
func compressionWords(c int) (words string, ok bool) {
	switch c {
	case compressionNone:
		return "none", true
	case compressionLZW:
		return "LZW", true
	case compressionDeflate, compressionDeflateOld:
		return "Deflate", true
	case compressionPackBits:
		return "PackBits", true
	case compressionZstd:
		return "Zstandard", true
	case 2, 3, 4, 32771:
		return "CCITT fax", false
	case 6, 7, 34892:
		return "JPEG", false
	case 33003, 33005, 34712:
		return "JPEG 2000", false
	case 34887:
		return "LERC", false
	case 34925:
		return "LZMA", false
	case 50001:
		return "WebP", false
	case 50002:
		return "JPEG XL", false
	}
	return fmt.Sprintf("code %d", c), false
}

// usesPredictor tells the compressions that a predictor goes with; for the others libraries
// and the standard pass the tag over.
func (p *page) usesPredictor() bool {
	switch p.compression {
	case compressionLZW, compressionDeflate, compressionDeflateOld, compressionZstd:
		return p.predictor != 1
	}
	return false
}

// supported says why a page is not of a kind that is read, or nil.
func (p *page) supported() error {
	if p.width == 0 || p.height == 0 {
		return damaged("%d x %d pixels, want at least 1 x 1", p.width, p.height)
	}
	grey := p.samples == 1 && (p.photometric == photometricMinIsBlack || p.photometric == photometricMinIsWhite)
	depth := p.sampleFormat == formatUint && (p.bits == 8 || p.bits == 16) || p.sampleFormat == formatFloat && p.bits == 32
	words, known := compressionWords(p.compression)
	if p.samples > 1 && p.planar == 2 {
		return unsupported("%s in separate planes, %s", p.kind(), wantedKind)
	}
	if !grey || !depth {
		return unsupported("%s, %s", p.kind(), wantedKind)
	}
	if !known {
		return unsupported("%s compression, want none, LZW, Deflate, PackBits or Zstandard", words)
	}
	if p.fillOrder != 1 {
		return unsupported("bits in reverse order (FillOrder %d), want FillOrder 1", p.fillOrder)
	}
	if p.photometric == photometricMinIsWhite && p.sampleFormat == formatFloat {
		return unsupported("float grey with zero as white, want zero as black: its values cannot be inverted without a largest one")
	}
	if p.usesPredictor() {
		switch {
		case p.predictor == 2:
		case p.predictor == 3 && p.sampleFormat == formatFloat:
		case p.predictor == 3:
			return unsupported("%s with the floating-point predictor (3), want predictor 1 or 2", p.kind())
		default:
			return unsupported("predictor %d, want 1, 2 or 3", p.predictor)
		}
	}
	return nil
}
