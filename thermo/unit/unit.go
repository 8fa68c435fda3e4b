// Package unit turns quantities as people write them ("640 kW", "12.5 m3/h",
// "3.2 barg", "180 °F") into SI values and back.
//
// The factors are exact definitions: NIST SP 811 (2008) appendix B for the
// customary units, DIN 1343 and ISO 13443 for the reference states of normal and
// standard gas volumes. Units and numbers are read strictly. Letter case matters
// (mW is no MW), the decimal separator is a point, and a name that the trade uses
// for more than one unit, such as a bare "scfm", is refused with the choices.
package unit

import (
	"fmt"
	"slices"
	"strings"
	"sync"
)

// Unit is one unit of measurement: SI value = Factor·x + Offset.
//
// Where Gauge is set, the unit counts from the local atmosphere: Offset is 0 and
// the caller adds the barometric pressure to get an absolute pressure.
type Unit struct {
	Symbol    string
	Dimension Dimension
	Factor    float64
	Offset    float64
	Gauge     bool
	Source    string // where the factor is defined
	Note      string // what a reader may mistake, or ""
}

// SI converts x in unit u to the SI unit of its dimension. A gauge pressure
// stays a gauge pressure, in Pa.
func (u Unit) SI(x float64) float64 { return u.Factor*x + u.Offset }

// Of converts an SI value to unit u. It undoes [Unit.SI].
func (u Unit) Of(si float64) float64 { return (si - u.Offset) / u.Factor }

func (u Unit) String() string { return u.Symbol }

// Lookup returns the unit of that name or usual spelling. A symbol of both a
// temperature and a difference (K, °C, °F) is taken as the temperature. The
// error of an unknown or ambiguous name tells the near ones.
func Lookup(symbol string) (Unit, error) { return LookupAs(symbol) }

// LookupAs is [Lookup] among the units of the given dimensions, or among all
// without any. A unit of another dimension is an error that names what was
// found and what is allowed.
func LookupAs(symbol string, allowed ...Dimension) (Unit, error) {
	key := spelling(symbol)
	if choice, ok := ambiguous[key]; ok {
		return Unit{}, fmt.Errorf("unit %q may mean more than one thing: %s", symbol, choice)
	}
	found := index()[key]
	if len(found) == 0 {
		return Unit{}, unknown(symbol, allowed)
	}
	if len(allowed) == 0 {
		return found[0], nil
	}
	for _, d := range allowed {
		for _, u := range found {
			if u.Dimension == d {
				return u, nil
			}
		}
	}
	return Unit{}, fmt.Errorf("%q is a unit of %s; allowed here: %s", symbol, found[0].Dimension, describe(allowed))
}

// lookupFold is [LookupAs] that takes the letters of a unit in any case, where no other
// of the allowed units is so spelled. A first m may be milli or mega and stays as it is.
func lookupFold(symbol string, allowed ...Dimension) (Unit, error) {
	exact, err := LookupAs(symbol, allowed...)
	if err == nil {
		return exact, nil
	}
	key := spelling(symbol)
	found := make(map[Unit]bool)
	for _, r := range table {
		for _, name := range r.names() {
			if s := spelling(name); slices.Contains(allowed, r.Dimension) && strings.EqualFold(s, key) && (s[0] == key[0] || s[0] != 'm' && s[0] != 'M') {
				found[r.Unit] = true
			}
		}
	}
	for name := range ambiguous {
		if strings.EqualFold(name, key) {
			return Unit{}, err
		}
	}
	if len(found) == 1 {
		for u := range found {
			return u, nil
		}
	}
	return Unit{}, err
}

// Named lists the units of a dimension under their first names, the usual ones
// first.
func Named(d Dimension) []Unit {
	var us []Unit
	for _, r := range table {
		if r.Dimension == d {
			us = append(us, r.Unit)
		}
	}
	return us
}

// index finds units by normalised spelling. A name shared by two dimensions
// lists both, in the order of the table.
var index = sync.OnceValue(func() map[string][]Unit {
	m := make(map[string][]Unit, 8*len(table))
	for _, r := range table {
		for _, name := range r.names() {
			key := spelling(name)
			m[key] = append(m[key], r.Unit)
		}
	}
	return m
})
