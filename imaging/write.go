package imaging

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"

	"github.com/klauspost/compress/zlib"
)

// StackMeta says what a stack to be written holds. Width, Height and Frames are required.
type StackMeta struct {
	Width, Height int
	// Frames is the number of frames in time of each channel.
	Frames int
	// Channels is the number of channels; 0 means 1. Frames are written with the channels of
	// one time one after the other.
	Channels int
	// ChannelNames are optional.
	ChannelNames []string
	// PixelType is uint8, uint16 or float32; empty means uint16.
	PixelType string
	// PixelUm (µm), IntervalS (s) and ExposureS (s) are left out of the file where they are not
	// positive.
	PixelUm, IntervalS, ExposureS float64
	// TimesS holds the time of each frame in s, for a movie whose frames are not evenly spaced;
	// it is Frames long or nil.
	TimesS []float64
	// Uncompressed stores the pixels as they are. Otherwise they are compressed with Deflate,
	// level 1, integers after horizontal differences.
	Uncompressed bool
	// BigTIFF asks for BigTIFF also where the stack fits a classic TIFF (below 4 GiB).
	BigTIFF bool
}

// StackWriter writes a stack frame by frame; it holds one frame at a time.
type StackWriter struct {
	meta    StackMeta
	path    string
	temp    *os.File
	out     *bufio.Writer
	big     bool
	pos     int64 // bytes written
	planes  int   // written so far
	xml     string
	rows    []byte
	packed  bytes.Buffer
	deflate *zlib.Writer
	err     error // first failure, after which nothing is written
}

// CreateStack begins an OME-TIFF stack of m.Frames frames at path, little endian, as BigTIFF
// where it may pass 4 GiB. The file appears under its name, whole, when [StackWriter.Close]
// is called after the last frame; the same frames give the same bytes.
func CreateStack(path string, m StackMeta) (*StackWriter, error) {
	if m.Channels == 0 {
		m.Channels = 1
	}
	if m.PixelType == "" {
		m.PixelType = "uint16"
	}
	if m.Width < 1 || m.Height < 1 || m.Frames < 1 || m.Channels < 1 {
		return nil, fmt.Errorf("imaging: %s: %d frames of %d channels of %d x %d pixels, want at least one of each", path, m.Frames, m.Channels, m.Width, m.Height)
	}
	if m.Frames > maxPages || m.Channels > maxPages || m.Frames*m.Channels > maxPages {
		return nil, fmt.Errorf("imaging: %s: %d frames of %d channels, want at most %d planes", path, m.Frames, m.Channels, maxPages)
	}
	if m.PixelType != "uint8" && m.PixelType != "uint16" && m.PixelType != "float32" {
		return nil, fmt.Errorf("imaging: %s: pixel type %q, want uint8, uint16 or float32", path, m.PixelType)
	}
	page := int64(m.bytesPerPixel())
	if int64(m.Width) > defaultMaxPage/page/int64(m.Height) {
		return nil, fmt.Errorf("imaging: %s: pages of %d x %d pixels, want at most %d bytes for a page", path, m.Width, m.Height, defaultMaxPage)
	}
	if m.TimesS != nil && len(m.TimesS) != m.Frames {
		return nil, fmt.Errorf("imaging: %s: %d times, want one for each of %d frames", path, len(m.TimesS), m.Frames)
	}
	if len(m.ChannelNames) > m.Channels {
		return nil, fmt.Errorf("imaging: %s: %d channel names, want at most %d", path, len(m.ChannelNames), m.Channels)
	}
	w := &StackWriter{meta: m, path: path, xml: omeXML(m)}
	if len(w.xml) >= maxTagBytes {
		return nil, fmt.Errorf("imaging: %s: OME-XML of %d bytes, want less than %d: leave out exposure and times of the planes", path, len(w.xml), maxTagBytes)
	}
	// Deflate adds at most five bytes to each 16 KiB that it cannot compress (RFC 1951).
	page *= int64(m.Width) * int64(m.Height)
	most := (page+page/1000+1024)*int64(m.Frames*m.Channels) + int64(len(w.xml))
	w.big = m.BigTIFF || most > math.MaxUint32
	if !m.Uncompressed {
		z, err := zlib.NewWriterLevel(&w.packed, 1)
		if err != nil {
			return nil, fmt.Errorf("imaging: %w", err)
		}
		w.deflate = z
	}
	f, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".part-*")
	if err != nil {
		return nil, fmt.Errorf("imaging: %w", err)
	}
	w.temp, w.out = f, bufio.NewWriterSize(f, 1<<20)
	if w.big {
		w.write([]byte{'I', 'I', 43, 0, 8, 0, 0, 0, 16, 0, 0, 0, 0, 0, 0, 0})
	} else {
		w.write([]byte{'I', 'I', 42, 0, 8, 0, 0, 0})
	}
	return w, nil
}

func (m *StackMeta) bytesPerPixel() int {
	switch m.PixelType {
	case "uint8":
		return 1
	case "uint16":
		return 2
	}
	return 4
}

