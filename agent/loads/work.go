package loads

import (
	"errors"
	"fmt"

	"heatreeve/thermo"
)

// State is what the heat of a stream is worked from, in SI units.
type State struct {
	Flow                     float64 // in the unit of the stream's FlowKind; not below zero
	Inlet, Outlet            float64 // K
	Pressure, OutletPressure float64 // absolute Pa
}

// Result is what the heat equation gives for one state.
type Result struct {
	Duty          float64 // W, positive in the stream's service
	MassFlow      float64 // kg/s
	Density       float64 // at the meter, kg/m³
	Inlet, Outlet thermo.Balance
}

// Work works the duty of s in the state x, as the engine does:
//
//	Q = ± m·(h(inlet) − h(outlet))
//
// positive in the stream's service. A volume flow becomes mass with the density in the
// meter's pipe, a molar flow with the molar mass. The error says which end is outside
// the fluid's range (a [*thermo.RangeError]) or within s.Margin of boiling or of the
// dew point, or that the flow is none. Sources, IdleBelow and the rest of s that
// belongs to a running plant are not looked at.
func Work(s *Stream, x State) (Result, error) {
	if !(x.Flow >= 0) {
		return Result{}, fmt.Errorf("flow of %g: it must be a number and not below zero", x.Flow)
	}
	q := equationOf(s)
	if why, near := q.saturated(x); near {
		return Result{}, errors.New(why)
	}
	return q.work(x)
}

// equation is the heat equation of one stream, with what depends on nothing but
// the fluid found beforehand.
type equation struct {
	*Stream
	balance func(T, p float64) (thermo.Balance, error)
}

func equationOf(s *Stream) equation { return equation{s, thermo.BalanceOf(s.Fluid)} }

// largestMassFlow, kg/s, is beyond any pipe: what gives more is no flow but the
// absurd number of a transmitter without a signal, and would spoil the registers.
const largestMassFlow = 1e6

// work is heat with absurd flows refused.
func (q *equation) work(x State) (Result, error) {
	r, err := q.heat(x)
	if err == nil && !(r.MassFlow <= largestMassFlow) {
		err = fmt.Errorf("mass flow of %g kg/s is more than any pipe carries", r.MassFlow)
	}
	return r, err
}

// heat is the equation that [Work] tells of.
func (q *equation) heat(x State) (Result, error) {
	var r Result
	var err error
	if r.Inlet, err = q.balance(x.Inlet, x.Pressure); err != nil {
		return Result{}, fmt.Errorf("inlet: %w", err)
	}
	if r.Outlet, err = q.balance(x.Outlet, x.OutletPressure); err != nil {
		return Result{}, fmt.Errorf("outlet: %w", err)
	}
	r.MassFlow, r.Density = x.Flow, r.Inlet.Density
	if q.MeterAtOutlet {
		r.Density = r.Outlet.Density
	}
	switch q.FlowKind {
	case VolumeFlow:
		r.MassFlow *= r.Density
	case MolarFlow:
		r.MassFlow *= q.Fluid.MolarMass()
	}
	r.Duty = r.MassFlow * (r.Outlet.Enthalpy - r.Inlet.Enthalpy)
	if q.Gives {
		r.Duty = -r.Duty
	}
	return r, nil
}

// saturated reports whether either end of the stream is so near saturation that
// its heat may be latent, and says which.
func (q *equation) saturated(x State) (string, bool) {
	for _, end := range [...]struct {
		name string
		T, p float64
	}{{"inlet", x.Inlet, x.Pressure}, {"outlet", x.Outlet, x.OutletPressure}} {
		lo, hi := q.Fluid.Span(end.p)
		switch {
		case q.Fluid.Phase() == thermo.Liquid && end.T > hi-q.Margin:
			return fmt.Sprintf("%s at %.2f °C is within %g K of boiling at %.2f °C (%.1f kPa absolute): heat may be latent", end.name, end.T-273.15, q.Margin, hi-273.15, end.p/1e3), true
		case q.Fluid.Phase() == thermo.Gas && end.T < lo+q.Margin:
			return fmt.Sprintf("%s at %.2f °C is within %g K of the dew point at %.2f °C (%.1f kPa absolute): heat may be latent", end.name, end.T-273.15, q.Margin, lo-273.15, end.p/1e3), true
		}
	}
	return "", false
}
