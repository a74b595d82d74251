package report

import (
	"fmt"
	"math"

	"wend/cmd/wend/internal/tables"
)

// Population is a condition's population in one sentence for a terminal: how many filaments of how many stacks, the mean, the spread.
func Population(c tables.Condition, stacks int) string {
	s := fmt.Sprintf("all %d stacks, %s: %s", stacks, quantityName(c.Quantity), plural(c.Filaments, "filament", "filaments"))
	if c.LowerBounds > 0 {
		s += fmt.Sprintf(", %s", plural(c.LowerBounds, "lower bound", "lower bounds"))
	}
	if c.Excluded > 0 {
		s += fmt.Sprintf(", %d without a value", c.Excluded)
	}
	if !positive(c.Mean) {
		return s + "; no population mean"
	}
	v := roundInterval(c.Mean, c.Low, c.High)
	s += "; mean " + v.Value
	if v.Interval() != none {
		s += fmt.Sprintf(" (95 %% interval %s)", v.Interval())
	}
	if positive(c.SpreadFilaments) {
		s += fmt.Sprintf(", spread of a filament × or ÷ %s", digits(math.Exp(c.SpreadFilaments), 3))
	}
	return s
}
