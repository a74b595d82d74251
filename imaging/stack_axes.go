package imaging

import (
	"fmt"
	"path/filepath"
)

// axes say which page holds which channel and frame.
type axes struct {
	channels, frames int
	// pages[t*channels+c] is the page of a plane, where the file maps them itself.
	pages []int32
	// channelStep and frameStep give the page otherwise.
	channelStep, frameStep int
}

func (a *axes) page(channel, t int) int {
	if a.pages != nil {
		return int(a.pages[t*a.channels+channel])
	}
	return channel*a.channelStep + t*a.frameStep
}

// timeFromZ exchanges the roles of Z and T in all that o says.
func (o *omeImage) timeFromZ() {
	o.sizeZ, o.sizeT = o.sizeT, o.sizeZ
	swapped := []byte(o.order)
	for i, b := range swapped {
		switch b {
		case 'Z':
			swapped[i] = 'T'
		case 'T':
			swapped[i] = 'Z'
		}
	}
	o.order = string(swapped)
	for i := range o.planes {
		o.planes[i].z, o.planes[i].t = o.planes[i].t, o.planes[i].z
	}
	for i := range o.tiffData {
		o.tiffData[i].firstZ, o.tiffData[i].firstT = o.tiffData[i].firstT, o.tiffData[i].firstZ
	}
}

// steps returns how far planes that are neighbours in C, Z and T lie apart in the dimension
// order, of which the first letter after XY varies fastest.
func (o *omeImage) steps() (c, z, t int) {
	step := 1
	for _, b := range o.order[2:] {
		switch b {
		case 'C':
			c, step = step, step*o.sizeC
		case 'Z':
			z, step = step, step*o.sizeZ
		default:
			t, step = step, step*o.sizeT
		}
	}
	return c, z, t
}

// axes works out the pages of all planes from what the OME-XML says and from how many pages
// there are. path is for messages only. It is called with one slice (sizeZ = 1).
func (o *omeImage) axes(path string, x *index) (axes, []string, error) {
	pages := len(x.dirs)
	refuse := func(format string, args ...any) (axes, []string, error) {
		return axes{}, nil, fmt.Errorf("imaging: %s: %w", path, unsupported(format, args...))
	}
	if len(o.fileNames) > 1 {
		return refuse("OME-XML says that its planes lie in %d files, want all of them in one", len(o.fileNames))
	}
	if o.sizeC > maxPages || o.sizeT > maxPages || o.sizeC*o.sizeT > maxPages {
		return refuse("OME-XML claims %d channels and %d frames, the file has %d pages", o.sizeC, o.sizeT, pages)
	}
	want := o.sizeC * o.sizeT
	var plane []int32 // page of each plane in dimension order
	if !o.inOrder() {
		var err error
		if plane, err = o.mapped(want, x); err != nil {
			return refuse("%v", err)
		}
		for i, p := range plane {
			if int(p) != i && (p >= 0 || i < pages) {
				return o.mappedAxes(path, x, plane)
			}
		}
	}
	// Page i is plane i.
	a := axes{channels: o.sizeC, frames: o.sizeT}
	a.channelStep, _, a.frameStep = o.steps()
	var warnings []string
	switch {
	case pages == want || pages > want && o.images > 1:
	case x.broken != nil && a.frameStep < o.sizeC:
		return refuse("the %d intact pages end within the %s channel, as the file holds one channel after the other, so no frame is whole",
			pages, ordinal(pages/o.sizeT+1))
	case a.frameStep == o.sizeC && pages >= o.sizeC && (pages%o.sizeC == 0 || x.broken != nil):
		a.frames = pages / o.sizeC
		if x.broken == nil {
			warnings = append(warnings, fmt.Sprintf("OME-XML says %d channels x %d frames, the file has %d pages: %d frames were taken",
				o.sizeC, o.sizeT, pages, a.frames))
		}
	default:
		return refuse("OME-XML says %d channels x %d frames (%s), the file has %d pages, want %d",
			o.sizeC, o.sizeT, o.order, pages, want)
	}
	return a, warnings, nil
}

