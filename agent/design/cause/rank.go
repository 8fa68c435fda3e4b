package cause

import (
	"cmp"
	"math"
	"slices"
)

// least is the weight below which a cause is not worth a look.
const least = 0.05

// Rank returns the causes that the evidence speaks for, the heaviest first, and those of
// the same weight in the order of [Kinds]. The same evidence gives the same causes; figures
// that are not finite are left out.
func Rank(e Evidence) []Cause {
	faults := e.faults()
	iso := isolate(e.statistics(), faults)
	if e.Exchanger.Signalled && iso.chance() < byTest { // the days before may have had the fault as well
		clean := e
		clean.Exchanger.Days = nil
		if beside := isolate(clean.statistics(), faults); beside.chance() >= byTest {
			e, iso = clean, beside
		}
	}
	iso.signalled = e.Exchanger.Signalled
	causes, misread := e.faulty(iso, faults)
	causes = append(causes, e.away(iso, 1-misread)...)
	causes = append(causes, e.lowDifference()...)
	causes = append(causes, e.marked()...)
	causes = append(causes, e.margins()...)
	causes = append(causes, e.unsure()...)
	if moved, ok := e.unsteady(); ok {
		for i := range causes { // all of them rest on figures that were moving
			causes[i].Weight /= 2
		}
		causes = append(causes, moved)
	}
	causes = slices.DeleteFunc(causes, func(c Cause) bool { return !(c.Weight >= least) })
	if len(causes) == 0 {
		causes = e.unexplained()
	}
	return ordered(causes)
}

// ordered sorts the causes.
func ordered(causes []Cause) []Cause {
	place := make(map[Kind]int)
	for i, k := range Kinds() {
		place[k] = i
	}
	for i := range causes {
		c := &causes[i]
		c.Figures = slices.DeleteFunc(c.Figures, func(f Figure) bool { return !finite(f.Value, f.Stands) })
		c.Weight = min(1, math.Round(c.Weight*1e6)/1e6) // so that rounding orders nothing
	}
	slices.SortStableFunc(causes, func(a, b Cause) int {
		return cmp.Or(
			cmp.Compare(b.Weight, a.Weight), cmp.Compare(place[a.Kind], place[b.Kind]),
			cmp.Compare(a.Subject, b.Subject), cmp.Compare(a.Says, b.Says),
		)
	})
	return causes
}

// explained turns the share of a deviation that something explains into a weight: what
// explains three times too much explains it as badly as what explains a third.
func explained(share float64) float64 {
	switch {
	case !(share > 0):
		return 0
	case share > 1:
		return 1 / share
	}
	return share
}

// sure is the probability that a figure of the given zeta is not by chance.
func sure(zeta float64) float64 { return math.Erf(math.Abs(zeta) / math.Sqrt2) }

// stands tells that a figure stands out of its uncertainty.
func stands(x Estimate) bool { return math.Abs(x.zeta()) > 2 }

// deviates tells that there is a deviation to explain.
func (e *Evidence) deviates() bool { return stands(e.Deviation) }
