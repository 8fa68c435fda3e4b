// Package helmholtz holds reference equations of state: pure gases and dry air in
// the gas and supercritical phase, most of them as liquids too, from a paper
// each.
//
// An equation gives the reduced Helmholtz energy φ(δ, τ) with δ = ρ/ρr and τ =
// Tr/T; pressure, enthalpy and heat capacities are its derivatives, taken
// analytically. The density comes from T and p by a bracketed Newton search on
// the side of the phase. The enthalpy of the ideal gas is 0 at 298.15 K, so that
// other models of the same gas, and gas and liquid here, share their zero.
//
// Range. From the triple temperature to the paper's upper end, at most 1500 K
// (air 2000 K): nitrogen, oxygen, argon, carbon dioxide and helium are taken
// beyond their papers there, where they are all but ideal and their cp was
// compared with JANAF. Pressures from 1 Pa to 100 MPa (oxygen 80, n-butane 12), liquids to
// 50 MPa. The figures of a paper beside each table are from memory, as are the
// volume and page numbers in the sources.
//
//	N2, Ar, CO2, He, O2    to 1500 K     C3H8             to 650 K
//	air                    to 2000 K     C4H10 (n-)       to 575 K
//	H2                     to 1000 K     CO               to 500 K
//	NH3                    to  725 K     CH4, C2H6        to 625, 675 K
//
// Phases. A gas ends at its dew point, a liquid at its boiling point, by the
// auxiliary curves that come with the equations: within 0.055 % in pressure
// (helium 0.3 %) of the equality of the Gibbs energies, some 0.02 K. Above the
// critical pressure gas and liquid meet at the critical temperature. From 0.97 to
// 1.03 of the critical pressure, 0.5 % of the critical temperature on either side
// is refused as too near the critical point: cp has no bound there. A guard of
// 0.3 K/MPa above the triple temperature, steeper than the melting curves (0.07
// to 0.26 K/MPa, from memory), keeps liquids from freezing and dense hydrogen and
// helium from being solid.
//
// Found. 162 states of 11 gases as worked by another evaluator: equal to the six digits given.
// Dry air against python3-iapws, 300 states to 100 MPa: pressure 1e-14, cp 4e-10, enthalpy 1e-14
// of its span. All tables but that of ammonia, as evaluated by python3-iapws: the same, pressure
// of liquids 5e-10. Ammonia gas against the equation of Tillner-Roth (1993), to 8 MPa: pressure
// 0.09 %, cp 2.1 %, at the dew point. Normal boiling points within 0.02 K. Ideal parts against
// JANAF and TRC: 0.07 % of cp for simple gases, 0.3 to 0.6 % for hydrocarbons and ammonia, which
// the stated uncertainty of the thin gas covers. Beyond the upper ends the residuals can be had
// by [Gas.Beyond]; ∂h/∂T is cp within 4e-9 everywhere.
//
// Not modelled: frost and sublimation; mixtures, but for air, whose composition
// is fixed and whose dew line is its own, while its liquid is not given; liquid
// helium; ortho and para hydrogen apart (it is normal hydrogen, 3:1; cold
// hydrogen that turns to para gives off heat which is not in these figures, and
// below some 250 K its cp is another); dissociation; metastable states.
package helmholtz

import (
	"strings"

	"heatreeve/thermo"
)

// pure lists the pure substances.
var pure = []*substance{
	&nitrogen, &oxygen, &argon, &carbonDioxide, &carbonMonoxide, &methane, &ethane,
	&propane, &butane, &hydrogen, &helium, &ammonia,
}

// Formulas returns the formulas that New knows.
func Formulas() []string {
	var out []string
	for _, s := range pure {
		out = append(out, s.formula)
	}
	return out
}

// find knows formulas in any case, and n-butane with its prefix.
func find(formula string) (*substance, bool) {
	for _, s := range pure {
		if strings.EqualFold(formula, s.formula) || strings.EqualFold(formula, "n-"+s.formula) && s == &butane {
			return s, true
		}
	}
	return nil, false
}

// New returns the gas of a formula such as "CO2", in any case; ok is false for
// one that is not in [Formulas].
func New(formula string) (f thermo.Fluid, ok bool) {
	s, ok := find(formula)
	if !ok {
		return nil, false
	}
	return gas(s), true
}

// Air returns dry air.
func Air() thermo.Fluid { return gas(&dryAir) }

// Liquids returns the formulas that Liquid knows: all but helium.
func Liquids() []string {
	var out []string
	for _, s := range pure {
		if s.hasLiquid() {
			out = append(out, s.formula)
		}
	}
	return out
}

// Liquid returns the liquid of a formula, in any case; ok is false for one that is
// not in [Liquids].
func Liquid(formula string) (f thermo.Fluid, ok bool) {
	s, ok := find(formula)
	if !ok || !s.hasLiquid() {
		return nil, false
	}
	return liquid(s), true
}

func (s *substance) hasLiquid() bool { return s.liquid.form != 0 }
