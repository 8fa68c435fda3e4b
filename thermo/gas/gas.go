// Package gas holds gases and their mixtures: by the NASA-9 polynomials as ideal gases, and with
// the equation of state of Peng and Robinson under pressure.
//
// The enthalpy and cp of an ideal gas depend on temperature alone, its density is
// pM/(RT) and cp − cv = R/M. What that leaves out grows with
// pressure, so each gas has a pressure above which it is refused: where, at
// 300 K, the ideal cp would miss the real one by 1.5 % or the ideal density by
// 2 %, but never below 120 kPa and never above 3 MPa. For dry air that is
// 944 kPa. Mixtures weigh the deviations of their components by mole fraction.
// [thermo.Fluid.Uncertainty] says what is left at a state.
//
// The range is 200 K to 2000 K. The polynomials run to 6000 K, but were checked
// to 1500 K, and composition is frozen: no dissociation of hot flue gas, no
// cracking of fuels. A mixture is refused below the temperature where its
// first component would condense or freeze out: water by IAPWS-IF97, ice and carbon dioxide snow by
// a sublimation line within half a kelvin, all others by corresponding states within 1.5 K at
// atmospheric pressure. Acids are not modelled: the acid dew point of
// a flue gas with sulfur lies far above that of water. Nitrogen dioxide is the single
// molecule, and refused where it pairs to N2O4 enough to tell in the heat capacity.
package gas
