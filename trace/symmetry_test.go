package trace

import (
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
)

// mapped returns a frame whose pixel to(x, y) is pixel (x, y) of f; to permutes the pixels.
func mapped(f imaging.Frame, w, h int, to func(x, y int) (int, int)) imaging.Frame {
	out := imaging.NewFrame(w, h)
	for y := range f.Height {
		for x := range f.Width {
			a, b := to(x, y)
			out.Pix[b*w+a] = f.Pix[y*f.Width+x]
		}
	}
	return out
}

// A mirrored or turned image has the mirrored or turned contour, noise and all. The background's
// blocks and the thinning go by rows and from one side, so that the fits start apart, and where they end may take one
// knot more or less; from there the two differ by what the noise puts into that one knot's waves, well below
// a standard error. Two draws of the noise would differ by 1.4, and a fit that kept the pixel
// steps of the path it began with by 1.2.
func TestFrameIsTheSameMirroredAndTurned(t *testing.T) {
	const w, h = 128, 64
	rng := rand.New(rand.NewPCG(51, 52))
	at := sine(20.3, 22.7, 84.1, 0.21, 4, 1.1)
	d := newDrawing(w, h, testSigmaPx, 8)
	d.line(at, 800*testPixelUm)
	f := d.exposed(rng, 1.5)
	contour := func(f imaging.Frame) Contour {
		t.Helper()
		list, err := testTracer(5, 1.5).Frame(f, 0)
		if err != nil || len(list) != 1 || !list[0].Used() {
			t.Fatalf("contours %v, error %v, want one that is used", reasons(list), err)
		}
		return list[0]
	}
	want := contour(f)
	for name, tc := range map[string]struct {
		w, h int
		to   func(x, y int) (int, int)
		back func(x, y float64) (float64, float64)
	}{
		"left to right": {w, h, func(x, y int) (int, int) { return w - 1 - x, y }, func(x, y float64) (float64, float64) { return w - 1 - x, y }},
		"upside down":   {w, h, func(x, y int) (int, int) { return x, h - 1 - y }, func(x, y float64) (float64, float64) { return x, h - 1 - y }},
		"turned by 180°": {w, h, func(x, y int) (int, int) { return w - 1 - x, h - 1 - y },
			func(x, y float64) (float64, float64) { return w - 1 - x, h - 1 - y }},
		"turned by 90°":    {h, w, func(x, y int) (int, int) { return h - 1 - y, x }, func(x, y float64) (float64, float64) { return y, h - 1 - x }},
		"rows for columns": {h, w, func(x, y int) (int, int) { return y, x }, func(x, y float64) (float64, float64) { return y, x }},
	} {
		got := contour(mapped(f, tc.w, tc.h, tc.to))
		for i, p := range got.Points {
			x, y := tc.back(p.XUm/testPixelUm, p.YUm/testPixelUm)
			got.Points[i].XUm, got.Points[i].YUm = x*testPixelUm, y*testPixelUm
		}
		if d := separation(want.Points, got.Points, 1); !(d < 0.06) { // points are 0.1 µm apart: half that is the most that two rows of them differ
			t.Errorf("%s: contours %.0f nm apart", name, 1000*d)
		}
		if got.Points[0].XUm > got.Points[len(got.Points)-1].XUm {
			got = turned(got)
		}
		sum, n := 0.0, 0
		for _, p := range got.Points[3 : len(got.Points)-3] {
			d, se := acrossPoints(p, want.Points)
			sum += sq(d / se)
			n++
		}
		if r := math.Sqrt(sum / float64(n)); !(r < 0.8) {
			t.Errorf("%s: contours differ by %.2f standard errors rms, want 0.8 or less", name, r)
		}
		if d := math.Abs(got.LengthUm - want.LengthUm); !(d < want.LengthSEUm) {
			t.Errorf("%s: length %.4f µm, want %.4f ± %.4f", name, got.LengthUm, want.LengthUm, want.LengthSEUm)
		}
		if r := got.NoiseUm3 / want.NoiseUm3; !(math.Abs(r-1) < 0.2) {
			t.Errorf("%s: noise density %.3f of the other's", name, r)
		}
		if want.Points[0].XUm > want.Points[len(want.Points)-1].XUm {
			want = turned(want)
		}
	}
}

