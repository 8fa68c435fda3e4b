package page

import (
	"math"

	"heatreeve/agent/shown"
)

// average is the mean of a column by the seconds that were measured; false of one without a value.
func average(column []*float64, seconds []float64) (mean float64, ok bool) {
	var sum, weight float64
	for i, x := range column {
		if x == nil || i >= len(seconds) {
			continue
		}
		sum += *x * seconds[i]
		weight += seconds[i]
	}
	if weight == 0 {
		return 0, false
	}
	return sum / weight, true
}

// extent is the least and the greatest value of a column; NaN where it has none.
func extent(column []*float64) (lo, hi float64) {
	lo, hi = math.NaN(), math.NaN()
	for _, x := range column {
		if x == nil {
			continue
		}
		if !(lo <= *x) {
			lo = *x
		}
		if !(hi >= *x) {
			hi = *x
		}
	}
	return lo, hi
}

// percentText writes a fraction in per cent; what is not quite all, or not quite none, is not
// rounded to it.
func percentText(x float64) string {
	switch {
	case x > 0 && x < 0.001:
		return "below 0.1 %"
	case x < 1 && x > 0.999:
		return "above 99.9 %"
	}
	return shown.Rounded(100*x, 1) + " %"
}
