package check

import (
	"strconv"

	"wend/cmd/wend/internal/tables"
)

// File holds what synthetic movies at each filament's own conditions gave.
const File = "check.csv"

var columns = []string{"filament", "true_lp_um", "true_is_bound", "movies", "answered", "bounds", "refused", "held", "held_share_low", "held_share_high",
	"bias_ln", "bias_se_ln", "scatter_ln", "predicted_ln", "smallest_ratio", "thermal_yes", "thermal_no", "confined", "frames_used_share"}

// Write writes check.csv into dir.
func Write(dir string, outcomes []Outcome) error {
	d := tables.Number
	var rows [][]string
	for _, o := range outcomes {
		bound := "0"
		if o.OfBound {
			bound = "1"
		}
		rows = append(rows, []string{strconv.Itoa(o.Filament), d(o.TrueUm), bound, strconv.Itoa(o.Movies), strconv.Itoa(o.Answered), strconv.Itoa(o.Bounds),
			strconv.Itoa(o.Refused), strconv.Itoa(o.Held), d(o.HeldLow), d(o.HeldHigh), d(o.Bias), d(o.BiasSE), d(o.Scatter), d(o.Predicted), d(o.SmallestRatio),
			strconv.Itoa(o.ThermalYes), strconv.Itoa(o.ThermalNo), strconv.Itoa(o.Confined), d(o.FramesUsed)})
	}
	return tables.WriteRows(dir, File, columns, rows)
}
