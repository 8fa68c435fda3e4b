package account

import (
	"math"
	"slices"
	"testing"
	"time"

	"heatreeve/agent/loads"
)

// An error that lasts does not average out over n equal minutes, one that does not grows
// with the root of n, and the two add in squares (JCGM 100:2008, equations 10 and 16; the
// closed form of n equal terms).
func TestUncertaintyOverAPeriod(t *testing.T) {
	const n, flow, inlet, random = 600, 300.0, -400.0, 50.0
	from := at(t, "2026-06-01T00:00Z")
	var records []Record
	for k := range int64(n) {
		r := record(from+k*minute, 1e3, 0, 60)
		r.Uncertainty.Parts[loads.PartFlow], r.Uncertainty.Parts[loads.PartInlet] = flow, inlet
		r.Uncertainty.Variance = random * random
		records = append(records, r)
	}
	plan := Plan{From: from, To: from + n*minute, Through: from + n*minute, By: Day, Zone: time.UTC}
	u := collect(t, plan, records)[0].Uncertainty
	near(t, "systematic", u.Systematic(), n*500, 1e-14) // the triangle of 3, 4 and 5
	near(t, "random", u.Random(), math.Sqrt(n)*random, 1e-14)
	near(t, "combined", u.Standard(), math.Sqrt(n*n*500*500+n*random*random), 1e-14)
}

// Where a load turns, what lasts turns its sign with the duty and cancels.
func TestSystematicPartsCancelByTheirSign(t *testing.T) {
	from := at(t, "2026-06-01T00:00Z")
	warm, cold := record(from, 1e3, 0, 60), record(from+minute, -1e3, 0, 60)
	warm.Uncertainty.Parts[loads.PartFlow], cold.Uncertainty.Parts[loads.PartFlow] = 600, -600
	warm.Uncertainty.Parts[loads.PartInlet], cold.Uncertainty.Parts[loads.PartInlet] = 5, 5
	plan := Plan{From: from, To: from + hour, Through: from + hour, By: Hour, Zone: time.UTC}
	u := collect(t, plan, []Record{warm, cold})[0].Uncertainty
	near(t, "uncertainty", u.Standard(), 10, 1e-15)
}

func TestShares(t *testing.T) {
	var u Uncertainty
	if u.Shares() != nil || u.Standard() != 0 {
		t.Errorf("shares of nothing: %v", u.Shares())
	}
	u.Parts[loads.PartInlet], u.Parts[loads.PartCp], u.Variance = 4, -3, 144
	check := func(want []Share) {
		t.Helper()
		got := u.Shares()
		sum := 0.0
		for _, s := range got {
			sum += s.Fraction
		}
		same := func(a, b Share) bool {
			return a.Name == b.Name && math.Abs(a.Fraction-b.Fraction) < 1e-15 && math.Abs(a.Uncertainty-b.Uncertainty) < 1e-15
		}
		if !slices.EqualFunc(got, want, same) || math.Abs(sum-1) > 1e-15 {
			t.Errorf("shares %+v, want %+v; sum %g", got, want, sum)
		}
	}
	check([]Share{{"random", 12, 144. / 169}, {"inlet", 4, 16. / 169}, {"heat capacity", 3, 9. / 169}})
	// Old records on top, of one sign with the 5 of the parts: 5 + 11 = 16, and 20 with 12.
	u.Unparted = 11
	check([]Share{{"not told apart", 11, (256. - 25) / 400}, {"random", 12, 144. / 400}, {"inlet", 4, 16. / 400}, {"heat capacity", 3, 9. / 400}})
	near(t, "combined", u.Standard(), 20, 1e-15)
}

func TestDeviation(t *testing.T) {
	a := Amounts{Witness: 200, Compared: 198}
	if d, ok := a.Deviation(); !ok || math.Abs(d+0.01) > 1e-15 {
		t.Errorf("deviation %g, %v; want −1 %%", d, ok)
	}
	if _, ok := new(Amounts).Deviation(); ok {
		t.Error("a deviation from a witness that there is not")
	}
}
