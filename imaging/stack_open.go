package imaging

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"strings"
	"sync"
)

// OpenOptions say what to make of a stack. Its zero value is the careful default.
type OpenOptions struct {
	// ReadableFrames opens a stack that is damaged with the whole frames before the damage;
	// [Stack.Damage] then says what was lost. Otherwise a damaged stack is an error.
	ReadableFrames bool
	// MaxPageBytes is the most bytes of pixels that a page may have; 0 means 1 GiB.
	MaxPageBytes int64
}

// Stack is an open TIFF stack. [Stack.ReadFrame] may be called from many goroutines.
type Stack struct {
	info   Info
	src    source
	index  *index
	axes   axes
	limit  int64
	pool   sync.Pool // of *decoder
	closer io.Closer
}

// Open reads the directories of the TIFF stack at path, all of them, and the metadata of the
// first page; pixels are read by [Stack.ReadFrame]. A stack that is damaged or not of a kind
// that is read gives an error that names the file, the page (from 1), what was found and what
// was wanted; for damage it is [ErrDamaged] under errors.Is. The caller closes the Stack.
func Open(path string, o OpenOptions) (*Stack, error) {
	// Opening a pipe would wait for its other end, so that the kind is looked up before.
	if st, err := os.Stat(path); err == nil && !st.Mode().IsRegular() {
		what := "not a regular file"
		if st.IsDir() {
			what = "a folder"
		}
		return nil, fmt.Errorf("imaging: %s: %s, want a TIFF stack", path, what)
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("imaging: %w", err)
	}
	st, err := f.Stat()
	if err != nil {
		f.Close()
		return nil, fmt.Errorf("imaging: %w", err)
	}
	s, err := openReader(f, st.Size(), path, o)
	if err != nil {
		f.Close()
		return nil, err
	}
	s.closer = f
	return s, nil
}

// openReader is Open on size bytes of anything; path is for messages.
func openReader(r io.ReaderAt, size int64, path string, o OpenOptions) (*Stack, error) {
	src, err := readHeader(r, size)
	if err != nil {
		return nil, fmt.Errorf("imaging: %s: %w", path, err)
	}
	s := &Stack{src: src, limit: o.MaxPageBytes}
	if s.limit <= 0 {
		s.limit = defaultMaxPage
	}
	reader := s.newReader()
	s.index, err = readIndex(path, &reader)
	if err != nil {
		if !o.ReadableFrames || len(s.index.dirs) == 0 || !errors.Is(err, ErrDamaged) {
			return nil, err
		}
		s.index.broken = err
	}
	text, err := description(&reader, s.index.first.description)
	if err != nil {
		return nil, atPage(path, s.index.pageNumber(0), err)
	}
	if err := s.describe(path, text); err != nil {
		return nil, err
	}
	return s, nil
}

func (s *Stack) newReader() pageReader {
	return pageReader{window: window{src: &s.src}, maxPageBytes: s.limit}
}

// description returns the text of an ImageDescription, empty where there is none.
func description(r *pageReader, e entry) (string, error) {
	if e.tag == 0 || e.typ != 2 && e.typ != 1 && e.typ != 7 {
		return "", nil
	}
	b, _, err := r.value(e)
	if err != nil {
		return "", err
	}
	return cleanText(b), nil
}

// describe fills the Info and the axes.
func (s *Stack) describe(path, text string) error {
	p, pages := &s.index.first, len(s.index.dirs)
	none := Measured{Value: math.NaN()}
	s.info = Info{
		Path: path, Width: p.width, Height: p.height,
		Pages: pages, SizeC: 1, SizeZ: 1, SizeT: pages, DimensionOrder: "XYCZT",
		PixelType: p.pixelType(), MaxCount: p.maxCount(),
		Format: "TIFF", ByteOrder: "little endian", Layout: "strips",
		Calibration: Calibration{PixelUm: none, IntervalS: none, ExposureS: none},
	}
	in := &s.info
	if s.src.bigTIFF {
		in.Format = "BigTIFF"
	}
	if s.src.bigEndian {
		in.ByteOrder = "big endian"
	}
	if p.tiled {
		in.Layout = "tiles"
	}
	in.Compression, _ = compressionWords(p.compression)
	if p.usesPredictor() {
		in.Compression += fmt.Sprintf(" with predictor %d", p.predictor)
	}
	if n := len(s.index.skipped); n > 0 {
		in.warn("%d reduced or mask pages were skipped", n)
	}
	if p.photometric == photometricMinIsWhite {
		in.warn("the file stores zero as white: pixels were inverted, %.0f minus the stored value", p.maxCount())
	}
	if s.index.broken != nil {
		in.warn("the stack is damaged: %v", s.index.broken)
	}
	s.axes = axes{channels: 1, frames: pages, frameStep: 1}
	if isOME(text) {
		o, err := parseOME(text)
		if err == nil {
			if err = s.fromOME(path, o); err != nil {
				return err
			}
		} else {
			in.warn("the OME-XML could not be read (%v): %d pages were taken as frames of one channel", err, pages)
		}
	} else if t := strings.TrimSpace(text); t != "" && pages > 1 {
		in.warn("the description of the first page (%q) is not OME-XML: %d pages were taken as frames of one channel", clip(t), pages)
	}
	if in.Calibration.PixelUm.Source == "" {
		m, w := p.resolutionUm()
		in.Calibration.PixelUm = m
		in.Warnings = append(in.Warnings, w...)
	}
	return nil
}

