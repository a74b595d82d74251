package trace_test

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"wend/imaging"
	"wend/imaging/synth"
	"wend/trace"
)

// movie is frames held in memory.
type movie []imaging.Frame

func (m movie) Frames() int { return len(m) }

func (m movie) ReadFrame(t int, dst *imaging.Frame) error {
	dst.Resize(m[t].Width, m[t].Height)
	copy(dst.Pix, m[t].Pix)
	return nil
}

// expose renders lines into frames with photon and camera noise.
func expose(width, height, frames int, lines []synth.Line) movie {
	scene := synth.Scene{Width: width, Height: height, Optics: synth.Optics{PixelUm: 0.1, PSFUm: 0.13}, BackgroundPerPx: 8}
	camera := synth.Camera{Gain: 2, Offset: 100, ReadNoiseE: 1.5}
	rng := rand.New(rand.NewPCG(1, 2))
	var im synth.Image
	m := make(movie, frames)
	for i := range m {
		scene.Expect(lines, 1, &im)
		camera.Expose(&im, rng, &m[i])
	}
	return m
}

// A wave 6 µm across is traced in every frame; nothing has to be known of the camera.
func Example() {
	wave := synth.Sinusoid(2, 4, 6, 0.4, 4, 0.1)
	m := expose(110, 90, 5, []synth.Line{{Curves: []synth.Curve{wave}, PhotonsPerUm: 1500}})

	hint := trace.CameraHint{GainCounts: math.NaN(), OffsetCounts: math.NaN(), MaxCount: 65535}
	_, filaments, err := trace.Movie(context.Background(), m, 0, 4, trace.Options{PixelUm: 0.1}, hint, 1, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, f := range filaments {
		c := f.Contours[0]
		fmt.Printf("filament %d in frames %d to %d\n", f.ID, f.First, f.Last)
		fmt.Printf("length within 2 %%: %v\n", math.Abs(c.LengthUm/wave.Length()-1) < 0.02)
	}
	// Output:
	// filament 1 in frames 0 to 4
	// length within 2 %: true
}

// BenchmarkFrame traces a 512×512 frame with a dozen filaments of 9 µm, all but the decoding.
func BenchmarkFrame(b *testing.B) {
	var lines []synth.Line
	for k := range 12 {
		curve := synth.Sinusoid(4+15.5*float64(k%3), 4+12*float64(k/3), 9, 0.5, 7, 0.3)
		lines = append(lines, synth.Line{Curves: []synth.Curve{curve}, PhotonsPerUm: 600})
	}
	m := expose(512, 512, 2, lines)
	hint := trace.CameraHint{GainCounts: math.NaN(), OffsetCounts: math.NaN(), MaxCount: 65535}
	o := trace.Options{PixelUm: 0.1}
	c, err := trace.Survey(m, 0, 1, o, hint)
	if err != nil {
		b.Fatal(err)
	}
	tracer, err := trace.NewTracer(o, c)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		contours, err := tracer.Frame(m[0], 0)
		if err != nil || len(contours) != 12 {
			b.Fatalf("%d contours, %v", len(contours), err)
		}
	}
}
