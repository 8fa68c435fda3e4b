package screen

import (
	"math"
	"slices"
)

const (
	// half is K: a window has 2K + 1 readings.
	half   = 3
	window = 2*half + 1
	// outlying is t, within how many standard deviations of the median a reading is none.
	outlying = 3
)

// perDeviation makes a standard deviation of a median absolute deviation, where the
// scatter is normal: 1/(√2·erfinv(1/2)).
var perDeviation = 1 / (math.Sqrt2 * math.Erfinv(0.5))

// Hampel is the identifier of that name: of the readings in a window
//
//	m = median x_j,   S = 1.4826·median |x_j − m|
//
// and x is an outlier where |x − m| > t·S, with t = 3. (F. R. Hampel, "The influence curve
// and its role in robust estimation", J. Am. Stat. Assoc. 69, 1974, 383-393, for the median
// deviation; R. K. Pearson, "Outliers in process modeling and identification", IEEE Trans.
// Control Syst. Technol. 10, 2002, 55-63, for the identifier; both from memory.) Of more
// than half the readings equal S would be 0: it is taken to be at least least, the step of
// the numbers. The window must not be empty.
func Hampel(readings []float64, x, least float64) (median, deviation float64, outlier bool) {
	var room [window]float64
	sorted := append(room[:0], readings...)
	slices.Sort(sorted)
	median = middle(sorted)
	for i, v := range sorted {
		sorted[i] = math.Abs(v - median)
	}
	slices.Sort(sorted)
	deviation = max(perDeviation*middle(sorted), least)
	return median, deviation, math.Abs(x-median) > outlying*deviation
}

// middle is the median of what is sorted.
func middle(sorted []float64) float64 {
	n := len(sorted)
	return (sorted[(n-1)/2] + sorted[n/2]) / 2
}

// spike judges by the trailing window, which ends with the reading itself: in a plant there
// are none after it. So a step of the quantity is set aside until four of the window's
// seven are on the new level.
func (l *Limits) spike(s *State, value float64) bool {
	if len(s.Recent) == window {
		s.Recent = append(s.Recent[:0], s.Recent[1:]...)
	}
	s.Recent = append(s.Recent, value)
	if len(s.Recent) < window {
		return false
	}
	_, _, outlier := Hampel(s.Recent, value, l.step())
	return outlier
}
