// Package oil holds petroleum and heat-transfer liquids.
//
// A petroleum liquid is known by its density at 15 °C and, better, its Watson factor. cp is
// by Kesler and Lee (1976) where the Watson factor is known: it takes both, and its form is
// what the handbooks of the trade went on with. Where only the density is known cp is by
// Cragoe (1929), which asks for no more, and outside of its range by Kesler and Lee at a
// Watson factor usual in the group, with a wide uncertainty. Density is by the volume
// correction of ASTM D1250-80 (ISO 91) for the product's group, -18 °C to 150 °C.
//
// The four published correlations of cp differ by up to 6.4 % over the states of the tests,
// whose Watson factors are those of the trade; over all densities from 640 kg/m³ to 1050
// kg/m³ and Watson factors from 10 to 13 one of the others is up to 17.5 % away from Kesler
// and Lee. The spread at a state, but at least 5 %, is the uncertainty there. The volume
// correction repeats the outside figures to 5e-7, and its 15 °C and 60 °F forms agree
// within 9e-5 from 0 °C to 100 °C above 640 kg/m³ (transition group 5e-4).
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
// Towards the ends of the range the term has another size. An enthalpy difference over a
// change of pressure is off there, in kJ/kg per MPa, by up to 0.98 for the eutectic (at 397
// °C, where the true term is as large as ours and of the other sign), 0.50 for the
// terphenyl, 0.86 and 0.20 for mineral oils A and B, 0.05 to 0.11 for fuel oil and kerosene,
// 0.25 to 0.35 for gasoline. That cp falls with pressure, which is the other side of it, is
// in the uncertainty of cp, and the compression of petroleum (API MPMS 11.2.1M) in that of
// its density.
//
// A petroleum cut of known Watson factor ends 30 K before a substance of its mean boiling
// point boils, by Lee and Kesler (1975). That is a guard and not a bubble point: a gasoline
// of the whole range boils some 60 K before, and a crude oil with gas in it anywhere.
// Without the Watson factor nothing is known of it; keep such a liquid under pressure.
//
// Not modelled: light ends beyond that margin, wax and pour point, water in oil, blends of
// groups, and the ageing of heat-transfer liquids.
package oil

const (
	zeroC       = 273.15
	maxPressure = 2.5e6 // Pa
)
