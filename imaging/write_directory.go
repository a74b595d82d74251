package imaging

import (
	"encoding/binary"
	"encoding/xml"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// field is an entry of a directory to be written: its values already as bytes.
type field struct {
	tag, typ uint16
	count    int
	value    []byte
}

func shortField(tag uint16, v int) field {
	return field{tag, 3, 1, binary.LittleEndian.AppendUint16(nil, uint16(v))}
}

func longField(tag uint16, v int) field {
	return field{tag, 4, 1, binary.LittleEndian.AppendUint32(nil, uint32(v))}
}

func textField(tag uint16, s string) field {
	return field{tag, 2, len(s) + 1, append([]byte(s), 0)}
}

// ratioField writes v to as many digits as 32 bits allow.
func ratioField(tag uint16, v float64) field {
	den := 1.0
	for den < 1e9 && v*den*10 <= math.MaxUint32 {
		den *= 10
	}
	b := binary.LittleEndian.AppendUint32(nil, uint32(math.Round(v*den)))
	return field{tag, 5, 1, binary.LittleEndian.AppendUint32(b, uint32(den))}
}

// directory returns the directory of the next plane, with the values that do not fit in its
// entries behind it, for pixels of dataBytes that follow at once.
func (w *StackWriter) directory(dataBytes int, last bool) []byte {
	m := &w.meta
	compression, format := compressionDeflate, formatUint
	if m.Uncompressed {
		compression = compressionNone
	}
	if m.PixelType == "float32" {
		format = formatFloat
	}
	fields := []field{
		longField(tagImageWidth, m.Width), longField(tagImageLength, m.Height),
		shortField(tagBitsPerSample, 8*m.bytesPerPixel()), shortField(tagCompression, compression),
		shortField(tagPhotometric, photometricMinIsBlack),
	}
	if w.planes == 0 {
		fields = append(fields, textField(tagDescription, w.xml))
	}
	offsetAt := len(fields)
	fields = append(fields, w.offsetField(0), shortField(tagSamplesPerPixel, 1),
		longField(tagRowsPerStrip, m.Height), longField(tagStripByteCounts, dataBytes))
	if perCm := 1e4 / m.PixelUm; m.PixelUm > 0 && perCm >= 1e-3 && perCm <= math.MaxUint32 {
		fields = append(fields, ratioField(tagXResolution, perCm), ratioField(tagYResolution, perCm), shortField(tagResolutionUnit, 3))
	}
	if w.planes == 0 {
		fields = append(fields, textField(tagSoftware, "wend"))
	}
	if m.predictor() != 1 {
		fields = append(fields, shortField(tagPredictor, m.predictor()))
	}
	fields = append(fields, shortField(tagSampleFormat, format))

	// The layout is known before the values: entries, link, long values, pixels.
	inline, head := 4, 2+12*len(fields)+4
	if w.big {
		inline, head = 8, 8+20*len(fields)+8
	}
	longs := 0
	for _, f := range fields {
		if len(f.value) > inline {
			longs += (len(f.value) + 1) &^ 1
		}
	}
	dataAt := w.pos + int64(head+longs)
	fields[offsetAt] = w.offsetField(dataAt)
	next := (dataAt + int64(dataBytes) + 7) &^ 7
	if last {
		next = 0
	}
	b := make([]byte, 0, head+longs)
	if w.big {
		b = binary.LittleEndian.AppendUint64(b, uint64(len(fields)))
	} else {
		b = binary.LittleEndian.AppendUint16(b, uint16(len(fields)))
	}
	var tail []byte
	for _, f := range fields {
		b = binary.LittleEndian.AppendUint16(b, f.tag)
		b = binary.LittleEndian.AppendUint16(b, f.typ)
		b = w.appendOffset(b, int64(f.count))
		if len(f.value) > inline {
			b = w.appendOffset(b, w.pos+int64(head+len(tail)))
			tail = append(tail, f.value...)
			if len(tail)%2 == 1 {
				tail = append(tail, 0)
			}
			continue
		}
		b = append(b, f.value...)
		b = append(b, make([]byte, inline-len(f.value))...)
	}
	b = w.appendOffset(b, next)
	return append(b, tail...)
}

func (w *StackWriter) offsetField(at int64) field {
	if w.big {
		return field{tagStripOffsets, 16, 1, binary.LittleEndian.AppendUint64(nil, uint64(at))}
	}
	return longField(tagStripOffsets, int(at))
}

func (w *StackWriter) appendOffset(b []byte, v int64) []byte {
	if w.big {
		return binary.LittleEndian.AppendUint64(b, uint64(v))
	}
	return binary.LittleEndian.AppendUint32(b, uint32(v))
}

// omeXML describes the stack in the terms of the OME schema 2016-06. Lengths are in µm and
// times in s, the schema's defaults, so that the text is plain ASCII but for channel names.
func omeXML(m StackMeta) string {
	var b strings.Builder
	b.WriteString(`<?xml version="1.0" encoding="UTF-8"?>` + "\n")
	b.WriteString(`<OME xmlns="http://www.openmicroscopy.org/Schemas/OME/2016-06" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"` +
		` xsi:schemaLocation="http://www.openmicroscopy.org/Schemas/OME/2016-06 http://www.openmicroscopy.org/Schemas/OME/2016-06/ome.xsd" Creator="wend">` + "\n")
	b.WriteString(`<Image ID="Image:0"><Pixels ID="Pixels:0" DimensionOrder="XYCZT" Type="` + omeType(m.PixelType) + `"`)
	fmt.Fprintf(&b, ` SizeX="%d" SizeY="%d" SizeZ="1" SizeC="%d" SizeT="%d"`, m.Width, m.Height, m.Channels, m.Frames)
	number := func(name string, v float64) {
		if v > 0 && !math.IsInf(v, 0) {
			b.WriteString(" " + name + `="` + strconv.FormatFloat(v, 'g', -1, 64) + `"`)
		}
	}
	number("PhysicalSizeX", m.PixelUm)
	number("PhysicalSizeY", m.PixelUm)
	number("TimeIncrement", m.IntervalS)
	b.WriteString(">\n")
	for c := range m.Channels {
		fmt.Fprintf(&b, `<Channel ID="Channel:0:%d"`, c)
		if c < len(m.ChannelNames) && m.ChannelNames[c] != "" {
			b.WriteString(` Name="`)
			xml.EscapeText(&b, []byte(m.ChannelNames[c]))
			b.WriteString(`"`)
		}
		b.WriteString(` SamplesPerPixel="1"/>` + "\n")
	}
	b.WriteString("<TiffData/>\n")
	if m.ExposureS > 0 || m.TimesS != nil {
		for t := range m.Frames {
			for c := range m.Channels {
				fmt.Fprintf(&b, `<Plane TheZ="0" TheT="%d" TheC="%d"`, t, c)
				if m.TimesS != nil {
					b.WriteString(` DeltaT="` + strconv.FormatFloat(m.TimesS[t], 'g', -1, 64) + `"`)
				}
				number("ExposureTime", m.ExposureS)
				b.WriteString("/>\n")
			}
		}
	}
	b.WriteString("</Pixels></Image>\n</OME>")
	return b.String()
}

// omeType is the name that the OME schema has for a pixel type.
func omeType(t string) string {
	if t == "float32" {
		return "float"
	}
	return t
}
