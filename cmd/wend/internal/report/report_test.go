package report

import (
	"bytes"
	"encoding/xml"
	"html"
	"image"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables"
	"wend/cmd/wend/internal/tables/tablestest"
	"wend/imaging"
	"wend/modes"
	"wend/trace"
)

func write(t *testing.T, r *job.Result) (dir, text string) {
	t.Helper()
	dir = t.TempDir()
	if err := Write(dir, r); err != nil {
		t.Fatal(err)
	}
	b, err := os.ReadFile(filepath.Join(dir, File))
	if err != nil {
		t.Fatal(err)
	}
	return dir, string(b)
}

var reference = regexp.MustCompile(`(?:href|src|data|poster|action|xlink:href)="([^"]*)"`)

// The page must load nothing: every reference is to itself, to data inside it or to a file of the same folder.
func TestSelfContained(t *testing.T) {
	r := tablestest.Result(4, 30)
	dir, text := write(t, r)
	if err := tables.Write(dir, r); err != nil {
		t.Fatal(err)
	}
	refs := reference.FindAllStringSubmatch(text, -1)
	if len(refs) < 20 {
		t.Fatalf("%d references, want at least the links to the tables", len(refs))
	}
	for _, ref := range refs {
		switch target := ref[1]; {
		case strings.HasPrefix(target, "data:"), strings.HasPrefix(target, "#"):
		default:
			if _, err := os.Stat(filepath.Join(dir, target)); err != nil || filepath.Base(target) != target {
				t.Errorf("reference to %q, which is no file beside the page", target)
			}
		}
	}
	for _, bad := range []string{"http:", "https:", "//cdn", "<script", "@import", "url(", "<iframe", "<link rel=\"stylesheet", "javascript:", "srcset"} {
		if strings.Contains(strings.ToLower(text), bad) {
			t.Errorf("the page holds %q", bad)
		}
	}
}

func TestSameBytes(t *testing.T) {
	a, textA := write(t, tablestest.Result(4, 25))
	b, textB := write(t, tablestest.Result(4, 25))
	if textA != textB {
		t.Error("two pages of the same result differ")
	}
	pa, errA := os.ReadFile(filepath.Join(a, PictureFile))
	pb, errB := os.ReadFile(filepath.Join(b, PictureFile))
	if errA != nil || errB != nil || !bytes.Equal(pa, pb) {
		t.Errorf("two pictures of the same result differ (%v, %v)", errA, errB)
	}
	r := tablestest.Result(4, 25)
	r.StackPath = "/elsewhere/" + filepath.Base(r.StackPath)
	if _, text := write(t, r); text != textA {
		t.Error("the page depends on where the stack lies")
	}
}

func TestOpensWithTheAnswer(t *testing.T) {
	r := tablestest.Result(3, 30)
	r.Filaments[0].LpUm, r.Filaments[0].LpLowUm, r.Filaments[0].LpHighUm, r.Filaments[0].Shapes = 17.234, 14.06, 21.03, 61.2
	r.Filaments[1].LpLowUm = 123.4
	_, text := write(t, r)
	first := strings.Index(text, "<svg")
	for _, want := range []string{
		// Half the interval's width is 3.5: two digits of it are tenths.
		"the persistence length is 17.2 µm (95 % interval 14.1 to 21.0 µm), from",
		"about 61 independent shapes",
		"the persistence length is at least 123 µm (97.5 %)",
		"no persistence length is given: the fluctuations do not agree with thermal ones (pinned, changing)",
	} {
		if at := strings.Index(html.UnescapeString(text), want); at < 0 || at > first {
			t.Errorf("%q does not stand before the first figure (at %d)", want, at)
		}
	}
	if !strings.Contains(text, r.SHA256) || !strings.Contains(text, "OME-XML PhysicalSizeX") {
		t.Error("hash or source of the pixel size is missing")
	}
}

func TestManyFilamentsInOneSentence(t *testing.T) {
	r := tablestest.Result(5, 12)
	for i, lp := range []float64{16, math.NaN(), math.NaN(), 18, 23} {
		r.Filaments[i].LpUm = lp
	}
	if got, want := overall(r), "5 filaments: a persistence length for 3 (median 18.0 µm, from 16.0 to 23.0 µm), a lower bound for 1, neither for 1."; got != want {
		t.Errorf("got  %q\nwant %q", got, want)
	}
	r.Filaments = r.Filaments[:2]
	r.Filaments[1].LpUm = 17
	if got, want := overall(r), "2 filaments: a persistence length for all (median 16.5 µm, from 16.0 to 17.0 µm)."; got != want {
		t.Errorf("got  %q\nwant %q", got, want)
	}
}

// Every SVG is well-formed, named for those who do not see it, and there are five for a filament and one picture.
func TestFiguresAreAccessible(t *testing.T) {
	_, text := write(t, tablestest.Result(2, 30))
	svgs := regexp.MustCompile(`(?s)<svg.*?</svg>`).FindAllString(text, -1)
	if len(svgs) != 11 {
		t.Fatalf("%d figures, want 2·5 and a picture", len(svgs))
	}
	for i, svg := range svgs {
		if !regexp.MustCompile(`^<svg viewBox="0 0 [0-9. ]+" role="img" aria-label="[^"]{20,}">`).MatchString(svg) {
			t.Errorf("figure %d begins %.120s", i, svg)
		}
		d := xml.NewDecoder(strings.NewReader(svg))
		for {
			if _, err := d.Token(); err == io.EOF {
				break
			} else if err != nil {
				t.Fatalf("figure %d: %v", i, err)
			}
		}
	}
	if n, scoped := strings.Count(text, "<th"), strings.Count(text, "<th scope=")+strings.Count(text, "<thead"); n != scoped {
		t.Errorf("%d header cells, %d with a scope", n, scoped)
	}
	if strings.Count(text, "<figure") != strings.Count(text, "<figcaption") {
		t.Error("a figure has no caption")
	}
	if strings.Count(text, "<h1") != 1 || !strings.Contains(text, `<html lang="en">`) {
		t.Error("one title and a language are wanted")
	}
}

