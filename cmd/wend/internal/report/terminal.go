package report

import (
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"

	"wend/cmd/wend/internal/job"
)

// Table writes a short table of the filaments for a terminal, columns aligned, without colour. The error is w's.
func Table(w io.Writer, r *job.Result) error {
	if len(r.Filaments) == 0 {
		_, err := fmt.Fprintf(w, "%s: no filament found\n", r.Name)
		return err
	}
	header := []string{"filament", "frames", "length µm", "Lp µm", "95 % interval", "from", "thermal", "flags"}
	network := r.Settings.Setting == "network"
	if network {
		header = []string{"filament", "frames", "length µm", "Lp µm", "95 % interval", "tube rms µm", "95 % interval", "confinement", "flags"}
	}
	rows := [][]string{header}
	for i := range r.Filaments {
		f := &r.Filaments[i]
		s := newSummaryRow(f)
		flags := strings.Join(f.Flags, ";")
		if network {
			t := roundInterval(f.Tube.RmsUm, f.Tube.RmsLowUm, f.Tube.RmsHighUm)
			rows = append(rows, []string{strconv.Itoa(s.ID), fmt.Sprintf("%d/%d", s.Used, s.All), s.Length, s.Lp, s.Interval, t.Value, t.Interval(), f.Confinement, flags})
			continue
		}
		rows = append(rows, []string{strconv.Itoa(s.ID), fmt.Sprintf("%d/%d", s.Used, s.All), s.Length, s.Lp, s.Interval, s.From, s.Thermal, flags})
	}
	widths := make([]int, len(header))
	for _, row := range rows {
		for k, cell := range row {
			widths[k] = max(widths[k], utf8.RuneCountInString(cell))
		}
	}
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n", r.Name)
	for _, row := range rows {
		var line strings.Builder
		for k, cell := range row {
			pad := strings.Repeat(" ", widths[k]-utf8.RuneCountInString(cell))
			if k < 4 { // numbers to the right
				line.WriteString("  " + pad + cell)
			} else {
				line.WriteString("  " + cell + pad)
			}
		}
		b.WriteString(strings.TrimRight(line.String(), " ") + "\n")
	}
	_, err := io.WriteString(w, b.String())
	return err
}
