//go:build cgo && !nocv

package ridge

/*
#cgo pkg-config: opencv4
#cgo CXXFLAGS: -std=c++11
#include "threads.h"
*/
import "C"

import (
	"fmt"
	"image"
	"sync"

	"gocv.io/x/gocv"

	"wend/imaging"
)

// active is the engine behind Compute.
var active = &engine{
	name:         func() string { return "OpenCV " + gocv.OpenCVVersion() },
	newWorkspace: newCVWorkspace,
}

// oneThread tells OpenCV to filter in the calling thread: frames are what is worked on in
// parallel, and a second layer of threads only gets in the way.
var oneThread = sync.OnceFunc(func() { C.ridge_set_threads(1) })

// cvThreads is the number of threads that OpenCV may use in one call.
func cvThreads() int { return int(C.ridge_get_threads()) }

// The derivative images of a cvWorkspace.
const (
	imageX = iota
	imageY
	imageXX
	imageYY
	imageXY
	images
)

// cvWorkspace holds every Mat that filtering needs; it alone makes and closes them.
type cvWorkspace struct {
	width, height int
	sigma         float64
	// taps are the smoothing, first and second derivative filters, as rows.
	taps [3]gocv.Mat
	src  gocv.Mat
	out  [images]gocv.Mat
	// pix are the pixels of out, in C memory, valid until the next load or close.
	pix [images][]float32
}

func newCVWorkspace() workspace {
	oneThread()
	c := &cvWorkspace{src: gocv.NewMat()}
	for i := range c.taps {
		c.taps[i] = gocv.NewMat()
	}
	for i := range c.out {
		c.out[i] = gocv.NewMat()
	}
	return c
}

func (c *cvWorkspace) close() {
	c.src.Close()
	for i := range c.taps {
		c.taps[i].Close()
	}
	for i := range c.out {
		c.out[i].Close()
	}
	*c = cvWorkspace{}
}

// replace closes m and makes it a matrix that holds values.
func replace(m *gocv.Mat, rows, cols int, values []float32) error {
	m.Close()
	*m = gocv.NewMatWithSize(rows, cols, gocv.MatTypeCV32F)
	return fill(m, values)
}

// fill copies values into m, which must be of their number.
func fill(m *gocv.Mat, values []float32) error {
	p, err := m.DataPtrFloat32()
	if err != nil {
		return fmt.Errorf("ridge: %w", err)
	}
	if len(p) != len(values) {
		return fmt.Errorf("ridge: matrix of %d values, want %d", len(p), len(values))
	}
	copy(p, values)
	return nil
}

func (c *cvWorkspace) load(f imaging.Frame, k *kernel) error {
	if c.sigma != k.sigma {
		for i, t := range [][]float32{k.smooth, k.first, k.second} {
			if err := replace(&c.taps[i], 1, len(t), t); err != nil {
				return err
			}
		}
		c.sigma = k.sigma
	}
	if c.width == f.Width && c.height == f.Height {
		if err := fill(&c.src, f.Pix); err != nil {
			return err
		}
	} else {
		if err := replace(&c.src, f.Height, f.Width, f.Pix); err != nil {
			return err
		}
		c.width, c.height = f.Width, f.Height
	}
	// The order of the derivative along x and along y, for each image.
	for i, d := range [images][2]int{imageX: {1, 0}, imageY: {0, 1}, imageXX: {2, 0}, imageYY: {0, 2}, imageXY: {1, 1}} {
		gocv.SepFilter2D(c.src, &c.out[i], gocv.MatTypeCV32F, c.taps[d[0]], c.taps[d[1]],
			image.Pt(-1, -1), 0, gocv.BorderReflect101)
		p, err := c.out[i].DataPtrFloat32()
		if err != nil {
			return fmt.Errorf("ridge: %w", err)
		}
		if len(p) != len(f.Pix) {
			return fmt.Errorf("ridge: OpenCV returned %d values, want %d", len(p), len(f.Pix))
		}
		c.pix[i] = p
	}
	return nil
}

func (c *cvWorkspace) hessian(y int) (xx, yy, xy []float32) {
	lo, hi := y*c.width, (y+1)*c.width
	return c.pix[imageXX][lo:hi], c.pix[imageYY][lo:hi], c.pix[imageXY][lo:hi]
}

func (c *cvWorkspace) gradient(x, y int) (gx, gy float32) {
	i := y*c.width + x
	return c.pix[imageX][i], c.pix[imageY][i]
}
