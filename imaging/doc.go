// Package imaging answers what a movie file holds, frame by frame, and how far its own
// account of scale and time can be trusted.
//
// Start with [Open], which reads the directory of a TIFF stack, and [Stack.ReadFrame], which
// decodes one plane into a [Frame]. [Stack.Info] says what was found: axes, pixel type, the
// calibration with its source, and warnings in plain sentences. [CreateStack] writes a stack.
//
// Units: pixel values are camera counts; lengths are micrometres and times seconds. Image
// coordinates have their origin at the centre of the top-left pixel, x to the right, y down.
//
// Formats: TIFF 6.0 (Adobe, 1992) and BigTIFF, little and big endian, strips and tiles, 8- and
// 16-bit unsigned and 32-bit float grey, uncompressed, LZW, Deflate, PackBits and Zstandard
// with predictors 1 to 3. Axes and calibration come from OME-XML in the first page, otherwise
// from the resolution tags. Everything else is refused with one error that says what was found.
//
// Limits: memory does not depend on the number of pages beyond eight bytes for each; a page is
// decoded whole. Files are taken as hostile: each offset and count is held against the file's
// size before memory is taken for it.
package imaging
