package main

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"wend/cmd/wend/internal/job"
)

// external measures a stack whose truth lies beside it: NAME.truth.csv, with the columns of contours.csv,
// and NAME.truth.json, with pixel_um, interval_s, exposure_s, temperature_c and, per filament, Lp.
func external(ctx context.Context, path string) (*score, error) {
	base := path
	for _, ext := range []string{".tif", ".tiff", ".btf", ".ome"} {
		base = strings.TrimSuffix(base, ext)
	}
	text, err := os.ReadFile(base + ".truth.json")
	if err != nil {
		return nil, err
	}
	var about struct {
		PixelUm      float64 `json:"pixel_um"`
		IntervalS    float64 `json:"interval_s"`
		ExposureS    float64 `json:"exposure_s"`
		TemperatureC float64 `json:"temperature_c"`
		Filaments    []struct {
			Lp float64
		} `json:"filaments"`
	}
	if err := json.Unmarshal(text, &about); err != nil {
		return nil, fmt.Errorf("%s.truth.json: %w", base, err)
	}
	t := truth{contours: make(map[place][]point)}
	for _, f := range about.Filaments {
		t.lpUm = append(t.lpUm, f.Lp)
	}
	if err := readContours(base+".truth.csv", t.contours); err != nil {
		return nil, err
	}
	request := job.NewRequest()
	request.Setting = "free"
	request.PixelUm, request.IntervalS = about.PixelUm, about.IntervalS
	request.ExposureS, request.TemperatureC = about.ExposureS, about.TemperatureC
	m, err := job.Open(path, request)
	if err != nil {
		return nil, err
	}
	defer m.Close()
	r, err := m.Measure(ctx, 0, nil)
	if err != nil {
		return nil, err
	}
	return judge(filepath.Base(base), r, t), nil
}

func readContours(path string, into map[place][]point) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	column := make(map[string]int)
	for i, name := range rows[0] {
		column[name] = i
	}
	for n, row := range rows[1:] {
		var v [4]float64
		for k, name := range [4]string{"filament", "frame", "x_um", "y_um"} {
			i, ok := column[name]
			if !ok {
				return fmt.Errorf("%s: no column %s", path, name)
			}
			if v[k], err = strconv.ParseFloat(row[i], 64); err != nil {
				return fmt.Errorf("%s line %d: %w", path, n+2, err)
			}
		}
		p := place{int(v[0]) - 1, int(v[1])}
		into[p] = append(into[p], point{v[2], v[3]})
	}
	return nil
}
