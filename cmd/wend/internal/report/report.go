package report

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"image/png"
	"io"
	"maps"
	"os"
	"slices"
	"strings"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables"
)

// The names of the files.
const (
	File        = "report.html"
	PictureFile = "traced.png"
)

//go:embed report.css
var style string

//go:embed report.html.tmpl
var pageText string

var pageTemplate = template.Must(template.New("report").Parse(pageText))

// Write writes report.html and traced.png into dir, which it makes if need be; each appears whole or not at
// all. Without a picture in r there is no traced.png, and the report says so. r is left as it was.
func Write(dir string, r *job.Result) error {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return err
	}
	o, absent := overlay(r)
	p := newPage(r)
	p.Style = template.CSS(style)
	p.CheckPlace = template.HTML(checkStart + checkEnd)
	if o.Width > 0 && o.Height > 0 {
		var err error
		if p.Picture, err = pictureSVG(o); err != nil {
			return err
		}
		err = tables.WriteFile(dir, PictureFile, func(w io.Writer) error {
			e := png.Encoder{CompressionLevel: png.BestSpeed}
			return e.Encode(w, o.Image())
		})
		if err != nil {
			return err
		}
		p.PictureNote = pictureNote(r.PictureFrame, absent)
	}
	var b bytes.Buffer
	if err := pageTemplate.Execute(&b, p); err != nil {
		return fmt.Errorf("report: %w", err)
	}
	return tables.WriteFile(dir, File, func(w io.Writer) error {
		_, err := w.Write(b.Bytes())
		return err
	})
}

func pictureNote(frame int, absent []int) string {
	if len(absent) == 0 {
		return ""
	}
	names := make([]string, len(absent))
	for i, id := range absent {
		names[i] = fmt.Sprint(id)
	}
	if len(absent) == 1 {
		return fmt.Sprintf("Filament %s has no contour in frame %d.", names[0], frame)
	}
	return fmt.Sprintf("Filaments %s have no contour in frame %d.", strings.Join(names, ", "), frame)
}

func sortedKeys(m map[string]int) []string { return slices.Sorted(maps.Keys(m)) }
