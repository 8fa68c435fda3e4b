package cause

import (
	"cmp"
	"slices"
)

// faults lists every single fault that there can be: an instrument of either side, one that
// only a test of a pair names, and a fall of the conductance.
func (e *Evidence) faults() []fault {
	var all []fault
	inputs := e.inputs()
	for _, in := range inputs {
		all = append(all, fault{
			kind: in.kind, tag: in.Tag, words: in.words, unit: in.unit, effect: in.Error,
			lasting: in.Uncertainty, scatter: in.Scatter,
		})
	}
	all = append(all, e.strangers(inputs)...)
	if x := &e.Exchanger; x.Conductance.Known || x.ConductanceShift.Known {
		all = append(all, fault{
			kind: Fouling, tag: x.Name, words: "conductance", unit: "1", falls: true, isDesign: true,
			effect: Effect{Conductance: 1, Deviation: x.OnDeviation},
		})
	}
	return all
}

// strangers are the instruments of tests that no input reads: the other one of a pair may
// be the one that is wrong.
func (e *Evidence) strangers(inputs []input) []fault {
	read := make(map[string]input, len(inputs))
	for _, in := range inputs {
		read[in.Tag] = in
	}
	var all []fault
	for _, t := range e.sortedTests() {
		in, ok := read[t.Tag]
		_, own := read[t.Against]
		named := func(f fault) bool { return f.tag == t.Against }
		if ok && !own && t.Against != "" && t.sound() && !slices.ContainsFunc(all, named) {
			all = append(all, fault{kind: in.kind, tag: t.Against, words: "the other of the pair", unit: in.unit, stranger: true})
		}
	}
	return all
}

// statistics lists the figures that are nought without a fault. The exchanger's are taken
// as shifts where there was a time before.
func (e *Evidence) statistics() []statistic {
	var all []statistic
	add := func(name, unit string, x Estimate, short bool, by func(fault) float64) {
		if x.sound() {
			all = append(all, statistic{name, unit, x, short, by})
		}
	}
	x := &e.Exchanger
	closure := func(f fault) float64 { return f.effect.Closure }
	conductance := func(f fault) float64 { return f.effect.Conductance }
	closureShift, conductanceShift := x.shifts()
	if closureShift.sound() {
		add("shift of the closure", "W", closureShift, true, closure)
	} else {
		add("closure", "W", x.Closure, false, closure)
	}
	switch {
	case x.IllConditioned:
	case conductanceShift.sound():
		add("shift of ln(UA/UA clean)", "1", conductanceShift, true, conductance)
	default:
		add("ln(UA/UA clean)", "1", x.Conductance, false, conductance)
	}
	add("duty against witness", "W", e.Witness, false, func(f fault) float64 { return f.effect.Duty })
	for _, t := range e.sortedTests() {
		add(t.Name, e.unitOf(t.Tag), t.Estimate, false, func(f fault) float64 {
			switch {
			case f.isDesign || f.tag == "":
			case f.tag == t.Tag:
				return 1
			case f.tag == t.Against:
				return -1
			}
			return 0
		})
	}
	return all
}

// sortedTests are the tests in an order of their own, so that none depends on the caller's.
func (e *Evidence) sortedTests() []Test {
	tests := slices.Clone(e.Tests)
	slices.SortFunc(tests, func(a, b Test) int {
		return cmp.Or(
			cmp.Compare(a.Tag, b.Tag), cmp.Compare(a.Against, b.Against), cmp.Compare(a.Name, b.Name),
			cmp.Compare(a.Value, b.Value), cmp.Compare(a.Uncertainty, b.Uncertainty),
		)
	})
	return tests
}

func (e *Evidence) unitOf(tag string) string {
	for _, in := range e.inputs() {
		if in.Tag == tag {
			return in.unit
		}
	}
	return "1"
}
