package site

import (
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/table"
	"heatreeve/thermo/unit"
)

// tabled is a fluid by a table of its own: temperature, cp and density a row, and for
// a liquid, if it is known, the vapour pressure.
func tabled(r *reader, d declaration) thermo.Fluid {
	before := len(d.v.faults)
	o := d.v.object("fluids.*.table")
	source, opts := r.described(o)
	ps, ok := o.need("points", "rows of temperature, cp and density: - [20 °C, 4.18 kJ/(kg K), 998 kg/m3]")
	if !ok {
		return nil
	}
	points := r.tablePoints(ps)
	if len(d.v.faults) > before {
		return nil
	}
	f, err := table.New(d.name, source, points, opts)
	if err == nil {
		o.checkMolarMass(f, opts.Pressure)
	}
	return ps.made(f, err)
}

// polynomial is a fluid by coefficients of its own in t = T − 273.15 K, lowest power first:
// cp in J/(kg K) and density in kg/m³.
func polynomial(r *reader, d declaration) thermo.Fluid {
	before := len(d.v.faults)
	o := d.v.object("fluids.*.polynomial")
	source, opts := r.described(o)
	cp := o.coefficients("cp", "coefficients of cp in J/(kg K) by powers of t in °C, the constant first: [1880, 3.6]")
	density := o.coefficients("density", "coefficients of density in kg/m3 by powers of t in °C, the constant first: [881, -0.65]")
	o.need("range", "how far the polynomials hold, such as [20 °C, 300 °C]")
	if len(d.v.faults) > before {
		return nil
	}
	f, err := table.Polynomial(d.name, source, cp, density, opts)
	if err == nil {
		o.checkMolarMass(f, opts.Pressure)
	}
	return d.v.made(f, err)
}

// made is the fluid, or nil with a fault for each line of the error.
func (v value) made(f thermo.Fluid, err error) thermo.Fluid {
	if err == nil {
		return f
	}
	for text := range strings.Lines(err.Error()) {
		v.fault("%s", strings.TrimPrefix(strings.TrimSpace(text), v.path[strings.LastIndex(v.path, ".")+1:]+": "))
	}
	return nil
}

// coefficients reads a list of bare numbers: their units differ from power to power.
func (o object) coefficients(key, say string) []float64 {
	v, ok := o.need(key, say)
	if !ok {
		return nil
	}
	var all []float64
	for _, c := range v.items() {
		if x, ok := c.bare(); ok {
			all = append(all, x)
		}
	}
	return all
}

// described reads what stands beside the figures.
func (r *reader) described(o object) (source string, opts table.Options) {
	if s, ok := o.need("source", "where the figures come from, such as a data sheet with its date"); ok {
		source, _ = s.text()
	}
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
	opts.MolarMass = o.readMolarMass(opts.Phase)
	if v, ok := o.get("range"); ok {
		if lo, hi, ok := r.span(v, kelvin); ok {
			opts.MinT, opts.MaxT = unit.Decimal(lo), unit.Decimal(hi)
		}
	}
	if v, ok := o.get("uncertainty"); ok {
		u := v.object("fluids.*.table.uncertainty")
		opts.CpUncertainty, opts.DensityUncertainty = u.relative("cp"), u.relative("density")
	}
	return source, opts
}

// relative reads a relative standard uncertainty; 0 means that none is given.
func (o object) relative(key string) float64 {
	v, ok := o.get(key)
	if !ok {
		return 0
	}
	u, _ := v.part(1e-6, 0.2, "more than 0 % up to 20 %", "")
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

func (r *reader) tablePoints(v value) []table.Point {
	var points []table.Point
	for _, row := range v.items() {
		cells := row.items()
		if len(cells) != 3 && len(cells) != 4 {
			if cells != nil {
				row.fault("want three quantities, temperature, cp and density, or four with the vapour pressure, found %d", len(cells))
			}
			continue
		}
		T, _ := cells[0].quantity(unit.Temperature)
		cp, _ := cells[1].quantity(unit.SpecificHeat)
		rho, _ := cells[2].quantity(unit.Density)
		p := table.Point{T: unit.Decimal(T.SI()), Cp: cp.SI(), Density: rho.SI()}
		if len(cells) == 4 {
			p.VapourPressure = r.constant(cells[3], unit.Pressure)
		}
		points = append(points, p)
	}
	return points
}
