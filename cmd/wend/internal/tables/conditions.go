package tables

import (
	"io"
	"strconv"

	"wend/cmd/wend/internal/job"
	"wend/modes"
	"wend/modes/groups"
)

// ConditionsFile holds what the filaments of each condition say together.
const ConditionsFile = "conditions.csv"

var conditionColumns = []string{"condition", "quantity", "preparations", "filaments", "lower_bounds", "excluded", "mean", "mean_low", "mean_high",
	"spread_filaments", "spread_preparations"}

// Condition is a condition's population of one quantity.
type Condition struct {
	Condition, Quantity string
	groups.Population
}

// PoolFilaments pools the filaments of a condition, each with its preparation (empty: not known), for every quantity that any of them has a value or
// a bound of. The filaments come as filaments.csv gives them, so that it does not matter when they were measured.
func PoolFilaments(condition string, filaments []job.Filament, preparations []string) []Condition {
	var out []Condition
	for _, q := range []struct {
		name string
		of   func(f *job.Filament) (value, low, high float64)
	}{
		{modes.QuantityLp, func(f *job.Filament) (value, low, high float64) { return f.LpUm, f.LpLowUm, f.LpHighUm }},
		{modes.QuantityTubeRms, func(f *job.Filament) (value, low, high float64) {
			return f.Tube.RmsUm, f.Tube.RmsLowUm, f.Tube.RmsHighUm
		}},
		{"mesh_um", func(f *job.Filament) (value, low, high float64) {
			return f.Tube.MeshUm, f.Tube.MeshLowUm, f.Tube.MeshHighUm
		}},
	} {
		var members []groups.Member
		for i := range filaments {
			value, low, high := q.of(&filaments[i])
			members = append(members, groups.NewMember(preparations[i], value, low, high))
		}
		p := groups.Pool(members)
		if q.name == modes.QuantityLp || p.Filaments+p.LowerBounds > 0 {
			out = append(out, Condition{condition, q.name, p})
		}
	}
	return out
}

// WriteConditions writes conditions.csv into dir.
func WriteConditions(dir string, rows []Condition) error {
	return WriteFile(dir, ConditionsFile, func(w io.Writer) error {
		out := newRowWriter(w, conditionColumns)
		for _, c := range rows {
			d := func(v float64) string { return digits(v, digitsResult) }
			out.write(c.Condition, c.Quantity, strconv.Itoa(c.Preparations), strconv.Itoa(c.Filaments), strconv.Itoa(c.LowerBounds), strconv.Itoa(c.Excluded),
				d(c.Mean), d(c.Low), d(c.High), d(c.SpreadFilaments), d(c.SpreadPreparations))
		}
		return out.flush()
	})
}
