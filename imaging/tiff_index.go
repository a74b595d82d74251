package imaging

import (
	"errors"
	"fmt"
	"slices"
)

// index lists where the directories of a stack's planes are: eight bytes a page.
type index struct {
	dirs    []int64 // offsets of the directories of the planes
	skipped []int   // places in the chain, from 0, of thumbnails and masks
	first   page    // the first plane's, with its own tables
	shape   shape
	broken  error // what ended the chain early, nil if it was whole
}

// shape is what all planes of a stack must agree in.
type shape struct {
	width, height, bits, sampleFormat int
}

func (p *page) shape() shape { return shape{p.width, p.height, p.bits, p.sampleFormat} }

// pageNumber turns the place of a plane into its place in the chain, counted from 1.
func (x *index) pageNumber(plane int) int {
	for _, s := range x.skipped {
		if s > plane {
			break
		}
		plane++
	}
	return plane + 1
}

// planeOf turns a place in the chain (from 0) into that of a plane; −1 if it is none.
func (x *index) planeOf(chain int) int {
	less, found := slices.BinarySearch(x.skipped, chain)
	if found {
		return -1
	}
	if chain -= less; chain < len(x.dirs) {
		return chain
	}
	return -1
}

// readIndex walks the chain of directories. Each page is checked to lie within the file. It
// stops at the first page that is wrong and returns that error with what came before.
func readIndex(path string, r *pageReader) (*index, error) {
	x := &index{}
	var seen map[int64]int // offsets and places, built once one comes that is not behind all before
	var all []int64        // the same with skipped pages, while there are any
	highest := int64(-1)
	off, chain := r.src.first, 0
	fail := func(err error) (*index, error) { return x, x.fail(path, chain, err) }
	if off == 0 {
		return fail(damaged("the header names no directory"))
	}
	for ; off != 0; chain++ {
		if chain >= maxPages {
			return fail(unsupported("more than %d pages", maxPages))
		}
		if off <= highest {
			if seen == nil {
				seen = make(map[int64]int)
				for i, o := range all {
					seen[o] = i
				}
			}
			if at, ok := seen[off]; ok {
				return fail(damaged("its directory at byte %d is that of page %d again: the chain of pages is a loop", off, at+1))
			}
		}
		highest = max(highest, off)
		if seen != nil {
			seen[off] = chain
		}
		if err := r.read(off); err != nil {
			return fail(err)
		}
		p := &r.page
		all = append(all, off)
		if p.reduced {
			x.skipped = append(x.skipped, chain)
		} else {
			if len(x.dirs) == 0 {
				x.first = *p
				x.first.offsets, x.first.counts = nil, nil
				x.shape = p.shape()
			} else if err := x.agree(p); err != nil {
				return fail(err)
			}
			x.dirs = append(x.dirs, off)
		}
		off = p.next
	}
	if len(x.dirs) == 0 {
		return x, fmt.Errorf("imaging: %s: %d pages, all of them thumbnails or masks, want a stack", path, chain)
	}
	return x, nil
}

// agree says how a page differs from the first in what a stack must keep.
func (x *index) agree(p *page) error {
	a, b := x.shape, p.shape()
	if a.width != b.width || a.height != b.height {
		return unsupported("%d x %d pixels, want %d x %d as on page %d", b.width, b.height, a.width, a.height, x.pageNumber(0))
	}
	if a != b {
		return unsupported("%s, want %s as on page %d", p.kind(), x.first.kind(), x.pageNumber(0))
	}
	return nil
}

// fail completes the error of the page at place chain (from 0).
func (x *index) fail(path string, chain int, err error) error {
	if n := len(x.dirs); n > 0 && errors.Is(err, ErrDamaged) {
		before := fmt.Sprintf("the %d pages before it are intact", n)
		if n == 1 {
			before = "the page before it is intact"
		}
		err = fmt.Errorf("%w; %s (--readable-frames analyses what is intact)", err, before)
	}
	return atPage(path, chain+1, err)
}
