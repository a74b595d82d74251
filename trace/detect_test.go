package trace

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"wend/imaging"
	"wend/imaging/ridge"
)

// pixelsOf makes a mask from a drawing in characters, with its set pixels.
func pixelsOf(rows string) (mask []bool, width int, list []int) {
	lines := strings.Fields(rows)
	width = len(lines[0])
	for _, line := range lines {
		for _, c := range line {
			if c == '#' {
				list = append(list, len(mask))
			}
			mask = append(mask, c == '#')
		}
	}
	return mask, width, list
}

// Thinning a thick bar leaves a line one pixel wide, without a break, as long as the bar less its thickness.
func TestThin(t *testing.T) {
	mask, width, list := pixelsOf(`
		....................
		..###############...
		..###############...
		..###############...
		....................`)
	list = thin(mask, width, list)
	columns := make(map[int]int)
	for _, i := range list {
		columns[i%width]++
		if i/width != 2 {
			t.Errorf("pixel in row %d, want the middle", i/width)
		}
	}
	if len(list) != len(columns) || len(list) < 12 {
		t.Errorf("%d pixels in %d columns, want one each in 12 or more", len(list), len(columns))
	}
	var w walker
	w.begin(width, len(mask))
	if path := w.longest(mask, list[0]); len(path) != len(list) {
		t.Errorf("the longest path has %d of %d pixels", len(path), len(list))
	}
}

// What is left beside the longest path tells a line from what branches, crosses or closes.
func TestLeftover(t *testing.T) {
	for name, tc := range map[string]struct {
		rows string
		want bool
	}{
		"line": {`
			..............................
			.############################.
			..............................`, false},
		"spur": {`
			..............................
			...............##.............
			.############################.
			..............................`, false},
		"tee": {`
			..............................
			.############################.
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			...............#..............
			..............................`, true},
	} {
		mask, width, list := pixelsOf(tc.rows)
		var d detector
		d.begin(width, len(mask))
		if got := d.leftover(list, d.longest(mask, list[0]), 1); got != tc.want {
			t.Errorf("%s: tangled is %v, want %v", name, got, tc.want)
		}
	}
}

// mapOf draws ridge lines of strength 10, one pixel wide, into a map.
func mapOf(w, h int, lines ...[2]xy) *ridge.Map {
	m := &ridge.Map{Width: w, Height: h, Strength: make([]float32, w*h), Theta: make([]float32, w*h), Offset: make([]float32, w*h)}
	for _, l := range lines {
		n := int(4 * l[0].distance(l[1]))
		for i := 0; i <= n; i++ {
			p := l[0].plus(l[1].minus(l[0]).times(float64(i) / float64(n)))
			m.Strength[int(math.Round(p.y))*w+int(math.Round(p.x))] = 10
		}
	}
	return m
}

// Two pieces in one line are one filament if the map speaks for what is between them; pieces at an angle and pieces with
// nothing between are two.
func TestBridge(t *testing.T) {
	count := func(m *ridge.Map) int {
		var d detector
		n := 0
		for _, c := range d.find(m, 4, 6, 1, 10, 5) {
			if !c.spot {
				n++
			}
		}
		return n
	}
	faint := mapOf(60, 40, [2]xy{{5, 20}, {25, 20}}, [2]xy{{32, 20}, {52, 20}})
	for x := 26; x < 32; x++ {
		faint.Strength[20*60+x] = 2
	}
	if n := count(faint); n != 1 {
		t.Errorf("a faint gap: %d lines, want 1", n)
	}
	if n := count(mapOf(60, 40, [2]xy{{5, 20}, {25, 20}}, [2]xy{{32, 20}, {52, 20}})); n != 2 {
		t.Errorf("a dark gap: %d lines, want 2", n)
	}
	if n := count(mapOf(60, 40, [2]xy{{5, 20}, {25, 20}}, [2]xy{{30, 23}, {30, 37}})); n != 2 {
		t.Errorf("at a right angle: %d lines, want 2", n)
	}
}

// The extent of a line is where its light is: a path that runs on is cut, one that stops short goes on, a dark gap stays.
func TestExtent(t *testing.T) {
	at := sine(20.3, 20.4, 60.2, 0, 0, 1)
	d := newDrawing(110, 40, testSigmaPx, 0)
	d.line(at, 600*testPixelUm)
	gap := newDrawing(110, 40, testSigmaPx, 0)
	gap.line(sine(20.3, 20.4, 25, 0, 0, 1), 600*testPixelUm)
	gap.line(sine(50.3, 20.4, 30.2, 0, 0, 1), 600*testPixelUm)
	back := imaging.NewFrame(110, 40)
	for name, tc := range map[string]struct {
		frame    imaging.Frame
		from, to float64
	}{
		"exact": {d.frame, 20.3, 80.5}, "too long": {d.frame, 12, 95}, "too short": {d.frame, 24, 76}, "gap": {gap.frame, 20.3, 80.5},
	} {
		var path []xy
		for x := tc.from; x <= tc.to; x++ {
			path = append(path, xy{x, 20.4})
		}
		got := extent(tc.frame, back, nil, path, testWidthPx)
		if a, b := got[0].x, got[len(got)-1].x; !(math.Abs(a-20.3) < 1.2) || !(math.Abs(b-80.5) < 1.2) {
			t.Errorf("%s: the line goes from %.1f to %.1f, want 20.3 to 80.5", name, a, b)
		}
	}
}

