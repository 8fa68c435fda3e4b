package site

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/oil"
	"heatreeve/thermo/unit"
)

// petroleum reads a petroleum liquid by its density at 15 °C or its API gravity, such as
// {density: 870 kg/m3, watson: 11.8, group: fuel oil}. Without a group it is the
// distillate of its density; without a Watson factor cp is known by the density alone.
func petroleum(_ *reader, d declaration) thermo.Fluid {
	before := len(d.v.faults)
	o := d.v.object("fluids.*.petroleum")
	var group string
	if v, ok := o.get("group"); ok {
		group = productGroup(v)
	}
	var watson float64
	if v, ok := o.get("watson"); ok {
		watson = v.bareWithin(1, 100)
	}
	density := o.density15(group)
	if len(d.v.faults) > before {
		return nil
	}
	f, err := oil.Petroleum(density, watson, group)
	if err != nil && group != "" {
		err = fmt.Errorf("%w; without a group the density tells it", err)
	}
	return d.v.made(f, err)
}

// productGroup reads a group or another name of one, such as diesel. It is "" where
// there is a fault.
func productGroup(v value) string {
	s, ok := v.text()
	if !ok {
		return ""
	}
	group, err := oil.Group(s)
	if err != nil {
		v.fault("%v", err)
	}
	return group
}

// density15 reads the density in kg/m³ at 15 °C, or what stands for it.
func (o object) density15(group string) float64 {
	density, isDensity := o.get("density")
	api, isAPI := o.get("api gravity")
	switch {
	case isDensity && isAPI:
		api.fault("stands beside density; one of the two is enough")
	case isDensity:
		q, _ := density.quantity(unit.Density)
		return unit.Decimal(q.SI())
	case isAPI:
		before := len(api.faults)
		gravity := api.bareWithin(-100, 200)
		if len(api.faults) > before {
			return 0
		}
		rho, err := oil.DensityOfAPI(gravity, group)
		if err != nil {
			api.fault("%v", err)
		}
		return rho
	default:
		o.need("density", "the density at 15 °C such as density: 870 kg/m3, or api gravity: 31", "api gravity")
	}
	return 0
}
