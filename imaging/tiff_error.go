package imaging

import (
	"errors"
	"fmt"
)

// ErrDamaged marks, under [errors.Is], an error about a file that ends early or contradicts
// itself, as against one that is whole but of a kind that is not read.
var ErrDamaged = errors.New("damaged stack")

// fault is what is wrong with a page, before it is known which page of which file it is.
type fault struct {
	text    string
	damaged bool
	cause   error
}

func (f *fault) Error() string { return f.text }

func (f *fault) Unwrap() error { return f.cause }

func (f *fault) Is(target error) bool { return f.damaged && target == ErrDamaged }

// damaged reports bytes that are missing or contradict each other.
func damaged(format string, args ...any) error {
	return &fault{text: fmt.Sprintf(format, args...), damaged: true}
}

// unsupported reports a sound page of a kind that is not read.
func unsupported(format string, args ...any) error {
	return &fault{text: fmt.Sprintf(format, args...)}
}

// atPage names the file and the page (counted from 1) that err is about.
func atPage(path string, page int, err error) error {
	return fmt.Errorf("imaging: %s page %d: %w", path, page, err)
}
