package fluidtest

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
	"testing"
)

// Deviations keeps the largest one of each name.
type Deviations map[string]float64

// Note takes a deviation of either sign.
func (w Deviations) Note(name string, d float64) { w[name] = max(w[name], math.Abs(d)) }

// Check takes a deviation too, and fails where it is beyond its bound or NaN; at is the state.
func (w Deviations) Check(t testing.TB, at any, name string, d, bound float64) {
	t.Helper()
	w.Note(name, d)
	if !(math.Abs(d) <= bound) {
		t.Errorf("%+v: %s is off by %.4g, more than %.4g", at, name, d, bound)
	}
}

// String lists them by name.
func (w Deviations) String() string {
	var out []string
	for _, name := range slices.Sorted(maps.Keys(w)) {
		out = append(out, fmt.Sprintf("%s %.3g", name, w[name]))
	}
	return strings.Join(out, ", ")
}