func TestManyFilamentsStaySmall(t *testing.T) {
	dir, text := write(t, tablestest.Result(12, 320))
	if len(text) > 2_000_000 {
		t.Errorf("%d bytes for twelve filaments, want at most 2 million", len(text))
	}
	if n := strings.Count(text, `<details class="filament"`); n != 12 || strings.Contains(text, `" open>`) {
		t.Errorf("%d folded sections, want 12, all folded", n)
	}
	if strings.Count(text, "evenly chosen.") == 0 {
		t.Error("frames were left out of a figure, and the page does not say so")
	}
	f, err := os.Open(filepath.Join(dir, PictureFile))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	img, err := png.Decode(f)
	if err != nil || img.Bounds().Dx() != 1024 {
		t.Fatalf("picture: %v, want 1024 pixels across", err)
	}
	if !hasColour(img) {
		t.Error("no trace is drawn in the picture")
	}
}

func hasColour(img image.Image) bool {
	for y := 0; y < img.Bounds().Dy(); y++ {
		for x := 0; x < img.Bounds().Dx(); x++ {
			if r, _, b, _ := img.At(x, y).RGBA(); r > b+0x4000 {
				return true
			}
		}
	}
	return false
}

// What the stack or the user names is text, whatever it contains.
func TestTextIsEscaped(t *testing.T) {
	r := tablestest.Result(1, 5)
	r.Name = `<script>alert(1)</script>`
	r.Camera.Source = `"><img src=x>`
	r.Warnings[0].Text = `a<b & c`
	_, text := write(t, r)
	if strings.Contains(text, "<script>") || strings.Contains(text, "<img src") || !strings.Contains(text, "a&lt;b &amp; c") {
		t.Error("text from outside is not escaped")
	}
}

// A result full of holes still gives a page, and no hole shows as NaN or Inf.
func TestHoles(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	bad := tablestest.Result(1, 6)
	f := &bad.Filaments[0]
	f.LengthUm, f.Shapes, f.LpUm, f.LpLowUm, f.LpHighUm, f.LocalisationUm, f.TangentFitLpUm = nan, nan, nan, nan, nan, nan, 0
	f.Flags = []string{"never_heard_of"}
	for i := range f.Modes {
		f.Modes[i].Variance, f.Modes[i].NoiseVariance, f.Modes[i].ThermalVariance, f.Modes[i].LpHighUm = -1, 0, nan, inf
	}
	f.Modes = append(f.Modes, modes.Mode{Mode: 0, Variance: 1, LpUm: nan, WavelengthUm: inf}, modes.Mode{Mode: 3, Variance: inf})
	f.Tangent = append(f.Tangent, modes.Separation{SeparationUm: nan, CosMean: inf})
	f.Contours[2] = trace.Contour{Frame: 2, Points: []trace.Point{{XUm: nan, YUm: inf}, {XUm: 1}}, LengthUm: inf}
	bad.TimesS, bad.Picture, bad.Settings.PixelUm = nil, imaging.Frame{}, nan
	empty := tablestest.Result(0, 3)
	still := tablestest.Result(1, 3)
	still.Filaments[0].Filament = trace.Filament{ID: 1, Last: 0, Contours: []trace.Contour{{Reason: "unheard_of"}}}
	still.Filaments[0].Modes, still.Filaments[0].Tangent, still.Filaments[0].Estimates = nil, nil, nil
	for name, r := range map[string]*job.Result{"holes": bad, "nothing": empty, "one frame": still, "zero": {}} {
		_, text := write(t, r)
		words := regexp.MustCompile(`base64,[A-Za-z0-9+/=]*`).ReplaceAllString(text, "")
		for _, word := range []string{"NaN", "Inf", "%!", "could not be drawn"} {
			if i := strings.Index(words, word); i >= 0 {
				t.Errorf("%s: the page shows %q: …%s…", name, word, words[max(0, i-60):i+20])
			}
		}
		var b strings.Builder
		if err := Table(&b, r); err != nil || strings.Contains(b.String(), "NaN") {
			t.Errorf("%s: terminal table %q, %v", name, b.String(), err)
		}
	}
	if _, text := write(t, empty); !strings.Contains(text, "No filament was found") {
		t.Error("the page of an empty stack does not say so")
	}
}

func TestTerminalTable(t *testing.T) {
	r := tablestest.Result(3, 20)
	for i := range r.Filaments {
		f := &r.Filaments[i]
		f.FramesUsed, f.LengthUm, f.Flags = 17-i, 8.124+float64(i), nil
	}
	r.Filaments[0].LpUm, r.Filaments[0].LpLowUm, r.Filaments[0].LpHighUm = 17.234, 14.06, 21.03
	r.Filaments[1].LpLowUm, r.Filaments[1].Flags = 123.4, []string{"lower_bound", "few_shapes"}
	r.Filaments[2].Flags = []string{"pinned"}
	var b strings.Builder
	if err := Table(&b, r); err != nil {
		t.Fatal(err)
	}
	want := `invented
  filament  frames  length µm  Lp µm  95 % interval  from        thermal  flags
         1   17/20       8.12   17.2  14.1 to 21.0   likelihood  yes
         2   16/20       9.12      –  ≥ 123          bound       yes      lower_bound;few_shapes
         3   15/20       10.1      –  –              –           no       pinned
`
	if b.String() != want {
		t.Errorf("got\n%swant\n%s", b.String(), want)
	}
}
