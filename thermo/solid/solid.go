// Package solid holds common solids: metals, minerals, building and organic matter, to
// account for the heat of what stands, lies or moves through a plant.
//
// Three kinds of source: the NIST-JANAF tables of five pure substances, 200 K to 900 K; two
// formulas of the Eurocodes, for carbon steel (20 °C to 600 °C) and dry concrete; handbook
// figures of twelve solids at one temperature, taken for constant over some tens of kelvins
// around it. The JANAF tables are met in cp and in enthalpy. From memory, and so confirmed
// by nothing that was opened again, are the Eurocode formulas, the handbook figures, all
// densities and the melting points.
//
// Found: every row of the sources in cp, density and enthalpy, to the digits printed; only
// that of quartz at 900 K is refused, as β. The cubics of package table, drawn through the
// JANAF cp alone, miss JANAF's enthalpies by less than 0.08 % (alumina near 200 K 0.34 %),
// trapezoids by up to 0.9 %.
//
// A solid is incompressible: cv is cp, density is constant, and the enthalpy rises with
// pressure by v Δp. Span ends at the melting point where one is known.
//
// Not modelled: a change within the solid (the peak of carbon steel near 735 °C, quartz
// from α to β near 847 K: the ranges end before), moisture and its evaporation, thermal
// expansion, porosity beyond the bulk density of loose or porous matter, and alloys other
// than those named.
package solid

import (
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/roster"
	"heatreeve/thermo/table"
)

const maxPressure = 10e6 // Pa: no solid here minds it

// description is a solid ready to be made.
type description struct {
	name, source string
	points       []table.Point // rows, or
	cp           []float64     // a polynomial in T − 273.15 K,
	density      float64       // with its density in kg/m³
	options      table.Options // but for phase and pressure
	cpHalf       float64       // half-width of cp, as a fraction,
	drift, at    float64       // which grows by drift per K away from the temperature at, in K
	densityHalf  float64       // half-width of density, as a fraction
}

// maker is a solid of whichever source.
type maker interface{ make() description }

func makers() []maker {
	var all []maker
	for k := range janaf {
		all = append(all, &janaf[k])
	}
	all = append(all, carbonSteel{}, dryConcrete{})
	for k := range handbook {
		all = append(all, &handbook[k])
	}
	return all
}

// Names returns the names that New knows.
func Names() []string {
	var out []string
	for _, m := range makers() {
		out = append(out, m.make().name)
	}
	return out
}

// also are other names of solids.
var also = map[string]string{
	"aluminum": "aluminium", "Al": "aluminium", "Cu": "copper", "Fe": "iron", "Pb": "lead",
	"silica": "quartz", "corundum": "alumina", "Al2O3": "alumina", "steel": "carbon steel", "mild steel": "carbon steel",
	"concrete": "dry concrete", "concrete, dry": "dry concrete", "concrete dry": "dry concrete",
	"stainless steel": "stainless steel 304", "304": "stainless steel 304", "brass": "brass 70/30", "brass 70 30": "brass 70/30",
	"glass": "soda-lime glass", "glass soda lime": "soda-lime glass", "brick": "common brick", "brick common": "common brick",
	"sand": "dry sand", "sand dry": "dry sand", "coal": "bituminous coal", "coal bituminous": "bituminous coal",
	"oak": "oak wood", "wood": "oak wood", "polyethylene": "high-density polyethylene", "HDPE": "high-density polyethylene", "polyethylene hd": "high-density polyethylene",
}

// New returns the solid of that name, in any case, with spaces or hyphens. The error of an
// unknown name tells the near ones and all of them.
func New(name string) (thermo.Fluid, error) {
	k, err := roster.Find("solid", name, Names(), also)
	if err != nil {
		return nil, err
	}
	d := makers()[k].make()
	return d.solid()
}

// solid is a table or polynomial with an uncertainty of its own.
type solid struct {
	thermo.Compressed
	cpHalf, drift, at, densityU float64
}

// Uncertainty takes the stated half-widths for rectangular, u = half-width/√3. That of cp
// is 1 % for the JANAF tables, and 5 % for what is from memory, 10 % where it is organic. A
// constant cp is worse away from its temperature, by 0.08 % a kelvin for metals, 0.2 % for
// minerals, 0.4 % for ice and organic matter (from memory of how their cp rises). Density
// is known to 5 %, to 10 % where it is that of loose or grown matter.
func (s *solid) Uncertainty(T, p float64) (cp, density float64) {
	return (s.cpHalf + s.drift*math.Abs(T-s.at)) / math.Sqrt(3), s.densityU
}

func (d *description) solid() (thermo.Fluid, error) {
	o := d.options
	o.Phase = thermo.Solid
	if o.MaxP == 0 {
		o.MaxP = maxPressure
	}
	var f thermo.Fluid
	var err error
	if d.cp != nil {
		f, err = table.Polynomial(d.name, d.source, d.cp, []float64{d.density}, o)
	} else {
		f, err = table.New(d.name, d.source, d.points, o)
	}
	if err != nil {
		return nil, err
	}
	return &solid{f.(thermo.Compressed), d.cpHalf, d.drift, d.at, d.densityHalf / math.Sqrt(3)}, nil
}