func ordinal(n int) string {
	switch n {
	case 1:
		return "first"
	case 2:
		return "second"
	case 3:
		return "third"
	}
	return fmt.Sprintf("%dth", n)
}

// inOrder tells that the file does not map pages itself.
func (o *omeImage) inOrder() bool {
	if len(o.tiffData) == 0 {
		return true
	}
	return len(o.tiffData) == 1 && o.tiffData[0] == omeTiffData{ifd: -1, planeCount: -1}
}

// mapped follows the TiffData elements: each names its first page and plane, and the planes
// after it in dimension order stand on the pages after it. With a page and no count it is
// one plane, with neither it is all.
func (o *omeImage) mapped(want int, x *index) ([]int32, error) {
	plane := make([]int32, want)
	for i := range plane {
		plane[i] = -1
	}
	cStep, zStep, tStep := o.steps()
	total := 0
	for _, d := range o.tiffData {
		if d.firstC >= o.sizeC || d.firstZ >= o.sizeZ || d.firstT >= o.sizeT {
			return nil, fmt.Errorf("OME-XML TiffData names channel %d, slice %d, frame %d (from 0), the image has %d, %d, %d",
				d.firstC, d.firstZ, d.firstT, o.sizeC, o.sizeZ, o.sizeT)
		}
		first := d.firstC*cStep + d.firstZ*zStep + d.firstT*tStep
		n := d.planeCount
		if n < 0 {
			n = 1
			if d.ifd < 0 {
				n = want - first
			}
		}
		if n > want-first {
			return nil, fmt.Errorf("OME-XML TiffData maps %d planes from plane %d on, the image has %d", n, first, want)
		}
		ifd := max(d.ifd, 0)
		n = max(0, min(n, len(x.dirs)+len(x.skipped)-ifd))
		if total += n; total > want {
			return nil, fmt.Errorf("OME-XML TiffData maps more than the %d planes of the image", want)
		}
		for i := range n {
			if p := x.planeOf(ifd + i); p >= 0 {
				plane[first+i] = int32(p)
			}
		}
	}
	return plane, nil
}

// mappedAxes keeps the frames of which every channel has a page, and wants them to come
// before all others.
func (o *omeImage) mappedAxes(path string, x *index, plane []int32) (axes, []string, error) {
	cStep, _, tStep := o.steps()
	a := axes{channels: o.sizeC}
	var list []int32
	ended := -1
	for t := range o.sizeT {
		missing := -1
		for c := range o.sizeC {
			if plane[c*cStep+t*tStep] < 0 {
				missing = c
			}
		}
		switch {
		case missing < 0 && ended >= 0:
			return axes{}, nil, fmt.Errorf("imaging: %s: %w", path,
				damaged("OME-XML maps no page to channel %d of frame %d (from 0), but does to later frames", missingChannel(plane, o.sizeC, cStep, ended*tStep), ended))
		case missing >= 0:
			if ended < 0 {
				ended = t
			}
			continue
		}
		for c := range o.sizeC {
			list = append(list, plane[c*cStep+t*tStep])
		}
		a.frames++
	}
	if a.frames == 0 {
		return axes{}, nil, fmt.Errorf("imaging: %s: %w", path, damaged("OME-XML maps none of its %d frames to the %d pages of this file", o.sizeT, len(x.dirs)))
	}
	a.pages = list
	if a.frames < o.sizeT && x.broken == nil {
		return a, []string{fmt.Sprintf("OME-XML says %d frames, and maps %d of them to pages of this file: %d frames were taken", o.sizeT, a.frames, a.frames)}, nil
	}
	return a, nil, nil
}

func missingChannel(plane []int32, channels, step, base int) int {
	for c := range channels {
		if plane[base+c*step] < 0 {
			return c
		}
	}
	return 0
}

// otherFile tells of a file that names another one as the holder of its planes. A file that
// was renamed also does, so that this is a warning.
func (o *omeImage) otherFile(path string) string {
	for f := range o.fileNames {
		if filepath.Base(f) != filepath.Base(path) {
			return fmt.Sprintf("OME-XML calls this file %q; it was taken for renamed", clip(f))
		}
	}
	return ""
}
