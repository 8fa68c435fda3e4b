package site

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

const accuracyForms = "allowed: IEC 60751 A (AA, B, C), 0.5 % of reading, 0.25 % of 16 bar (the span), ± 0.3 K, or several joined by +"

// wholes are words for the span of an instrument.
var wholes = []string{"span", "full scale", "fs", "f.s.", "range"}

// resistance are the tolerance classes of platinum thermometers:
// a + b·|t| with t in °C, IEC 60751:2008, table 3.
var resistance = map[string]Accuracy{
	"AA": {0.1, 0.0017, 273.15},
	"A":  {0.15, 0.002, 273.15},
	"B":  {0.3, 0.005, 273.15},
	"C":  {0.6, 0.01, 273.15},
}

// accuracy reads one or several parts joined by " + ", which add up. zero is the
// SI value where the instrument reads nothing.
func (r *reader) accuracy(v value, u unit.Unit, zero float64) Accuracy {
	s, ok := v.text()
	if !ok {
		return Accuracy{}
	}
	sum := Accuracy{Zero: zero}
	for i, text := range strings.Split(strings.ReplaceAll(s, "+/-", "±"), " + ") {
		part, err := accuracyPart(strings.TrimSpace(text), u, zero)
		if err == nil && i > 0 && part.Rel > 0 && sum.Rel > 0 && part.Zero != sum.Zero {
			err = fmt.Errorf("%q counts from another zero than the part before it", clip(text))
		}
		if err != nil {
			v.fault("%v", err)
			return Accuracy{}
		}
		sum.Abs, sum.Rel = sum.Abs+part.Abs, sum.Rel+part.Rel
		if part.Rel > 0 {
			sum.Zero = part.Zero
		}
	}
	switch {
	case sum.Abs == 0 && sum.Rel == 0:
		v.fault("%q is no error at all, which no instrument has", clip(s))
	case math.IsInf(sum.Abs, 0):
		v.fault("%q is too large", clip(s))
		return Accuracy{}
	}
	return sum
}

func accuracyPart(s string, u unit.Unit, zero float64) (Accuracy, error) {
	s = strings.TrimSpace(strings.TrimPrefix(s, "±"))
	if class, ok := strings.CutPrefix(s, "IEC 60751"); ok {
		return tolerance(class, u)
	}
	share, of, relative := strings.Cut(s, " of ")
	switch {
	case !beginsNumber(s):
		return Accuracy{}, fmt.Errorf("%q is no accuracy; %s", clip(s), accuracyForms)
	case !relative:
		q, err := distance(s, u)
		return Accuracy{Abs: q, Zero: zero}, err
	case strings.TrimSpace(of) == "reading" || strings.TrimSpace(of) == "rate":
		q, err := fraction(share)
		return Accuracy{Rel: q, Zero: zero}, err
	case slices.Contains(wholes, strings.ToLower(strings.TrimSpace(of))):
		return Accuracy{}, fmt.Errorf("%q does not say how much that is; write the span itself, such as 0.25 %% of 16 bar", clip(s))
	}
	part, err := fraction(share)
	if err != nil {
		return Accuracy{}, err
	}
	span, err := distance(of, u)
	return Accuracy{Abs: part * span, Zero: zero}, err
}

func tolerance(class string, u unit.Unit) (Accuracy, error) {
	class = strings.TrimSpace(strings.TrimPrefix(strings.TrimSpace(class), "class "))
	if u.Dimension != unit.Temperature {
		return Accuracy{}, fmt.Errorf("IEC 60751 is about thermometers, and the tag is in %v", u)
	}
	a, ok := resistance[class]
	if !ok {
		return Accuracy{}, fmt.Errorf("IEC 60751 has no class %q; allowed: AA, A, B, C", clip(class))
	}
	return a, nil
}

// distances is the dimension of an error: a temperature is off by a difference.
func distances(d unit.Dimension) unit.Dimension {
	if d == unit.Temperature {
		return unit.TemperatureDifference
	}
	return d
}

// distance reads how far a tag in u may be off. A ratio is in percent or by mass as u is: 2 %
// of a humidity ratio would be 20 g/kg, and is meant to be of the reading or the span.
func distance(s string, u unit.Unit) (float64, error) {
	x, err := positive(s, distances(u.Dimension))
	if err != nil || u.Dimension != unit.Ratio {
		return x, err
	}
	q, err := unit.ParseAs(s, unit.Ratio)
	switch {
	case err != nil || sameBasis(q.Unit, u):
		return x, err
	case slices.Contains(percent, q.Unit.Symbol):
		return 0, fmt.Errorf("%v of what? the tag is in %v; want the error in %v, or the whole: %v of reading, or of the span such as %v of 20 g/kg", q, u, u, q, q)
	}
	return 0, fmt.Errorf("%v is by mass, and the tag is in %v; want the error in %v", q, u, u)
}

// positive reads a quantity as a distance: no offset, no barometer, not below
// zero.
func positive(s string, ds ...unit.Dimension) (float64, error) {
	q, err := unit.ParseAs(s, ds...)
	if err != nil {
		return 0, err
	}
	if q.Value < 0 {
		return 0, fmt.Errorf("%v is below zero", q)
	}
	return q.SI(), nil
}

func fraction(s string) (float64, error) {
	x, err := positive(s, unit.Ratio)
	if err == nil && x > 1 {
		err = fmt.Errorf("%s is more than the whole", clip(s))
	}
	if q, bad := unit.ParseAs(s, unit.Ratio); err == nil && bad == nil && !slices.Contains(percent, q.Unit.Symbol) {
		err = fmt.Errorf("%v is by mass; want %s", q, strings.Join(percent, ", "))
	}
	return x, err
}