// acrossPoints is the distance of p from the polyline through list, and the standard error there, µm.
func acrossPoints(p Point, list []Point) (distance, se float64) {
	distance = math.Inf(1)
	for i := 1; i < len(list); i++ {
		a, b := xy{list[i-1].XUm, list[i-1].YUm}, xy{list[i].XUm, list[i].YUm}
		q, v := xy{p.XUm, p.YUm}, b.minus(a)
		u := min(max(q.minus(a).dot(v)/v.dot(v), 0), 1)
		if d := q.distance(a.plus(v.times(u))); d < distance {
			distance, se = d, list[i].SEUm
		}
	}
	return distance, se
}

// Lines at all angles are found whole, without noise too: 45° is where pixels are in steps on both sides.
func TestFrameFindsLinesAtAllAngles(t *testing.T) {
	rng := rand.New(rand.NewPCG(53, 54))
	for k := range 16 {
		angle := math.Pi * float64(k) / 16
		for _, offset := range []float64{0, 0.5} {
			sin, cos := math.Sincos(angle)
			at := func(u float64) xy { return xy{50 + offset + 30*(2*u-1)*cos, 50 + 30*(2*u-1)*sin} }
			d := newDrawing(101, 101, testSigmaPx, 8)
			d.line(at, 600*testPixelUm)
			for i := range d.frame.Pix { // enough for the ridge map to have a unit
				d.frame.Pix[i] += float32(0.01 * rng.NormFloat64())
			}
			list, err := testTracer(5, 1.5).Frame(d.frame, 0)
			if err != nil || len(list) != 1 || !list[0].Used() {
				t.Errorf("angle %.1f°, offset %g: contours %v, error %v, want one that is used", angle*180/math.Pi, offset, reasons(list), err)
				continue
			}
			if l := list[0].LengthUm / testPixelUm; !(math.Abs(l-60) < 0.6) { // one per cent
				t.Errorf("angle %.1f°, offset %g: length %.2f pixels, want 60", angle*180/math.Pi, offset, l)
			}
		}
	}
}

// A filament bent into a soft hairpin, its legs far enough apart, is one line with no bias, and so is a long one.
func TestFitHairpin(t *testing.T) {
	rng := rand.New(rand.NewPCG(63, 64))
	hairpin := func(u float64) xy { // two legs of 45 pixels and half a circle of radius 14
		const leg, radius = 45.0, 14.0
		total := 2*leg + math.Pi*radius
		switch s := u * total; {
		case s < leg:
			return xy{20.3 + s, 20.6}
		case s < leg+math.Pi*radius:
			sin, cos := math.Sincos((s - leg) / radius)
			return xy{20.3 + leg + radius*sin, 20.6 + radius*(1-cos)}
		default:
			return xy{20.3 + leg - (s - leg - math.Pi*radius), 20.6 + 2*radius}
		}
	}
	d := newDrawing(100, 72, testSigmaPx, 8)
	d.line(hairpin, 600*testPixelUm)
	for i := range d.frame.Pix {
		d.frame.Pix[i] += float32(0.01 * rng.NormFloat64())
	}
	list, err := testTracer(4, 1.5).Frame(d.frame, 0)
	if err != nil || len(list) != 1 || !list[0].Used() {
		t.Fatalf("contours %v, error %v, want one that is used", reasons(list), err)
	}
	if l, want := list[0].LengthUm/testPixelUm, lengthOf(hairpin); !(math.Abs(l/want-1) < 0.01) {
		t.Errorf("length %.2f pixels, want %.2f", l, want)
	}
	r, _ := fitOf(testTracer(4, 1.5), d.frame)
	if e := interiorError(r, hairpin); !(e < 5) { // the bend begins at once, the knots are half a µm apart
		t.Errorf("%.2f nm rms off without noise, want 5 or less", e)
	}
}
