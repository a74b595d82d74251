package imaging

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// omeImage is what the first image of an OME-XML block says, still in the file's own words.
// Source of the names and defaults: OME schema 2016-06, openmicroscopy.org/Schemas.
type omeImage struct {
	images                 int
	sizeX, sizeY           int
	sizeZ, sizeC, sizeT    int
	order, pixelType       string
	significantBits        int
	physX, physXUnit       string
	physY, physYUnit       string
	increment, incrUnit    string
	channels               []string
	samplesPerChannel      int
	tiffData               []omeTiffData
	planes                 []omePlane
	fileNames              map[string]bool
	binaryOnly             string // the file that holds the metadata instead
	hasPhysX, hasIncrement bool
}

// omeTiffData maps planes to pages; −1 stands for an attribute that is not given.
type omeTiffData struct {
	ifd, planeCount        int
	firstC, firstZ, firstT int
}

// omePlane is what is known of one plane; the times are text with units still.
type omePlane struct {
	c, z, t              int
	deltaT, deltaTUnit   string
	exposure, exposeUnit string
}

// maxAxis bounds the sizes that a description may claim before they are multiplied.
const maxAxis = 1 << 30

// isOME tells whether an image description is meant as OME-XML.
func isOME(text string) bool {
	t := strings.TrimLeft(text, "\ufeff \t\r\n")
	return strings.HasPrefix(t, "<") && (strings.Contains(t, "<OME") || strings.Contains(t, ":OME"))
}

// cleanText cuts an ASCII field at its NUL and reads bytes that are not UTF-8 as Latin-1, in
// which many programs write the µ.
func cleanText(b []byte) string {
	if i := bytes.IndexByte(b, 0); i >= 0 {
		b = b[:i]
	}
	if utf8.Valid(b) {
		return string(b)
	}
	r := make([]rune, 0, len(b))
	for len(b) > 0 {
		c, n := utf8.DecodeRune(b)
		if c == utf8.RuneError && n == 1 {
			c = rune(b[0])
		}
		r, b = append(r, c), b[n:]
	}
	return string(r)
}

// parseOME reads the first Image of an OME-XML block token by token, so that the thousands
// of planes of a long movie are not held as a tree.
func parseOME(text string) (*omeImage, error) {
	d := xml.NewDecoder(strings.NewReader(text))
	d.CharsetReader = func(_ string, in io.Reader) (io.Reader, error) { return in, nil }
	o := &omeImage{sizeX: -1, sizeY: -1, sizeZ: -1, sizeC: -1, sizeT: -1, fileNames: map[string]bool{}}
	pixels := 0
	for {
		t, err := d.Token()
		if err == io.EOF {
			break
		}
		if err != nil {
			return nil, err
		}
		e, ok := t.(xml.StartElement)
		if !ok {
			continue
		}
		a := attributes(e)
		switch e.Name.Local {
		case "BinaryOnly":
			o.binaryOnly = a["MetadataFile"]
			if o.binaryOnly == "" {
				o.binaryOnly = "not named"
			}
		case "Image":
			o.images++
		case "Pixels":
			if pixels++; pixels == 1 {
				if err := o.pixels(a); err != nil {
					return nil, err
				}
			}
		}
		if pixels != 1 {
			continue
		}
		switch e.Name.Local {
		case "Channel":
			o.channels = append(o.channels, a["Name"])
			if n, err := number(a, "SamplesPerPixel", 1); err == nil && n > 1 {
				o.samplesPerChannel = n
			}
		case "TiffData":
			if err := o.addTiffData(a); err != nil {
				return nil, err
			}
		case "UUID":
			if f := a["FileName"]; f != "" {
				o.fileNames[f] = true
			}
		case "Plane":
			if err := o.addPlane(a); err != nil {
				return nil, err
			}
		}
	}
	if o.binaryOnly == "" && pixels == 0 {
		return nil, errors.New("no Pixels element")
	}
	return o, nil
}

func attributes(e xml.StartElement) map[string]string {
	a := make(map[string]string, len(e.Attr))
	for _, x := range e.Attr {
		a[x.Name.Local] = x.Value
	}
	return a
}

