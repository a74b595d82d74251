package job

import (
	"errors"
	"fmt"

	"wend/imaging"
	"wend/trace"
)

// readableUntil decodes the frames first to last (both included) of src and returns the last one before
// which, itself included, none is spoilt; damage says what is wrong with the next one, nil if nothing is.
// The error is that of a spoilt first frame, or of a file that cannot be read.
func readableUntil(src trace.Source, first, last int) (end int, damage, err error) {
	var frame imaging.Frame
	for t := first; t <= last; t++ {
		if err := src.ReadFrame(t, &frame); err != nil {
			if t == first || !errors.Is(err, imaging.ErrDamaged) {
				return first, nil, err
			}
			return t - 1, err, nil
		}
	}
	return last, nil, nil
}

// hinted adds to an error about a page spoilt inside its data what can be done about it.
func hinted(err error) error {
	if !errors.Is(err, imaging.ErrDamaged) {
		return err
	}
	return fmt.Errorf("%w (--readable-frames analyses the frames before it)", err)
}
