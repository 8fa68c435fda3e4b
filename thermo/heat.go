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
	a, b, err := ends(f, m, T1, p1, T2, p2)
	if err != nil {
		return 0, err
	}
	return m * (b.Enthalpy - a.Enthalpy), nil
}

// OpenVesselHeat returns the heat in J that a mass m in kg takes up between T1
// and T2 in a vessel held at the constant pressure p: ΔH = m · (h(T2, p) − h(T1, p)).
// Its errors are those of [StreamHeat].
func OpenVesselHeat(f Fluid, m, T1, T2, p float64) (float64, error) {
	return StreamHeat(f, m, T1, p, T2, p)
}

// RigidVesselHeat returns the heat in J that a closed vessel of constant volume
// V in m³ takes up when its gas, at T1 and p1 before, reaches T2:
//
//	ΔU = m · (u(T2, p2) − u(T1, p1)),   m = ρ(T1, p1) · V
//
// and the pressure p2 in Pa that it ends at, where the density is what it was.
// V must be finite and not negative. The error is a *[RangeError] where f has no
// properties at one of the states. Only for a gas, whose density follows its
// pressure: a vessel full of a nearly incompressible liquid has no answer here.
func RigidVesselHeat(f Fluid, V, T1, p1, T2 float64) (heat, p2 float64, err error) {
	if f.Phase() != Gas {
		return 0, 0, fmt.Errorf("rigid vessel: %s is a %s; only a gas can be heated at constant volume here", f.Name(), f.Phase())
	}
	if err := amount("volume", V, "m³"); err != nil {
		return 0, 0, err
	}
	a, err := f.At(T1, p1)
	if err != nil {
		return 0, 0, err
	}
	b, p2, err := isochore(f, a.Density, T2, p1*T2/T1)
	if err != nil {
		return 0, 0, err
	}
	return a.Density * V * (b.InternalEnergy - a.InternalEnergy), p2, nil
}

// isochore finds the pressure at which f has the given density at T, from the
// guess p. Density is nearly proportional to pressure, so scaling converges fast.
func isochore(f Fluid, density, T, p float64) (Properties, float64, error) {
	for range 100 {
		s, err := f.At(T, p)
		if err != nil {
			return Properties{}, 0, err
		}
		ratio := density / s.Density
		if ratio > 1-1e-13 && ratio < 1+1e-13 {
			return s, p, nil
		}
		p *= ratio
	}
	return Properties{}, 0, fmt.Errorf("rigid vessel: no pressure found at which %s has %g kg/m³ at %g K", f.Name(), density, T)
}

func ends(f Fluid, m, T1, p1, T2, p2 float64) (a, b Properties, err error) {
	if err = amount("mass", m, "kg or kg/s"); err != nil {
		return a, b, err
	}
	if a, err = f.At(T1, p1); err != nil {
		return a, b, err
	}
	b, err = f.At(T2, p2)
	return a, b, err
}

// amount refuses a negative, infinite or missing amount.
func amount(what string, v float64, unit string) error {
	if v >= 0 && v-v == 0 {
		return nil
	}
	return fmt.Errorf("%s of %g %s: it must be finite and not negative", what, v, unit)
}
