// Package thermo holds the fluids and the heat equations: pure functions in
// SI units, without clock, file, logger or goroutine.
//
// A fluid family has a package of its own below this one and implements
// [Fluid]; package named finds one by the name that an engineer writes. The heat
// of an open stream between two states is
//
//	Q = m · (h(T2, p2) − h(T1, p1))
//
// with h from the fluid's own formulation, never from a constant cp unless a
// user's own table says so. A closed vessel takes up ΔU at constant volume, ΔH at
// constant pressure. Every fluid knows its range and refuses outside it with a
// [*RangeError]; nothing is clamped or extrapolated.
//
// # Which formulation for which fluid
//
// Range, and the largest deviation found against which reference. Each package
// says more, and its tests hold the figures.
//
//   - water, steam: IAPWS-IF97, all regions, 0 °C to 2000 °C and 100 MPa. Every
//     published value to its digits; against IAPWS-95 cp 0.14 % as a liquid, 0.6 % as
//     steam, and more near the critical point.
//   - one gas, dry air: the reference equation of state of 12 gases and air (package
//     helmholtz), from the triple point to the end of its paper: N2, O2, Ar, CO2 and He
//     to 1500 K, air 2000 K, H2 1000 K, NH3 725 K, C2H6 675 K, C3H8 650 K, CH4 625 K,
//     C4H10 575 K, CO 500 K; to 100 MPa (O2 80 MPa, C4H10 12 MPa). To all six digits of
//     162 states worked elsewhere. Beyond, to 2000 K and 10 MPa, with NASA-9 polynomials.
//   - gas mixtures, flue gas: NASA-9 polynomials of 22 species with the residuals of
//     Peng and Robinson, 200 K to 2000 K and 100 bar. Against the reference equations
//     above 1.3 critical temperatures cp 4.5 %, density 4.1 %; below cp 7.3 %, and beside
//     the dew point of carbon dioxide, water and ammonia 14 %; air with as much steam
//     at 4 bar 9.3 %. Thin gases against NIST-JANAF 0.2 %, some polyatomic ones up to
//     2 %, methane 5 % at 1500 K.
//   - moist air: the psychrometric relations of ASHRAE, -50 °C to 200 °C and 300 kPa.
//     Against IAPWS G8-10 cp 0.2 % to 30 °C, 1.7 % at 60 °C saturated, 3.8 % in the worst
//     corner; density 0.5 %.
//   - glycols, alcohols, brines, ammonia in water: Melinder's polynomials, from the
//     freezing point to 100 °C (glycols), 40 °C or 30 °C. Against ASHRAE, Laliberté and
//     IAPWS G4-01 cp 0.4 % to 4.6 %, density 0.05 % to 0.9 %; cold strong ammonia more.
//   - seawater: Sharqawy et al. and Nayar et al., 0 °C to 120 °C, 120 g/kg, 12 MPa.
//     Against TEOS-10 cp 0.30 %, density 0.055 %; brine of 120 g/kg under pressure 0.75 %.
//   - liquid food: Choi and Okos by composition, 0 °C to 150 °C. Its water against
//     IAPWS-IF97: cp 2.1 % low at 0 °C. Melting fat is in the uncertainty alone.
//   - petroleum: Kesler and Lee, or Cragoe, with ASTM D1250, -18 °C to 150 °C. Four
//     correlations differ by up to 6.4 % at the tested states of common Watson factors,
//     by up to 17.5 % over all from 10 to 13; the uncertainty follows the state.
//   - heat-transfer liquids: their makers' tables; solids: NIST-JANAF, Eurocodes and
//     handbook figures.
//   - what its user describes by rows or polynomials, with a stated source.
//
// # Not modelled
//
// Phase change and the heat of it, metastable states, reaction and dissociation,
// the pairing of NO2 (refused where it tells), acid dew points, adsorption, frost,
// inhibitors and other additives, entrained gas or solids, the heat of melting fats, light
// ends of petroleum, pour points, kinetic and potential energy. Liquids without a published
// compressibility are [Incompressible], with cv set to cp.
package thermo
