package site

import (
	"strings"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
	"heatreeve/thermo/unit"
)

// standardPressure is that of moist air in a file that tells no other, in Pa.
const standardPressure = 101325

// moistAir reads air of a fixed humidity, such as {relative humidity: 50 %, at: 25 °C}.
// The pressure is the barometer unless given, and without one the standard
// atmosphere; a dew point and a humidity ratio need no temperature.
func moistAir(r *reader, d declaration) thermo.Fluid {
	if d.v.node.Kind != yaml.MappingNode {
		d.v.fault("want how humid the air is, such as {relative humidity: 50 %%, at: 25 °C}, found %s", d.v.kind())
		return nil
	}
	before := len(d.v.faults)
	o := d.v.object("fluids.*.moist air")
	var m thermo.Moisture
	for _, w := range measures {
		key := strings.ReplaceAll(w.key, "_", " ")
		v, ok := o.get(key)
		switch {
		case !ok:
		case m.Kind != 0:
			v.fault("is one measure too many; want one of: %s", strings.Join(airMeasures(), ", "))
		default:
			m.Kind = w.kind
			if q, ok := v.quantity(w.is); ok && v.inUnits(q.Unit, w.symbols) && w.check(v, q, 0) {
				m.Value = unit.Decimal(q.SI())
			}
		}
	}
	T, p := r.airState(o, m)
	if m.Kind == 0 && !o.misspelt(airMeasures()) {
		o.fault("does not say how humid the air is; want one of: %s", strings.Join(airMeasures(), ", "))
	}
	if len(d.v.faults) > before {
		return nil
	}
	w, err := air.HumidityRatio(m, T, p)
	if err == nil {
		var f thermo.Fluid
		if f, err = air.Moist(w); err == nil {
			return f
		}
	}
	d.v.fault("%v", err)
	return nil
}

// airState reads where the humidity of air was measured, K and Pa.
func (r *reader) airState(o object, m thermo.Moisture) (T, p float64) {
	T, p = 293.15, standardPressure
	if r.site.Barometer > 0 {
		p = r.site.Barometer
	}
	if v, ok := o.get("pressure"); ok {
		p = r.constant(v, unit.Pressure)
	}
	switch v, ok := o.get("at"); {
	case ok:
		T = r.constant(v, unit.Temperature)
	case m.Kind == thermo.DewPoint:
		T = m.Value
	case m.Kind == thermo.RelativeHumidity, m.Kind == thermo.WetBulb:
		o.need("at", "the temperature where the humidity is so, such as at: 25 °C")
	case m.Kind == thermo.HumidityRatio:
		T = 373.15 // where no ratio that is allowed condenses
	}
	return T, p
}

// airMeasures are the measures as a declaration writes them.
func airMeasures() []string {
	var names []string
	for _, key := range measureKeys() {
		names = append(names, strings.ReplaceAll(key, "_", " "))
	}
	return names
}
