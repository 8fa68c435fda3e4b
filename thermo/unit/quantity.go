package unit

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Quantity is a number with its unit, as it was written.
type Quantity struct {
	Value float64
	Unit  Unit
}

// SI is the quantity in the SI unit of its dimension; see [Unit.SI].
func (q Quantity) SI() float64 { return q.Unit.SI(q.Value) }

// Decimal rounds an SI value to 15 digits, which takes off what a conversion leaves in the
// last bits: 35 % is 0.35 then and -20 °C 253.15 K. It is for figures that a person wrote;
// those of a tag and of its range go by [Unit.SI] alone, or a reading at the very end of
// the range may lie beyond it.
func Decimal(si float64) float64 {
	x, err := strconv.ParseFloat(strconv.FormatFloat(si, 'g', 15, 64), 64)
	if err != nil { // beyond the largest number there is
		return si
	}
	return x
}

// String writes the quantity so that [Parse] reads it back.
func (q Quantity) String() string { return show(q.Value) + " " + q.Unit.Symbol }

// Parse reads a quantity. What it accepts is finite, in the unit and in SI, and
// no temperature below absolute zero.
func Parse(s string) (Quantity, error) { return ParseAs(s) }

// ParseAs is [Parse] for a place where only some dimensions make sense. Another
// dimension is an error that names the one found, those allowed, and their
// units. A symbol of two dimensions (K) is taken as the first one allowed.
func ParseAs(s string, allowed ...Dimension) (Quantity, error) {
	return parseBy(s, LookupAs, allowed)
}

// ParseFold is [ParseAs] for a place where letter case tells nothing, such as the name
// of a fluid: "35 G/KG". A unit that its case tells from another one is still to be
// written as it is: mW, MW.
func ParseFold(s string, allowed ...Dimension) (Quantity, error) {
	return parseBy(s, lookupFold, allowed)
}

func parseBy(s string, lookup func(string, ...Dimension) (Unit, error), allowed []Dimension) (Quantity, error) {
	if !utf8.ValidString(s) {
		return Quantity{}, fmt.Errorf("%q is not valid UTF-8", clip(s))
	}
	x, rest, err := number(strings.TrimSpace(s))
	if err != nil {
		return Quantity{}, fmt.Errorf("%q: %w%s", clip(s), err, hint("; allowed here: ", allowed))
	}
	u, err := lookup(strings.TrimSpace(rest), allowed...)
	if err != nil {
		return Quantity{}, fmt.Errorf("%q: %w", clip(s), err)
	}
	q := Quantity{x, u}
	if math.IsInf(q.SI(), 0) {
		return Quantity{}, fmt.Errorf("%q: the number is too large", clip(s))
	}
	if u.Dimension == Temperature && q.SI() < 0 {
		return Quantity{}, fmt.Errorf("%q is below absolute zero", clip(s))
	}
	return q, nil
}
