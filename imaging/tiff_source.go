package imaging

import (
	"encoding/binary"
	"fmt"
	"io"
)

// source is the open file with what its header says.
type source struct {
	r         io.ReaderAt
	size      int64
	bigEndian bool
	bigTIFF   bool
	first     int64 // offset of the first directory
}

// readHeader reads the 8 bytes of a TIFF header or the 16 of a BigTIFF's.
func readHeader(r io.ReaderAt, size int64) (source, error) {
	s := source{r: r, size: size}
	if size == 0 {
		return s, damaged("an empty file, want a TIFF stack")
	}
	var buf [16]byte
	n := int(min(size, 16))
	if m, err := r.ReadAt(buf[:n], 0); m < n {
		return s, fmt.Errorf("reading the header: %w", err)
	}
	h := buf[:n]
	if n < 8 {
		return s, damaged("%d bytes long, want a TIFF stack", n)
	}
	switch string(h[:2]) {
	case "II":
	case "MM":
		s.bigEndian = true
	default:
		return s, unsupported("not a TIFF: it starts with the bytes % X, want 49 49 (II) or 4D 4D (MM)", h[:4])
	}
	switch v := s.u16(h[2:]); v {
	case 42:
		s.first = int64(s.u32(h[4:]))
	case 43:
		if n < 16 {
			return s, damaged("%d bytes long, want at least the 16 of a BigTIFF header", n)
		}
		if a, b := s.u16(h[4:]), s.u16(h[6:]); a != 8 || b != 0 {
			return s, damaged("BigTIFF header with offset size %d and constant %d, want 8 and 0", a, b)
		}
		s.bigTIFF = true
		off := s.u64(h[8:])
		if off > uint64(size) {
			off = uint64(size)
		}
		s.first = int64(off)
	default:
		return s, unsupported("not a TIFF: version %d, want 42 (TIFF) or 43 (BigTIFF)", v)
	}
	return s, nil
}

func (s *source) u16(b []byte) uint16 {
	if s.bigEndian {
		return binary.BigEndian.Uint16(b)
	}
	return binary.LittleEndian.Uint16(b)
}

func (s *source) u32(b []byte) uint32 {
	if s.bigEndian {
		return binary.BigEndian.Uint32(b)
	}
	return binary.LittleEndian.Uint32(b)
}

func (s *source) u64(b []byte) uint64 {
	if s.bigEndian {
		return binary.BigEndian.Uint64(b)
	}
	return binary.LittleEndian.Uint64(b)
}

// window reads small pieces of the source through one buffer, so that a directory and the
// tables that most writers put beside it cost one read.
type window struct {
	src   *source
	buf   []byte
	off   int64
	n     int
	large []byte
}

const windowBytes = 4096

// bytes returns n bytes at off. They hold until the next call. The caller has checked that
// they lie within the file.
func (w *window) bytes(off int64, n int) ([]byte, error) {
	if n > windowBytes {
		if cap(w.large) < n {
			w.large = make([]byte, n)
		}
		b := w.large[:n]
		if m, err := w.src.r.ReadAt(b, off); m < n {
			return nil, readFailed(off, n, err)
		}
		return b, nil
	}
	if off < w.off || off+int64(n) > w.off+int64(w.n) {
		if w.buf == nil {
			w.buf = make([]byte, windowBytes)
		}
		m, err := w.src.r.ReadAt(w.buf, off)
		w.off, w.n = off, m
		if m < n {
			return nil, readFailed(off, n, err)
		}
	}
	i := int(off - w.off)
	return w.buf[i : i+n], nil
}

// readFailed wraps an error of the file system; a file that shrank is damage.
func readFailed(off int64, n int, err error) error {
	return &fault{
		text:    fmt.Sprintf("reading bytes %d to %d: %v", off, off+int64(n), err),
		damaged: err == io.EOF || err == io.ErrUnexpectedEOF,
		cause:   err,
	}
}