// Frames as they come, and what must be said of them.
func TestFrameReasons(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 8))
	const light = 800 * testPixelUm
	draw := func(curves ...func(t float64) xy) drawing {
		d := newDrawing(110, 80, testSigmaPx, 8)
		for _, c := range curves {
			d.line(c, light)
		}
		return d
	}
	trace := func(f imaging.Frame) []Contour {
		t.Helper()
		c, err := testTracer(5, 1.5).Frame(f, 3)
		if err != nil {
			t.Fatal(err)
		}
		return c
	}
	one := sine(15.2, 30.3, 75.1, 0.1, 5, 1)
	if c := trace(draw(one).exposed(rng, 1.5)); len(c) != 1 || !c[0].Used() || c[0].Frame != 3 || c[0].Ends != [2]End{EndFree, EndFree} {
		t.Errorf("a clean line gives %d contours, want one that can be used", len(c))
	}
	if c := trace(draw(sine(40.2, 30.3, 90, 0.1, 5, 1)).exposed(rng, 1.5)); len(c) != 1 || c[0].Reason != ReasonBorder ||
		(c[0].Ends[0] != EndBorder && c[0].Ends[1] != EndBorder) {
		t.Errorf("a line over the border gives %+v", reasons(c))
	}
	crossing := draw(sine(10.2, 20.3, 85, 0.5, 0, 1), sine(10.4, 60.2, 85, -0.5, 0, 1))
	for _, c := range trace(crossing.exposed(rng, 1.5)) {
		if c.Used() {
			t.Errorf("a crossing line of %.1f µm can be used", c.LengthUm)
		}
	}
	close := draw(sine(15.2, 30.3, 75, 0, 0, 1), sine(15.2, 35.1, 75, 0, 0, 1))
	for _, c := range trace(close.exposed(rng, 1.5)) {
		if c.Used() {
			t.Error("one of two lines within two widths can be used")
		}
	}
	apart := trace(draw(sine(15.2, 25.3, 75, 0, 0, 1), sine(15.2, 45.1, 75, 0, 0, 1)).exposed(rng, 1.5))
	if len(apart) != 2 || !apart[0].Used() || !apart[1].Used() {
		t.Errorf("two lines apart give %v", reasons(apart))
	}
	bright := draw(one).exposed(rng, 1.5)
	tracer := testTracer(5, 1.5)
	tracer.conditions.MaxCount = 30
	for i, v := range bright.Pix {
		bright.Pix[i] = min(v, 30)
	}
	if c, err := tracer.Frame(bright, 0); err != nil || len(c) != 1 || c[0].Reason != ReasonSaturated {
		t.Errorf("a saturated line gives %v, %v", reasons(c), err)
	}
	uneven := draw(one)
	for y := range 80 {
		for x := range 110 {
			uneven.frame.Pix[y*110+x] += float32(30 * math.Exp(-(sq(float64(x-90))+sq(float64(y-60)))/(2*900)))
		}
	}
	if c := trace(uneven.exposed(rng, 1.5)); len(c) != 1 || !c[0].Used() {
		t.Errorf("a line over an uneven background gives %v", reasons(c))
	}
}

func reasons(list []Contour) (out []Reason) {
	for _, c := range list {
		out = append(out, c.Reason)
	}
	return out
}

// Noise is no filament, and neither is a spot.
func TestNothingThere(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 10))
	tracer := testTracer(5, 1.5)
	found := 0
	for k := range 20 {
		d := newDrawing(160, 120, testSigmaPx, 8)
		if k >= 10 {
			d.line(func(u float64) xy { return xy{60.3 + 0.1*u, 50.6} }, 3000) // 300 counts in one place
		}
		c, err := tracer.Frame(d.exposed(rng, 1.5), k)
		if err != nil {
			t.Fatal(err)
		}
		found += len(c)
	}
	// Of 400 000 pixels of noise a line of a µm may come out once in a while.
	if found > 1 {
		t.Errorf("%d filaments found in noise and spots", found)
	}
}

func TestNewTracerRefuses(t *testing.T) {
	good := Conditions{WidthPx: 1.3, KnotWidths: 4}
	for want, tc := range map[string]struct {
		o Options
		c Conditions
	}{
		"pixel size": {Options{}, good},
		"line width": {Options{PixelUm: 0.1}, Conditions{KnotWidths: 4}},
		"knots":      {Options{PixelUm: 0.1}, Conditions{WidthPx: 1.3}},
	} {
		if _, err := NewTracer(tc.o, tc.c); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("error %v, want one about the %s", err, want)
		}
	}
}
