package aqueous

import "math"

// deviation is the largest found between the polynomials and the references near
// the temperature T in K, over all concentrations, in per cent of cp and of
// density.
//
// References are the ASHRAE tables (glycols), the model of Laliberté (ethanol and
// the salts) and IAPWS G4-01 (ammonia, down to -55 °C). Melinder's own tables are no
// independent check: where there is nothing else, cp is taken to be within 2 % and
// density within 0.5 %, which is what Melinder states (from memory), or within what
// the tables show if that is more. Potassium carbonate has references of cp only at
// 5 % by mass and lithium chloride to 15 %: there 2 % stands too.
//
// Two figures are our own judgement: 3 % for lithium chloride at 5 °C, where the
// deviation grows with strength to 2.1 % at 15 %, and 3 % for methanol at -10 °C, where
// the drift over temperature, 0.1 % per kelvin, leads on downwards.
type deviation struct{ T, cp, density float64 }

// Beyond the first and the last reference the deviation goes on growing as it did,
// and at least by these rates in per cent per kelvin: common practice, no
// source. Ethylene glycol shows 0.07 below 0 °C, methanol 0.1.
const (
	cpGrowth      = 0.05
	densityGrowth = 0.01
)

// What the references themselves leave open, standard uncertainties as
// fractions by our own judgement.
const (
	cpReference      = 0.005
	densityReference = 0.0005
)

// fitUncertainty returns the relative standard uncertainties at T: the deviation d,
// linear between the tabulated temperatures, as a rectangular half-width, d/√3,
// and that of the references.
func fitUncertainty(ds []deviation, T float64) (cp, density float64) {
	d := deviationAt(ds, T)
	return math.Hypot(d.cp/100/math.Sqrt(3), cpReference), math.Hypot(d.density/100/math.Sqrt(3), densityReference)
}

func deviationAt(ds []deviation, T float64) deviation {
	first, last := ds[0], ds[len(ds)-1]
	switch {
	case T < first.T:
		return first.beyond(ds[1], T)
	case T > last.T:
		return last.beyond(ds[len(ds)-2], T)
	}
	k := 1
	for k < len(ds)-1 && T > ds[k].T {
		k++
	}
	a, b := ds[k-1], ds[k]
	w := (T - a.T) / (b.T - a.T)
	return deviation{T, a.cp + w*(b.cp-a.cp), a.density + w*(b.density-a.density)}
}

// beyond extrapolates from the end d of the table, inner being the one next to it.
func (d deviation) beyond(inner deviation, T float64) deviation {
	far, step := math.Abs(T-d.T), math.Abs(d.T-inner.T)
	return deviation{
		T,
		d.cp + far*max(cpGrowth, (d.cp-inner.cp)/step),
		d.density + far*max(densityGrowth, (d.density-inner.density)/step),
	}
}
