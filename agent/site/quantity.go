package site

import (
	"math"
	"slices"
	"strings"
	"time"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo/unit"
)

// quantity reads a number with a unit of one of the dimensions.
func (v value) quantity(allowed ...unit.Dimension) (unit.Quantity, bool) {
	if v.node.Kind != yaml.ScalarNode || v.node.ShortTag() == "!!null" {
		v.fault("want a number with a unit, found %s", v.kind())
		return unit.Quantity{}, false
	}
	q, err := unit.ParseAs(v.node.Value, allowed...)
	if err != nil {
		v.fault("%v", err)
		return unit.Quantity{}, false
	}
	return q, true
}

// within is quantity with limits in SI, both allowed; span tells them.
func (v value) within(lo, hi float64, span string, d unit.Dimension) (float64, bool) {
	q, ok := v.quantity(d)
	if !ok {
		return 0, false
	}
	x := unit.Decimal(q.SI())
	if x < lo || x > hi {
		v.fault("%v is out of range; allowed: %s", q, span)
		return 0, false
	}
	return x, true
}

// percent are the units of a part of a whole that may be of its volume; g/kg is of its mass.
var percent = []string{"%", "‰", "ppm"}

// sameBasis tells whether both units of a ratio are in percent or the like, or both by mass;
// of what 2 % is of a tag in g/kg, nobody can tell. Other units are of one basis.
func sameBasis(a, b unit.Unit) bool {
	return a.Dimension != unit.Ratio || slices.Contains(percent, a.Symbol) == slices.Contains(percent, b.Symbol)
}

// part is within for a part of a whole that is not of its mass; advice tells what else may
// be done about one that is.
func (v value) part(lo, hi float64, span, advice string) (float64, bool) {
	x, ok := v.within(lo, hi, span, unit.Ratio)
	if !ok {
		return 0, false
	}
	if q, err := unit.ParseAs(v.node.Value, unit.Ratio); err == nil && !slices.Contains(percent, q.Unit.Symbol) {
		v.fault("%v is by mass; want %s%s", q, strings.Join(percent, ", "), advice)
		return 0, false
	}
	return x, true
}

// basis reads a share that is by mass or by volume.
type basis func(v value, lo, hi float64, span string) (float64, bool)

func byMass(v value, lo, hi float64, span string) (float64, bool) {
	return v.within(lo, hi, span, unit.Ratio)
}

// byVolume is the basis that takes no share by mass; advice is as for [value.part].
func byVolume(advice string) basis {
	return func(v value, lo, hi float64, span string) (float64, bool) { return v.part(lo, hi, span, advice) }
}

// duration is within for a time.
func (v value) duration(lo, hi time.Duration, span string) (time.Duration, bool) {
	s, ok := v.within(lo.Seconds(), hi.Seconds(), span, unit.Duration)
	return time.Duration(math.Round(s * 1e9)), ok
}

// bare reads a number without a unit, where there is none to write.
func (v value) bare() (x float64, ok bool) {
	if tag := v.node.ShortTag(); tag != "!!int" && tag != "!!float" || v.node.Decode(&x) != nil {
		v.fault("want a bare number, found %s", v.kind())
		return 0, false
	}
	return x, true
}

// bareWithin is bare with limits, both allowed; 0 where there is a fault.
func (v value) bareWithin(lo, hi float64) float64 {
	x, ok := v.bare()
	if ok && !(x >= lo && x <= hi) {
		v.fault("%g is out of range; allowed: %g to %g", x, lo, hi)
		return 0
	}
	return x
}
