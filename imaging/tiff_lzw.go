package imaging

import "errors"

const (
	lzwClear = 256
	lzwEnd   = 257
	lzwFirst = 258
	lzwCodes = 4096
)

// lzwTable holds, for each code of the running stream, where its string stands in what has
// been decoded so far. A new code's string is the one before it and one byte more, and just
// these bytes follow each other in the output, so that no strings have to be stored.
type lzwTable struct {
	start  [lzwCodes]int32
	length [lzwCodes]int32
}

var (
	errLZWOld  = errors.New("old-style LZW with its bits in reverse order, want LZW as in TIFF 6.0")
	errLZWCode = errors.New("a code that stands for nothing yet")
)

// decode expands src into dst and returns the number of bytes written; a stream that ends
// early leaves it below len(dst) without an error. Codes grow from 9 to 12 bits, one code
// earlier than the alphabet demands. Source: TIFF 6.0 (Adobe, 1992), section 13.
func (t *lzwTable) decode(dst, src []byte) (int, error) {
	if len(src) >= 2 && src[0] == 0 && src[1]&1 == 1 {
		return 0, errLZWOld // the clear code 256, least significant bit first
	}
	var (
		acc   uint64
		nbits uint
		width uint = 9
		next  int  = lzwFirst
		limit int  = 1<<9 - 1
		prev  int  = -1 // start of the previous string, −1 after a clear
		plen  int
		pos   int
		in    int
	)
	for pos < len(dst) {
		for nbits < width {
			if in >= len(src) {
				return pos, nil
			}
			acc = acc<<8 | uint64(src[in])
			in++
			nbits += 8
		}
		nbits -= width
		code := int(acc>>nbits) & (1<<width - 1)
		if code == lzwClear {
			width, next, limit, prev = 9, lzwFirst, 1<<9-1, -1
			continue
		}
		if code == lzwEnd {
			return pos, nil
		}
		// The new code comes first, so that a code may stand for the string being read.
		if prev >= 0 && next < lzwCodes {
			t.start[next] = int32(prev)
			t.length[next] = int32(plen + 1)
			next++
			if next >= limit && width < 12 {
				width++
				limit = 1<<width - 1
			}
		}
		at := pos
		if code < 256 {
			dst[pos] = byte(code)
			pos++
		} else {
			if code >= next {
				return pos, errLZWCode
			}
			from, n := int(t.start[code]), int(t.length[code])
			if n > len(dst)-pos {
				n = len(dst) - pos
			}
			if n > 16 && from+n <= pos {
				copy(dst[pos:pos+n], dst[from:from+n])
			} else {
				// Byte by byte: the string may run into itself by its last byte.
				to, of := dst[pos:pos+n], dst[from:from+n]
				for i := range to {
					to[i] = of[i]
				}
			}
			pos += n
		}
		prev, plen = at, pos-at
	}
	return pos, nil
}
