package main

import (
	"errors"
	"flag"
	"fmt"
	"math"
	"strings"

	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/named"
	"heatreeve/thermo/unit"
)

// atmosphere is the pressure of a state for which none is given.
const atmosphere = "101.325 kPa"

// fluidHelp tells what the operand may be, and how the commands about one end.
const fluidHelp = `FLUID is a name, such as water, CO2 or 'propylene glycol 32 %' (heatreeve
properties --list tells all), or a declaration as in the fluids of a site file,
such as '{gas: {N2: 79 %, O2: 21 %}}'. Quantities carry their unit.
Options may stand before or after FLUID. A state that the fluid does not have
ends with status 1, a wrong FLUID or option with 2.
`

// fluid reads the operand: a name, or a declaration as in a site file. What is as
// humid as its stream says has no state of its own.
func (c *call) fluid() (thermo.Fluid, error) {
	f, err := site.ParseFluid(c.operands[0])
	var faults site.Faults
	var unknown *named.UnknownError
	switch {
	case errors.As(err, &faults):
		return nil, faults
	case errors.As(err, &unknown):
		return nil, wrongf("heatreeve %s: %s\nknown:\n%s", c.name, unknown.Hint(), listing(named.Names(), "  "))
	case err != nil:
		return nil, wrongf("heatreeve %s: %w", c.name, err)
	}
	if _, humid := f.(thermo.Humid); humid {
		return nil, wrongf("heatreeve %s: %q does not say how humid the air is; write \"moist air 8 g/kg\" or '{moist air: {relative humidity: 50 %%, at: 25 °C}}'", c.name, c.operands[0])
	}
	return f, nil
}

// quantity reads an option that must be there.
func (c *call) quantity(name, text string, allowed ...unit.Dimension) (unit.Quantity, error) {
	if text == "" {
		return unit.Quantity{}, wrongf("heatreeve %s: --%s is missing; usage: %s", c.name, name, c.usage())
	}
	q, err := unit.ParseAs(text, allowed...)
	if err != nil {
		return q, wrongf("heatreeve %s: --%s %w", c.name, name, err)
	}
	return q, nil
}

// pressures are the options that tell a pressure.
type pressures struct{ at, barometer *string }

func pressureFlags(f *flag.FlagSet) pressures {
	return pressures{
		f.String("pressure", atmosphere, "pressure `P`, absolute (4 bar), or gauge (3 barg) with --barometer"),
		f.String("barometer", "", "air pressure `P` at the place, such as 100.9 kPa; a gauge pressure needs it"),
	}
}

// absolute reads the pressure text of an option in Pa.
func (c *call) absolute(name, text string, barometer *string) (float64, error) {
	q, err := c.quantity(name, text, unit.Pressure)
	if err != nil {
		return 0, err
	}
	air, err := c.air(*barometer)
	switch {
	case err != nil:
		return 0, err
	case q.Unit.Gauge && air == 0:
		return 0, wrongf("heatreeve %s: --%s %v is a gauge pressure; write --barometer as well, the air pressure at the place such as 101.3 kPa", c.name, name, q)
	}
	p := q.SI()
	if q.Unit.Gauge {
		p += air
	}
	if p <= 0 {
		return 0, wrongf("heatreeve %s: --%s %v is not above vacuum", c.name, name, q)
	}
	return p, nil
}

// air reads the barometer in Pa; without one it is 0.
func (c *call) air(text string) (float64, error) {
	if text == "" {
		return 0, nil
	}
	q, err := c.quantity("barometer", text, unit.Pressure)
	if err == nil && (q.Unit.Gauge || q.SI() < 50e3 || q.SI() > 110e3) {
		err = wrongf("heatreeve %s: --barometer %v is no pressure of the air; allowed: 50 kPa to 110 kPa absolute", c.name, q)
	}
	return q.SI(), err
}

// temperatures reads a list in K.
func (c *call) temperatures(text string) ([]float64, error) {
	var all []float64
	for part := range strings.SplitSeq(text, ",") {
		if strings.TrimSpace(part) == "" && strings.TrimSpace(text) != "" {
			return nil, wrongf("heatreeve %s: --temperature %q has a comma without a temperature on either side; write 20°C,40°C", c.name, text)
		}
		q, err := c.quantity("temperature", strings.TrimSpace(part), unit.Temperature)
		switch {
		case err != nil && strings.Contains(text, ","):
			return nil, wrongf("%w; a comma parts temperatures, and the decimal separator is a point", err)
		case err != nil:
			return nil, err
		}
		all = append(all, q.SI())
	}
	return all, nil
}

// refusal adds to the error of a state what the fluid allows at that pressure.
func refusal(f thermo.Fluid, p float64, err error) error {
	var out *thermo.RangeError
	if !errors.As(err, &out) {
		return err
	}
	b := f.Bounds()
	if p < b.MinP || p > b.MaxP {
		low := "up"
		if b.MinP > 0 {
			low = figures(b.MinP/1e3, 6)
		}
		return fmt.Errorf("%w; allowed: %s to %s kPa absolute", err, low, figures(b.MaxP/1e3, 6))
	}
	lo, hi := f.Span(p)
	lo, hi = max(lo, b.MinT), min(hi, b.MaxT)
	if !(lo < hi) {
		return fmt.Errorf("%w; it is no %s at any temperature under %s kPa absolute", err, f.Phase(), figures(p/1e3, 6))
	}
	return fmt.Errorf("%w; allowed at %s kPa absolute: %s °C to %s °C%s", err, figures(p/1e3, 6), celsius(lo), celsius(hi), otherPhase(f, out, p))
}

// otherPhase names the fluid that is the other phase of f, where that has the state.
func otherPhase(f thermo.Fluid, out *thermo.RangeError, p float64) string {
	name, ok := strings.CutPrefix(f.Name(), "liquid ")
	if !ok {
		name = "liquid " + name
	}
	other, err := named.Lookup(name)
	if err != nil || out.Quantity != "temperature" {
		return ""
	}
	if _, err := other.At(out.Value, p); err != nil {
		return ""
	}
	return fmt.Sprintf("; there it is a %s, %q", other.Phase(), other.Name())
}

func celsius(T float64) string { return figures(T-273.15, 5) }

// figures rounds to so many significant digits, but to no more than nine decimals, which
// is what a conversion from °C leaves sure.
func figures(x float64, digits int) string {
	if x == 0 || math.IsInf(x, 0) {
		return decimals(x, 0)
	}
	text := decimals(x, min(9, digits-1-int(math.Floor(math.Log10(math.Abs(x))))))
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	return text
}
