package fluidtest

import (
	"math"
	"testing"
)

// complaints counts what a test is told.
type complaints struct {
	testing.TB
	tally
}

func (c *complaints) Helper()                           {}
func (c *complaints) Errorf(format string, args ...any) { c.tally.Errorf(format, args...) }

func TestDeviations(t *testing.T) {
	w, c := Deviations{}, new(complaints)
	w.Note("cp", -0.25)
	w.Check(c, "here", "cp", 0.125, 0.125)
	w.Check(c, "here", "density", -0.5, 0.5)
	if c.tally != 0 || w.String() != "cp 0.25, density 0.5" {
		t.Errorf("%d complaints within the bounds, want none; kept %s", c.tally, w)
	}
	for k, d := range []float64{0.126, -0.126, math.Inf(1), math.NaN()} {
		w.Check(c, "there", "h", d, 0.125)
		if int(c.tally) != k+1 {
			t.Errorf("a deviation of %g passed a bound of 0.125", d)
		}
	}
	if !math.IsNaN(w["h"]) {
		t.Errorf("NaN is lost: %s", w)
	}
}