func (in *Info) warn(format string, args ...any) {
	in.Warnings = append(in.Warnings, fmt.Sprintf(format, args...))
}

// fromOME takes axes and calibration over from the OME-XML.
func (s *Stack) fromOME(path string, o *omeImage) error {
	in, p := &s.info, &s.index.first
	if o.binaryOnly != "" {
		return fmt.Errorf("imaging: %s: %w", path,
			unsupported("its OME-XML stands in another file (%s), want it in the file itself", clip(o.binaryOnly)))
	}
	if o.samplesPerChannel > 1 {
		return fmt.Errorf("imaging: %s: %w", path,
			unsupported("OME-XML says %d samples per pixel, want one (grey)", o.samplesPerChannel))
	}
	if o.sizeZ > 1 && o.sizeT > 1 {
		return fmt.Errorf("imaging: %s: %w", path,
			unsupported("%d slices in Z and %d frames in time, want one slice for each frame: save one slice, or a projection along Z, as a stack of its own", o.sizeZ, o.sizeT))
	}
	if o.sizeZ > 1 {
		in.warn("the file calls its %d planes slices in Z of one time; they were taken as frames in time", o.sizeZ)
		o.timeFromZ()
	}
	a, warnings, err := o.axes(path, s.index)
	if err != nil {
		return err
	}
	s.axes = a
	in.Warnings = append(in.Warnings, warnings...)
	in.SizeC, in.SizeZ, in.SizeT, in.DimensionOrder = a.channels, 1, a.frames, o.order
	in.ChannelNames = o.channelNames(a.channels)
	if o.images > 1 {
		in.warn("the file holds %d images; the first was taken", o.images)
	}
	if w := o.otherFile(path); w != "" {
		in.warn("%s", w)
	}
	if o.sizeX != p.width || o.sizeY != p.height {
		in.warn("OME-XML says %d x %d pixels, the pages have %d x %d", o.sizeX, o.sizeY, p.width, p.height)
	}
	if o.pixelType != "" && o.pixelType != in.PixelType && !(o.pixelType == "float" && in.PixelType == "float32") {
		in.warn("OME-XML says pixels of type %s, the pages hold %s", clip(o.pixelType), in.PixelType)
	}
	if b := o.significantBits; b > 0 && b < p.bits {
		in.MaxCount = float64(uint64(1)<<b - 1)
	}
	m, w := o.pixelUm()
	in.Calibration.PixelUm = m
	in.Warnings = append(in.Warnings, w...)
	in.Warnings = append(in.Warnings, o.timing(&in.Calibration, a.frames)...)
	return nil
}

// channelNames returns a name for each channel, nil where the file gives none.
func (o *omeImage) channelNames(n int) []string {
	names := make([]string, n)
	any := false
	for i := range min(n, len(o.channels)) {
		names[i] = o.channels[i]
		any = any || names[i] != ""
	}
	if !any {
		return nil
	}
	return names
}

// Info returns what the stack says about itself. The caller must not alter its slices.
func (s *Stack) Info() Info { return s.info }

// Frames returns the number of frames in time of one channel.
func (s *Stack) Frames() int { return s.axes.frames }

// Damage says what of a damaged stack was lost; nil for a whole one.
func (s *Stack) Damage() error { return s.index.broken }

// ReadFrame decodes the plane of a channel and a frame t, both counted from 0, into dst, whose
// memory it uses again. It may be called by many goroutines at once, each with its own dst.
// A plane whose data are spoilt gives an error that is [ErrDamaged] under errors.Is; dst is
// undefined then. Pixels that the file stores with zero as white come inverted.
func (s *Stack) ReadFrame(channel, t int, dst *Frame) error {
	path := s.info.Path
	if channel < 0 || channel >= s.axes.channels {
		return fmt.Errorf("imaging: %s: no channel %d (from 0), the stack has %d", path, channel, s.axes.channels)
	}
	if t < 0 || t >= s.axes.frames {
		return fmt.Errorf("imaging: %s: no frame %d (from 0), the stack has %d", path, t, s.axes.frames)
	}
	plane := s.axes.page(channel, t)
	d, _ := s.pool.Get().(*decoder)
	if d == nil {
		d = &decoder{pageReader: s.newReader()}
	}
	err := d.read(s.index.dirs[plane])
	if err == nil && d.page.shape() != s.index.shape {
		err = damaged("%s of %d x %d pixels, which it was not when the stack was opened", d.page.kind(), d.page.width, d.page.height)
	}
	if err == nil {
		err = d.decode(dst)
	}
	s.pool.Put(d)
	if err != nil {
		return atPage(path, s.index.pageNumber(plane), err)
	}
	return nil
}

// Close closes the file. No frame may be read during or after it.
func (s *Stack) Close() error {
	for {
		d, _ := s.pool.Get().(*decoder)
		if d == nil {
			break
		}
		d.close()
	}
	if s.closer == nil {
		return nil
	}
	if err := s.closer.Close(); err != nil {
		return fmt.Errorf("imaging: %w", err)
	}
	return nil
}

// HashFile returns the SHA-256 of a file in hexadecimal, read in pieces.
func HashFile(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", fmt.Errorf("imaging: %w", err)
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", fmt.Errorf("imaging: %s: %w", path, err)
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}
