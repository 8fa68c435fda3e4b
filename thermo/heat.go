package thermo

import "fmt"

// StreamHeat returns the heat in W that an open stream of mass flow m in kg/s
// takes up between its inlet and its outlet:
//
//	Q = m · (h(T2, p2) − h(T1, p1))
//
// Positive when the stream is heated. With m in kg the result is in J, for a
// batch whose pressure is that of its surroundings. m must be finite and not
// negative. The error is a *[RangeError] where f has no properties at one of
// the states. Kinetic and potential energy are left out.
func StreamHeat(f Fluid, m, T1, p1, T2, p2 float64) (float64, error) {
	if !(m >= 0 && m-m == 0) {
		return 0, fmt.Errorf("mass of %g kg or kg/s: it must be finite and not negative", m)
	}
	a, err := f.At(T1, p1)
	if err != nil {
		return 0, err
	}
	b, err := f.At(T2, p2)
	if err != nil {
		return 0, err
	}
	return m * (b.Enthalpy - a.Enthalpy), nil
}
