package site

import (
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/table"
	"heatreeve/thermo/unit"
)

// tabled is a fluid by a table of its own: temperature, cp and density a row.
func tabled(r *reader, d declaration) thermo.Fluid {
	v := d.v
	o := v.object("fluids.*.table")
	before := len(v.faults)
	var source string
	if s, ok := o.need("source", "where the figures come from, such as a data sheet with its date"); ok {
		source, _ = s.text()
	}
	opts := r.tableOptions(o)
	ps, ok := o.need("points", "rows of temperature, cp and density: - [20 °C, 4.18 kJ/(kg K), 998 kg/m3]")
	if !ok {
		return nil
	}
	points := tablePoints(ps)
	if len(v.faults) > before {
		return nil
	}
	f, err := table.New(d.name, source, points, opts)
	if err != nil {
		for text := range strings.Lines(err.Error()) {
			ps.fault("%s", strings.TrimSpace(text))
		}
		return nil
	}
	return f
}

// tableOptions reads what stands beside the rows.
func (r *reader) tableOptions(o object) table.Options {
	var opts table.Options
	if v, ok := o.need("phase", "liquid, gas or solid"); ok {
		opts.Phase = phase(v)
	}
	if v, ok := o.get("pressure"); ok {
		opts.Pressure = r.constant(v, unit.Pressure)
	}
	if v, ok := o.get("max_pressure"); ok {
		opts.MaxP = r.constant(v, unit.Pressure)
	}
	if v, ok := o.get("freezing"); ok {
		opts.Freezing = r.constant(v, unit.Temperature)
	}
	if v, ok := o.get("boiling"); ok {
		opts.Boiling = r.constant(v, unit.Temperature)
	}
	if v, ok := o.get("range"); ok {
		if lo, hi, ok := r.span(v, kelvin); ok {
			opts.MinT, opts.MaxT = lo, hi
		}
	}
	if v, ok := o.get("uncertainty"); ok {
		u := v.object("fluids.*.table.uncertainty")
		opts.CpUncertainty, opts.DensityUncertainty = u.relative("cp"), u.relative("density")
	}
	return opts
}

// relative reads a relative standard uncertainty; 0 means that none is given.
func (o object) relative(key string) float64 {
	v, ok := o.get(key)
	if !ok {
		return 0
	}
	u, _ := v.within(1e-6, 0.2, "more than 0 % up to 20 %", unit.Ratio)
	return u
}

func phase(v value) thermo.Phase {
	switch s, _ := v.oneOf("liquid", "gas", "solid"); s {
	case "liquid":
		return thermo.Liquid
	case "gas":
		return thermo.Gas
	case "solid":
		return thermo.Solid
	}
	return 0
}

func tablePoints(v value) []table.Point {
	var points []table.Point
	for _, row := range v.items() {
		cells := row.items()
		if len(cells) != 3 {
			if cells != nil {
				row.fault("want three quantities, temperature, cp and density, found %d", len(cells))
			}
			continue
		}
		T, _ := cells[0].quantity(unit.Temperature)
		cp, _ := cells[1].quantity(unit.SpecificHeat)
		rho, _ := cells[2].quantity(unit.Density)
		points = append(points, table.Point{T: T.SI(), Cp: cp.SI(), Density: rho.SI()})
	}
	return points
}
