package imaging

// unpackBits expands src into dst and returns the number of bytes written; data that end
// early leave it below len(dst). Source: TIFF 6.0 (Adobe, 1992), section 9.
func unpackBits(dst, src []byte) int {
	pos := 0
	for pos < len(dst) && len(src) >= 2 {
		n := int(int8(src[0]))
		switch {
		case n >= 0:
			m := copy(dst[pos:], src[1:min(n+2, len(src))])
			pos += m
			src = src[min(n+2, len(src)):]
		case n == -128:
			src = src[1:]
		default:
			run := dst[pos:min(pos+1-n, len(dst))]
			for i := range run {
				run[i] = src[1]
			}
			pos += len(run)
			src = src[2:]
		}
	}
	return pos
}
