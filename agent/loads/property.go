package loads

import "math"

// property is what a fluid's own figures leave open at one state: relative standard
// uncertainties of cp and density, and apart from them their signed changes by the
// strength of a mixture, which is one error for both and at every state.
type property struct{ cp, density, cpByStrength, densityByStrength float64 }

func (m *medium) property(T, p float64) property {
	var u property
	u.cp, u.density = m.Uncertainty(T, p)
	if m.blend != nil {
		u.cpByStrength, u.densityByStrength = m.blend.Strength(T, p)
		u.cp, u.density = without(u.cp, u.cpByStrength), without(u.density, u.densityByStrength)
	}
	return u
}

// without takes one of the independent parts of a standard uncertainty out of it.
func without(u, part float64) float64 { return math.Sqrt(max(u*u-part*part, 0)) }

// property fills in what the fluid's figures leave open of the duty that the stream carries. The errors of cp at
// both ends are taken for one, the greater of the two. An error of the strength moves the
// enthalpy difference by the mean of what it does to cp at both ends, and a volume meter's
// density with it.
func (q *equation) property(f *Figure, m *medium, x *State, duty float64) {
	in, out := m.property(x.Inlet, x.Pressure), m.property(x.Outlet, x.OutletPressure)
	f.Share[PartCp] = duty * max(in.cp, out.cp)
	strength := (in.cpByStrength + out.cpByStrength) / 2
	if by := q.byDensity(); by > 0 {
		meter := &in
		if q.MeterAtOutlet {
			meter = &out
		}
		f.Share[PartDensity] = duty * by * meter.density
		strength += by * meter.densityByStrength
	}
	f.Share[PartStrength] = duty * strength
}

// byDensity is the power of the density at the meter with which the mass flow goes: half
// where the meter is calibrated at another, as its root is left of either kind.
func (q *equation) byDensity() float64 {
	switch {
	case q.CalibratedAt > 0:
		return 0.5
	case q.FlowKind == VolumeFlow:
		return 1
	}
	return 0
}
