// Package oil holds petroleum and heat-transfer liquids.
//
// A petroleum liquid is known by its density at 15 °C and, better, its Watson factor. cp is
// by Kesler and Lee (1976) where the Watson factor is known: it takes both, and its form is
// what the handbooks of the trade went on with. Where only the density is known cp is by
// Cragoe (1929), which asks for no more. Density is by the volume correction of ASTM
// D1250-80 (ISO 91) for the product's group, -18 °C to 150 °C.
//
// The four published correlations of cp differ by up to 6.4 % over the states of the tests;
// the spread at a state, but at least 5 %, is the uncertainty there. The volume correction
// repeats the outside figures to 5e-7, and its 15 °C and 60 °F forms agree within 9e-5 from
// 0 °C to 100 °C above 640 kg/m³ (transition group 5e-4).
//
// Heat-transfer liquids are tables of their makers, between whose rows package table's
// cubics hold; a vapour pressure gives the boiling point where one is printed. Drawn
// through every other row they miss the row between by 0.04 % of cp, of the mineral oils,
// which are printed to 10 J/(kg K), by up to 0.37 % (straight lines 0.29 %). The mineral
// oils can be held against Cragoe: A within 0.6 %, while B rises faster and Cragoe is 13 %
// below at 320 °C; so much goes into its uncertainty.
//
// Liquids are taken for incompressible: cv is cp, and the enthalpy keeps its pressure term,
// that of the middle of the range at every temperature so that (∂h/∂T)p is cp:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT)
//
// Not modelled: the boiling of a petroleum cut, whose light ends nothing here tells (Span
// has no upper end: keep it under pressure), wax and pour point, water in oil, blends of
// groups, and the ageing of heat-transfer liquids.
package oil

const (
	zeroC       = 273.15
	maxPressure = 2.5e6 // Pa
)
