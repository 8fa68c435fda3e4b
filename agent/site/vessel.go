package site

import (
	"time"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

func (r *reader) vessel(o object) *Vessel {
	x := &Vessel{Over: 10 * time.Minute, Still: 0.01}
	if v, ok := o.need("fluid", "a declared fluid, or a built-in one such as water or dry air"); ok {
		x.FluidName, x.Fluid = r.fluid(v)
		if _, humid := x.Fluid.(thermo.Humid); humid {
			v.fault("has no humidity of its own, and a vessel measures none; declare it, such as {moist air: {relative humidity: 50 %%, at: 25 °C}}")
		}
	}
	x.Margin = DefaultMargin(x.Fluid)
	x.Temperature, _ = r.needSource(o, "temperature", "the tag of the content's temperature", unit.Temperature)
	if v, ok := o.get("temperature"); ok && x.Temperature.Value > 0 {
		v.fault("is a constant, and tells no heat; want a tag")
	}
	x.Pressure, _ = r.needSource(o, "pressure", "a tag, or a constant such as 3 barg may stand", unit.Pressure)
	x.Content, x.ContentKind = r.needSource(o, "content", "how much there is: a constant such as 12 t or 3 m3, or a tag", unit.Mass, unit.Volume)
	if v, ok := o.get("rigid"); ok {
		x.Rigid = v.truth()
	}
	x.Gives = o.service("vessel", "heat (a store that is drawn from)", "heat (a batch that is heated)")
	if v, ok := o.get("shell"); ok {
		x.Shell = v.heatCapacity(r.typical(0, x.Temperature, roomTemperature))
	}
	o.setDuration("over", &x.Over, 10*time.Second, day, "10 s to 1 d")
	if v, ok := o.get("still"); ok {
		x.Still, _ = v.part(0, 1, "0 % to 100 %", "")
	}
	if v, ok := o.get("margin"); ok {
		x.Margin, _ = v.within(0, 100, "0 K to 100 K", unit.TemperatureDifference)
	}
	if v, ok := o.get("idle_below"); ok {
		x.IdleBelow = notNegative(v, unit.Power)
	}
	if x.Fluid != nil {
		o.checkVessel(x, r.site.Timing.Grid)
	}
	return x
}

// checkVessel looks at what does not go together.
func (o object) checkVessel(x *Vessel, grid time.Duration) {
	pressureFits(x.Fluid, o, "pressure", x.Pressure.Value)
	rigid, told := o.get("rigid")
	switch gas := x.Fluid.Phase() == thermo.Gas; {
	case x.Rigid && !gas:
		rigid.fault("is of a gas, and %q is a %v: its heat is told by its temperature at any pressure; leave it out", x.FluidName, x.Fluid.Phase())
	case gas && !told && o.node.Kind == yaml.MappingNode && !o.misspelt([]string{"rigid"}):
		o.fault("does not say whether the gas keeps its volume; want rigid: true, or rigid: false for a vessel that keeps its pressure")
	case x.Rigid && x.ContentKind == unit.Volume && x.Pressure.Value > 0:
		v, _ := o.get("pressure")
		v.fault("is a constant, and the mass of a gas in a rigid vessel is not told by its volume then; want the tag of its pressure, or the content by mass")
	}
	if v, ok := o.get("over"); ok && x.Over < 3*grid {
		v.fault("%v has no room for three readings on a grid of %v", x.Over, grid)
	}
}

// truth reads true or false.
func (v value) truth() (is bool) {
	if v.node.ShortTag() != "!!bool" || v.node.Decode(&is) != nil {
		v.fault("want true or false, found %s", v.kind())
	}
	return is
}
