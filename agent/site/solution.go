package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/seawater"
	"heatreeve/thermo/unit"
)

// solution reads a solute in water, such as {propylene glycol: 32 %, by: volume};
// without by the share is by mass. The uncertainty is the standard uncertainty of the
// strength, in the same percent; without one the strength is taken as exact.
func solution(solute string) func(*reader, declaration) thermo.Fluid {
	return func(_ *reader, d declaration) thermo.Fluid {
		mix, read := aqueous.New, byMass
		if v, given := d.o.get("by"); given {
			by, ok := v.oneOf("mass", "volume")
			if !ok {
				return nil
			}
			if by == "volume" {
				mix, read = aqueous.NewByVolume, byVolume(", or by: mass in the place of by: volume")
			}
		}
		x, ok := read(d.v, 0, 1, "0 % to 100 %")
		if !ok {
			return nil
		}
		var u float64
		if v, given := d.o.get("uncertainty"); given {
			if u, ok = read(v, 0, 0.1, "0 % to 10 %"); !ok {
				return nil
			}
		}
		f, err := mix(solute, x, u)
		if err != nil {
			d.v.fault("%v", err)
			return nil
		}
		return f
	}
}

// saltWater reads seawater by its absolute salinity, such as 35 g/kg.
func saltWater(_ *reader, d declaration) thermo.Fluid {
	q, ok := d.v.quantity(unit.Ratio)
	if !ok {
		return nil
	}
	f, err := seawater.New(unit.Decimal(q.SI()))
	return d.v.made(f, err)
}
