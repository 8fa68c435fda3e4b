package loads

import (
	"fmt"
	"math"

	"heatreeve/thermo"
)

// Fault says why a load has no figure. Its text is part of the agent's
// interface.
type Fault uint8

const (
	NoFault    Fault = iota
	NoReading        // a tag has sent nothing yet
	Stale            // a tag's last reading is older than its maximum age
	Reverse          // flow is below zero by more than the idle threshold
	Saturation       // a liquid near boiling, or a gas near its dew point
	OutOfRange       // a state lies outside the fluid's range
)

func (f Fault) String() string {
	switch f {
	case NoFault:
		return "none"
	case NoReading:
		return "no reading"
	case Stale:
		return "stale"
	case Reverse:
		return "reverse flow"
	case Saturation:
		return "near saturation"
	case OutOfRange:
		return "out of range"
	}
	return fmt.Sprintf("Fault(%d)", uint8(f))
}

// Part names one contribution to the uncertainty of a duty.
type Part uint8

const (
	PartFlow Part = iota
	PartInlet
	PartOutlet
	PartPressure
	PartOutletPressure
	PartCp
	PartDensity
	Parts // how many there are
)

// Figure is the duty of one load at one grid point, with what it was worked
// from. Where Fault is set, only Fault, Reason and At mean anything; where Idle
// is set, duty is zero and the temperatures are not looked at.
type Figure struct {
	At          int64
	Fault       Fault
	Reason      string // empty without a fault
	Idle        bool
	Duty        float64        // W, positive in the load's service
	Uncertainty float64        // standard, W
	Share       [Parts]float64 // signed contribution of each input to the standard uncertainty, W
	MassFlow    float64        // kg/s
	Density     float64        // at the meter, kg/m³
	Inlet       float64        // K
	Outlet      float64        // K
	Pressure    float64        // at the inlet, Pa
	Until       int64          // instant at which the first held input expires; MaxInt64 for constants alone
}

// Measured reports whether the figure may be booked.
func (f *Figure) Measured() bool { return f.Fault == NoFault }

// state is the five numbers that a stream's duty is worked from.
type state struct {
	flow, inlet, outlet, pressure, outletPressure float64
}

// result is what the heat equation gives for one state.
type result struct{ duty, mass, density float64 }

// heat works the duty of s in one state:
//
//	Q = ± m·(h(inlet) − h(outlet))
//
// A volume flow becomes mass with the density in the meter's pipe, a molar flow
// with the molar mass. The error is the fluid's *thermo.RangeError.
func (s *Stream) heat(x state) (result, error) {
	in, err := s.Fluid.At(x.inlet, x.pressure)
	if err != nil {
		return result{}, fmt.Errorf("inlet: %w", err)
	}
	out, err := s.Fluid.At(x.outlet, x.outletPressure)
	if err != nil {
		return result{}, fmt.Errorf("outlet: %w", err)
	}
	r := result{mass: x.flow, density: in.Density}
	if s.MeterAtOutlet {
		r.density = out.Density
	}
	switch s.FlowKind {
	case VolumeFlow:
		r.mass *= r.density
	case MolarFlow:
		r.mass *= s.Fluid.MolarMass()
	}
	r.duty = r.mass * (out.Enthalpy - in.Enthalpy)
	if s.Gives {
		r.duty = -r.duty
	}
	return r, nil
}

// saturated reports whether either end of the stream is so near saturation that
// its heat may be latent, and says which.
func (s *Stream) saturated(x state) (string, bool) {
	for _, end := range [...]struct {
		name string
		T, p float64
	}{{"inlet", x.inlet, x.pressure}, {"outlet", x.outlet, x.outletPressure}} {
		lo, hi := s.Fluid.Span(end.p)
		switch {
		case s.Fluid.Phase() == thermo.Liquid && end.T > hi-s.Margin:
			return fmt.Sprintf("%s at %.2f °C is within %g K of boiling at %.2f °C (%.1f kPa absolute): heat may be latent", end.name, end.T-273.15, s.Margin, hi-273.15, end.p/1e3), true
		case s.Fluid.Phase() == thermo.Gas && end.T < lo+s.Margin:
			return fmt.Sprintf("%s at %.2f °C is within %g K of the dew point at %.2f °C (%.1f kPa absolute): heat may be latent", end.name, end.T-273.15, s.Margin, lo-273.15, end.p/1e3), true
		}
	}
	return "", false
}

// spread fills the figure's uncertainty: each input is moved by its standard
// uncertainty up and down and half the change of duty is its contribution
// (JCGM 100:2008, 5.1.3, note 2); contributions of independent inputs add as
// root of the sum of squares. The error is that of the heat equation where an
// input can be moved neither way inside the fluid's range.
func (s *Stream) spread(f *Figure, x state, u [PartCp]float64, centre result) error {
	for part, ui := range u {
		if ui == 0 {
			continue
		}
		q, err := s.swing(x, Part(part), ui, centre)
		if err != nil {
			return err
		}
		f.Share[part] = q
	}
	cpIn, densityIn := s.Fluid.Uncertainty(x.inlet, x.pressure)
	cpOut, densityOut := s.Fluid.Uncertainty(x.outlet, x.outletPressure)
	f.Share[PartCp] = centre.duty * max(cpIn, cpOut)
	if s.FlowKind == VolumeFlow {
		density := densityIn
		if s.MeterAtOutlet {
			density = densityOut
		}
		f.Share[PartDensity] = centre.duty * density
	}
	var sum float64
	for _, q := range f.Share {
		sum += q * q
	}
	f.Uncertainty = math.Sqrt(sum)
	return nil
}

// swing returns half the change of duty as one input goes from u below to u
// above; at the edge of the fluid's range, the change on the side that is left.
func (s *Stream) swing(x state, part Part, u float64, centre result) (float64, error) {
	up, errUp := s.heat(s.moved(x, part, u))
	down, errDown := s.heat(s.moved(x, part, -u))
	switch {
	case errUp == nil && errDown == nil:
		return (up.duty - down.duty) / 2, nil
	case errUp == nil:
		return up.duty - centre.duty, nil
	case errDown == nil:
		return centre.duty - down.duty, nil
	}
	return 0, errUp
}

func (s *Stream) moved(x state, part Part, by float64) state {
	switch part {
	case PartFlow:
		x.flow += by
	case PartInlet:
		x.inlet += by
	case PartOutlet:
		x.outlet += by
	case PartPressure:
		x.pressure += by
		if s.OutletPressure == s.Pressure {
			x.outletPressure += by
		}
	case PartOutletPressure:
		x.outletPressure += by
	}
	return x
}
