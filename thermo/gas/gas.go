// Package gas holds gases and their mixtures, by three models and the best of them.
//
// [Ideal] takes the NASA-9 polynomials of 22 species (McBride, Zehe, Gordon,
// NASA/TP-2002-211556): h and cp depend on temperature alone, the density is pM/(RT), cp − cv
// = R/M. Against NIST-JANAF, TRC and the ideal part of reference equations up to 1500 K cp
// lies within 0.2 %, but for H2O and SO2 0.5 %, H2S 0.7 %, NH3 0.9 %, N2O 1.3 %, NO2 2.1 % and
// CH4 5 %, each at 1500 K and against the older table; propane 0.5 %; H2O falls 1.1 % behind
// IAPWS-IF97 at 2000 K. Each gas has a pressure above which it is refused: where, at 300 K,
// the ideal cp would miss the real one by 1.5 % or the ideal density by 2 %, but never below
// 120 kPa and never above 3 MPa. For dry air that is 944 kPa.
//
// [PengRobinson] adds the residuals of the equation of state of Peng and Robinson (1976) with
// kij = 0, up to 100 bar. Where it is hot and their attraction would turn, it fades out instead.
// Against the reference equations of 12 gases, water vapour and air: in the table of states
// above 1.3 times the critical temperature cp lies within 2.0 % and density within 2.6 %; in the
// whole of that range, to 100 bar and 200 K, within 4.5 % and 4.1 %; below, down to the dew
// point or, at higher pressures, to a limit that rises with pressure, within 7.3 % and 4.4 %,
// but carbon dioxide, water vapour and ammonia near their dew points 14 % in cp. Moist air under
// pressure: cp 9.3 % low of IAPWS G8-10 at 134.7 °C, 440 kPa and a humidity ratio of 1.25, where
// the uncertainty is 6 %.
//
// [Reference] takes the reference equation of state of one gas, or of dry air, from package
// helmholtz, and IAPWS-IF97 for water vapour.
//
// [Best] is the reference equation where there is one, above its highest temperature up to 100
// bar its residuals carried on with the polynomials for the ideal part, so that h, u and
// density have no step and every derivative its law; all other gases and mixtures are by Peng
// and Robinson. All models have the enthalpy 0 for the thin gas at 298.15 K.
//
// Every model says what uncertainty is left at a state. That of the simpler ones holds their
// deviations from the reference equations, and of moist air from IAPWS G8-10, within twice its
// size.
//
// The range is 200 K to 2000 K, lower for reference equations, from 1 Pa on. The polynomials
// run to 6000 K, but were checked to 1500 K, and composition is frozen: no dissociation of hot
// flue gas, no cracking of fuels. A mixture is refused below the temperature where its first
// component would condense or freeze out at its partial pressure: water by IAPWS-IF97, ice and
// carbon dioxide snow by a sublimation line within half a kelvin, all others by corresponding
// states within 1.6 K at atmospheric pressure. Hydrocarbons, carbon dioxide and the other
// gases without a dipole condense together, by Raoult. Not modelled: that gases dissolve in
// water, and acids: the acid dew point of a flue gas with sulfur lies far above that of water.
// Nitrogen dioxide is the single molecule, and refused where it pairs to N2O4 enough to tell
// in the heat capacity. Hydrogen below 250 K is taken at the equilibrium of ortho and para but
// for the reference equation.
package gas
