package named

import (
	"fmt"
	"math"
	"strconv"

	"heatreeve/thermo"
)

// Entry is one name with what its fluid is good for.
type Entry struct {
	Form    string        // the name as it is written, with N for a strength
	Example string        // one that [Lookup] takes
	Phase   thermo.Phase  // these and the rest are of the example
	Bounds  thermo.Bounds // K, absolute Pa
	Range   string        // the bounds in °C and kPa
	Source  string        // the published formulation
}

// List tells every name that [Lookup] knows, family by family.
func List() []Entry {
	var all []Entry
	for _, w := range words() {
		f, err := Lookup(w.example())
		if err != nil {
			panic(fmt.Sprintf("named: our own example %q: %v", w.example(), err))
		}
		all = append(all, Entry{
			Form: w.form(), Example: w.example(), Phase: f.Phase(), Bounds: f.Bounds(),
			Range: Range(f.Bounds()), Source: f.Source(),
		})
	}
	return all
}

// Range writes bounds for people: "0 to 350 °C, 0.611 to 100000 kPa". A pressure that
// may be anything above zero, or above a few pascals, has no lower end.
func Range(b thermo.Bounds) string {
	low := figure(b.MinP / 1e3)
	if low == "0" {
		low = "up"
	}
	return fmt.Sprintf("%s to %s °C, %s to %s kPa", figure(b.MinT-273.15), figure(b.MaxT-273.15), low, figure(b.MaxP/1e3))
}

// figure has four digits, below one three behind the point.
func figure(x float64) string {
	short, err := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 4, 64), 64)
	if err == nil && math.Abs(short) < 1 {
		short = math.Round(1e3*short) / 1e3
	}
	return strconv.FormatFloat(short, 'f', -1, 64)
}