// predictor tells whether rows are stored as differences.
func (m *StackMeta) predictor() int {
	if m.Uncompressed || m.PixelType == "float32" {
		return 1
	}
	return 2
}

func (w *StackWriter) write(b []byte) {
	if w.err != nil {
		return
	}
	n, err := w.out.Write(b)
	w.pos += int64(n)
	if err != nil {
		w.err = fmt.Errorf("imaging: %s: %w", w.path, err)
	}
}

// WriteFrame appends the next plane. Integer pixels are rounded to the nearest count and cut
// off at the type's limits, as a camera's converter does; a pixel that is not a number is an
// error. The frame must have the size that was announced. f is left as it was.
func (w *StackWriter) WriteFrame(f Frame) error {
	if w.err != nil {
		return w.err
	}
	if w.temp == nil {
		return fmt.Errorf("imaging: %s: WriteFrame after Close", w.path)
	}
	total := w.meta.Frames * w.meta.Channels
	if w.planes == total {
		return fmt.Errorf("imaging: %s: a plane too many, want %d", w.path, total)
	}
	if f.Width != w.meta.Width || f.Height != w.meta.Height || len(f.Pix) != f.Width*f.Height {
		return fmt.Errorf("imaging: %s plane %d: %d x %d pixels, want %d x %d", w.path, w.planes+1, f.Width, f.Height, w.meta.Width, w.meta.Height)
	}
	for i, v := range f.Pix {
		if v-v != 0 {
			return fmt.Errorf("imaging: %s plane %d: pixel (%d, %d) is %v, want a finite number", w.path, w.planes+1, i%f.Width, i/f.Width, v)
		}
	}
	w.encode(f)
	data := w.rows
	if w.deflate != nil {
		w.packed.Reset()
		w.deflate.Reset(&w.packed)
		if _, err := w.deflate.Write(w.rows); err != nil {
			w.err = fmt.Errorf("imaging: %s: %w", w.path, err)
		} else if err := w.deflate.Close(); err != nil {
			w.err = fmt.Errorf("imaging: %s: %w", w.path, err)
		}
		data = w.packed.Bytes()
	}
	// A directory stands before its pixels, so that its link to the next is known when it is
	// written: the file is made in one pass.
	w.write(w.directory(len(data), w.planes == total-1))
	w.write(data)
	if pad := -w.pos & 7; pad > 0 {
		w.write(make([]byte, pad))
	}
	w.planes++
	return w.err
}

// encode puts the stored form of the pixels, before compression, in w.rows.
func (w *StackWriter) encode(f Frame) {
	w.rows = grow(w.rows, len(f.Pix)*w.meta.bytesPerPixel())
	diff := w.meta.predictor() == 2
	for y := range f.Height {
		row := f.Pix[y*f.Width : (y+1)*f.Width]
		switch w.meta.PixelType {
		case "uint8":
			out := w.rows[y*f.Width:]
			before := uint8(0)
			for x, v := range row {
				c := uint8(count(v, math.MaxUint8))
				out[x] = c - before
				if diff {
					before = c
				}
			}
		case "uint16":
			out := w.rows[2*y*f.Width:]
			before := uint16(0)
			for x, v := range row {
				c := uint16(count(v, math.MaxUint16))
				binary.LittleEndian.PutUint16(out[2*x:], c-before)
				if diff {
					before = c
				}
			}
		default:
			out := w.rows[4*y*f.Width:]
			for x, v := range row {
				binary.LittleEndian.PutUint32(out[4*x:], math.Float32bits(v))
			}
		}
	}
}

// count rounds a pixel to a whole count between 0 and top.
func count(v, top float32) float32 {
	switch {
	case v <= 0:
		return 0
	case v >= top:
		return top
	}
	c := float32(int32(v))
	if v-c >= 0.5 {
		c++
	}
	return c
}

// Close finishes the stack and gives it its name. With fewer planes than announced, or after a
// failure, nothing is left behind and the error says why: so it also ends a stack given up.
func (w *StackWriter) Close() error {
	if w.temp == nil {
		return w.err
	}
	total := w.meta.Frames * w.meta.Channels
	if w.err == nil && w.planes < total {
		w.err = fmt.Errorf("imaging: %s: %d planes written, want %d; the file was not kept", w.path, w.planes, total)
	}
	if w.err == nil {
		w.err = w.finish()
	} else {
		w.temp.Close()
	}
	if w.err != nil {
		w.err = errors.Join(w.err, os.Remove(w.temp.Name()))
	}
	w.temp = nil
	return w.err
}

func (w *StackWriter) finish() error {
	err := w.out.Flush()
	if err == nil {
		err = w.temp.Chmod(0o644)
	}
	err = errors.Join(err, w.temp.Close())
	if err == nil {
		err = os.Rename(w.temp.Name(), w.path)
	}
	if err != nil {
		return fmt.Errorf("imaging: %s: %w", w.path, err)
	}
	return nil
}
