package site

import (
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// farFromIdeal is how far, as a fraction, the molar mass of a gas may be from what its
// density says as that of an ideal gas: a real one under pressure is that much denser.
const farFromIdeal = 0.2

// readMolarMass reads the molar mass of a gas by figures of its own, kg/mol.
func (o object) readMolarMass(phase thermo.Phase) float64 {
	v, ok := o.get("molar_mass")
	if !ok {
		return 0
	}
	m, _ := v.within(1e-3, 0.999, "1 g/mol to 999 g/mol", unit.MolarMass)
	if phase == thermo.Liquid || phase == thermo.Solid {
		v.fault("is for a gas, whose normal volume it makes a mass; a %s has no use for it", phase)
	}
	return m
}

// checkMolarMass holds a molar mass to the densities of its own gas at p in Pa: ρ·R·T/p at
// either end of its range, one of which must be near.
func (o object) checkMolarMass(f thermo.Fluid, p float64) {
	v, ok := o.get("molar_mass")
	if !ok {
		return
	}
	b, m, nearest := f.Bounds(), f.MolarMass(), 0.0
	lo, hi := f.Span(p)
	for _, T := range [...]float64{max(lo, b.MinT), min(hi, b.MaxT)} {
		s, err := f.At(T, p)
		if err != nil {
			continue
		}
		if ideal := s.Density * thermo.R * T / p; nearest == 0 || math.Abs(ideal/m-1) < math.Abs(nearest/m-1) {
			nearest = ideal
		}
	}
	if nearest > 0 && math.Abs(m/nearest-1) > farFromIdeal {
		v.fault("%.4g g/mol is far from the %.4g g/mol of an ideal gas of these densities at %s; one of molar mass, density and pressure is wrong",
			1e3*m, 1e3*nearest, kilopascal(p))
	}
}
