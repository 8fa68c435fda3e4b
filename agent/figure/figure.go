// Package figure names the figures of a load that are both a line of its working and a metric, so
// that a scrape and a working say the same of the same figure, and the one leads to the other.
package figure

import (
	"strings"
	"unicode"
	"unicode/utf8"
)

// Figure is one of them.
type Figure struct {
	Symbol string // in the formulas of a working
	Words  string // what stands beside it
}

// The figures of a stream and of a vessel, in the order in which a working comes to them.
var (
	Inlet       = Figure{"T1", "inlet temperature"}
	Leaving     = Figure{"T1h", "inlet temperature of what leaves now"} // in the place of Inlet where a stream has a hold
	Outlet      = Figure{"T2", "outlet temperature"}
	Content     = Figure{"T", "temperature of the content"}
	MassFlow    = Figure{"m", "mass flow"}
	Duty        = Figure{"Q", "duty"}
	Uncertainty = Figure{"u", "standard uncertainty of the duty"}
)

// The figures of a verdict.
var (
	Expected             = Figure{"Qd", "expected duty"}
	ExpectedUncertainty  = Figure{"ud", "standard uncertainty of what is expected, by what lasts"}
	Deviation            = Figure{"δ", "deviation"}
	DeviationUncertainty = Figure{"uδ", "standard uncertainty of the deviation"}
)

// All are those above.
var All = []Figure{Inlet, Leaving, Outlet, Content, MassFlow, Duty, Uncertainty, Expected, ExpectedUncertainty, Deviation, DeviationUncertainty}

// By is what stands beside a figure that has come about in one of several ways: its words, and which
// way that is.
func (f Figure) By(way string) string { return f.Words + ", " + way }

// Help is what a metric says of a figure: its words, what more there is to say of it, which begins
// with its own space or comma, and its symbol in a working.
func (f Figure) Help(more string) string {
	first, size := utf8.DecodeRuneInString(f.Words)
	return string(unicode.ToUpper(first)) + f.Words[size:] + strings.TrimSuffix(more, ".") + ". It is " + f.Symbol + " in the working of heatreeve explain."
}
