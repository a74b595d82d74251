package imaging

import (
	"fmt"
	"strconv"
	"strings"
)

// umPer and secondsPer are the units that OME-XML names, those that fit a microscope. Both
// code points of µ are in use, and so are both of Å.
var umPer = map[string]float64{
	"m": 1e6, "dm": 1e5, "cm": 1e4, "mm": 1e3,
	"\u00b5m": 1, "\u03bcm": 1, "um": 1, "micron": 1, "microns": 1, "micrometer": 1, "micrometre": 1,
	"nm": 1e-3, "pm": 1e-6, "fm": 1e-9, "\u00c5": 1e-4, "\u212b": 1e-4,
	"in": 25400, "inch": 25400, "ft": 304800, "thou": 25.4, "pt": 25400.0 / 72,
}

var secondsPer = map[string]float64{
	"d": 86400, "h": 3600, "min": 60, "s": 1, "sec": 1, "ds": 0.1, "cs": 0.01, "ms": 1e-3,
	"\u00b5s": 1e-6, "\u03bcs": 1e-6, "us": 1e-6, "ns": 1e-9, "ps": 1e-12,
}

// quantity converts a value and its unit as OME-XML gives them. An empty unit is the default
// one. The error is a plain sentence about the attribute called name.
func quantity(name, value, unit string, per map[string]float64, standard string) (float64, error) {
	v, err := strconv.ParseFloat(strings.TrimSpace(value), 64)
	if err != nil || v-v != 0 {
		return 0, fmt.Errorf("%s is %q, want a number", name, clip(value))
	}
	unit = strings.TrimSpace(unit)
	if unit == "" {
		unit = standard
	}
	f, ok := per[unit]
	if !ok {
		return 0, fmt.Errorf("%s is in %q, which is no unit that can be converted", name, clip(unit))
	}
	return v * f, nil
}

// clip keeps what a file says short enough for a message.
func clip(s string) string {
	const most = 40
	r := []rune(s)
	if len(r) > most {
		return string(r[:most]) + "…"
	}
	return s
}