// number reads a count; missing stands for an attribute that is not there.
func number(a map[string]string, name string, missing int) (int, error) {
	s, ok := a[name]
	if !ok {
		return missing, nil
	}
	v, err := strconv.Atoi(strings.TrimSpace(s))
	if err != nil || v < 0 || v > maxAxis {
		return 0, fmt.Errorf("%s is %q, want a whole number", name, clip(s))
	}
	return v, nil
}

func (o *omeImage) pixels(a map[string]string) error {
	for _, f := range []struct {
		name string
		dst  *int
	}{{"SizeX", &o.sizeX}, {"SizeY", &o.sizeY}, {"SizeZ", &o.sizeZ}, {"SizeC", &o.sizeC}, {"SizeT", &o.sizeT}} {
		v, err := number(a, f.name, 1)
		if err != nil {
			return err
		}
		if v < 1 {
			return fmt.Errorf("%s is %d, want at least 1", f.name, v)
		}
		*f.dst = v
	}
	o.order = strings.TrimSpace(a["DimensionOrder"])
	switch o.order {
	case "":
		o.order = "XYCZT"
	case "XYCZT", "XYCTZ", "XYZCT", "XYZTC", "XYTCZ", "XYTZC":
	default:
		return fmt.Errorf("DimensionOrder is %q, want XY and then C, Z and T in some order", clip(o.order))
	}
	o.pixelType = a["Type"]
	o.significantBits, _ = number(a, "SignificantBits", 0)
	o.physX, o.hasPhysX = a["PhysicalSizeX"]
	o.physXUnit, o.physY, o.physYUnit = a["PhysicalSizeXUnit"], a["PhysicalSizeY"], a["PhysicalSizeYUnit"]
	o.increment, o.hasIncrement = a["TimeIncrement"]
	o.incrUnit = a["TimeIncrementUnit"]
	return nil
}

func (o *omeImage) addTiffData(a map[string]string) error {
	var t omeTiffData
	for _, f := range []struct {
		name    string
		missing int
		dst     *int
	}{{"IFD", -1, &t.ifd}, {"PlaneCount", -1, &t.planeCount}, {"FirstC", 0, &t.firstC}, {"FirstZ", 0, &t.firstZ}, {"FirstT", 0, &t.firstT}} {
		v, err := number(a, f.name, f.missing)
		if err != nil {
			return fmt.Errorf("TiffData %w", err)
		}
		*f.dst = v
	}
	o.tiffData = append(o.tiffData, t)
	return nil
}

func (o *omeImage) addPlane(a map[string]string) error {
	p := omePlane{deltaT: a["DeltaT"], deltaTUnit: a["DeltaTUnit"], exposure: a["ExposureTime"], exposeUnit: a["ExposureTimeUnit"]}
	if p.deltaT == "" && p.exposure == "" {
		return nil
	}
	for _, f := range []struct {
		name string
		dst  *int
	}{{"TheC", &p.c}, {"TheZ", &p.z}, {"TheT", &p.t}} {
		v, err := number(a, f.name, 0)
		if err != nil {
			return fmt.Errorf("in Plane: %w", err)
		}
		*f.dst = v
	}
	o.planes = append(o.planes, p)
	return nil
}

// pixelUm returns the pixel size, NaN where it is not given or cannot be used.
func (o *omeImage) pixelUm() (Measured, []string) {
	none := Measured{Value: math.NaN()}
	if !o.hasPhysX {
		return none, nil
	}
	x, err := quantity("OME-XML PhysicalSizeX", o.physX, o.physXUnit, umPer, "\u00b5m")
	if err != nil {
		return none, []string{err.Error() + "; it was not used"}
	}
	if !(x > 0) || x > maxPixelUm {
		return none, []string{fmt.Sprintf("OME-XML PhysicalSizeX is %.4g µm, which no microscope's pixel has; it was not used", x)}
	}
	m := Measured{Value: x, Source: "OME-XML PhysicalSizeX"}
	if o.physY == "" {
		return m, nil
	}
	y, err := quantity("OME-XML PhysicalSizeY", o.physY, o.physYUnit, umPer, "\u00b5m")
	if err != nil {
		return m, []string{err.Error() + "; PhysicalSizeX was taken for both"}
	}
	if math.Abs(y/x-1) > 0.01 || !(y > 0) {
		return m, []string{fmt.Sprintf("pixels are not square: %.4g µm wide and %.4g µm high; the width was taken for both", x, y)}
	}
	return m, nil
}
