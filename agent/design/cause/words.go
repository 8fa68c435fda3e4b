package cause

import (
	"math"
	"strconv"
	"strings"
)

// brief writes a figure with two digits or three.
func brief(x float64) string {
	switch a := math.Abs(x); {
	case a >= 100:
		return strconv.FormatFloat(x, 'f', 0, 64)
	case a >= 10:
		return strconv.FormatFloat(x, 'f', 1, 64)
	}
	return strconv.FormatFloat(x, 'g', 2, 64)
}

// percent writes a ratio.
func percent(x float64) string {
	if math.Abs(x) < 0.1 {
		return strconv.FormatFloat(100*x, 'f', 1, 64) + " %"
	}
	return strconv.FormatFloat(100*x, 'f', 0, 64) + " %"
}

// instrument names what reads a quantity.
func instrument(words string) string {
	kind := " sensor"
	if strings.HasPrefix(words, "flow") {
		kind = " meter"
	}
	quantity, side, other := strings.Cut(words, " of ")
	if other {
		return quantity + kind + " of " + side
	}
	return quantity + kind
}

// list writes names one after the other.
func list(names []string) string {
	switch n := len(names); n {
	case 0:
		return ""
	case 1:
		return names[0]
	default:
		return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
	}
}
