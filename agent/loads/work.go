package loads

import (
	"errors"
	"fmt"
	"math"

	"heatreeve/thermo"
)

// State is what the heat of a stream is worked from, in SI units.
type State struct {
	Flow                     float64 // in the unit of the stream's FlowKind; not below zero
	Inlet, Outlet            float64 // K
	Pressure, OutletPressure float64 // absolute Pa
	Humidity                 float64 // at the inlet, in the unit of the stream's HumidityKind, where it has one
	Coil                     float64 // K, where the stream has one
	Pump                     float64 // W that the pump leaves in the stream, where it has one
	Rise                     float64 // K/s by which what is stored warms, where the stream is corrected for it
}

// Result is what the heat equation gives for one state.
type Result struct {
	Duty          float64 // W, positive in the stream's service
	MassFlow      float64 // kg/s
	Density       float64 // at the meter, kg/m³
	Inlet, Outlet thermo.Balance
	Remark
}

// Work works the duty of s in the state x, as the engine does:
//
//	Q = ± m·(h(inlet) − h(outlet))
//
// positive in the stream's service, with x.Pump and x.Rise for the corrections that s has
// of these; its hold is not looked at. A volume flow becomes mass with the density in the
// meter's pipe, a molar flow with the molar mass. Of a [thermo.Wet] gas h is the
// sensible part, at the composition of the inlet. The error says which end is outside
// the fluid's range (a [*thermo.RangeError]) or within s.Margin of boiling or of the
// dew point, what is wrong with the humidity, or that the flow is none. Sources,
// IdleBelow and the rest of s that belongs to a running plant are not looked at.
func Work(s *Stream, x State) (Result, error) {
	if !(x.Flow >= 0) {
		return Result{}, fmt.Errorf("flow of %g: it must be a number and not below zero", x.Flow)
	}
	q, err := equationOf(s)
	if err != nil {
		return Result{}, err
	}
	m, err := q.medium(&x)
	if err != nil {
		return Result{}, err
	}
	why, remark := q.phase(&m, &x)
	if why != "" {
		return Result{}, errors.New(why)
	}
	r, err := q.work(&m, &x)
	r.Remark = remark
	return r, err
}

// equation is the heat equation of one stream, with what depends on nothing but
// the stream found beforehand.
type equation struct {
	*Stream
	declared medium
	humid    thermo.Humid // where HumidityKind is not 0
	needs    []Source     // the flow first
}

// equation returns that of a load's stream; of a vessel, what it needs.
func (l *Load) equation() (equation, error) {
	if v := l.Vessel; v != nil {
		return equation{declared: mediumOf(v.Fluid), needs: []Source{v.Temperature, v.Pressure, v.Content}}, nil
	}
	return equationOf(&l.Stream)
}

// equationOf returns the equation of s. The error says that the humidity of its fluid
// cannot be told.
func equationOf(s *Stream) (equation, error) {
	q := equation{Stream: s, declared: mediumOf(s.Fluid), needs: []Source{s.Flow, s.Inlet, s.Outlet, s.Pressure, s.OutletPressure}}
	if s.HasPump {
		q.needs = append(q.needs, s.Pump)
	}
	if s.HumidityKind != 0 {
		var ok bool
		if q.humid, ok = s.Fluid.(thermo.Humid); !ok {
			return q, fmt.Errorf("a humidity is given, and %s has none that is measured", s.Fluid.Name())
		}
		q.needs = append(q.needs, s.Humidity)
	}
	if s.HasCoil {
		q.needs = append(q.needs, s.Coil)
	}
	return q, nil
}

// medium is a fluid with the way to its balance.
type medium struct {
	thermo.Fluid
	wet     thermo.Wet   // nil where the fluid is none
	blend   thermo.Blend // nil where the fluid is none
	balance func(T, p float64) (thermo.Balance, error)
}

func mediumOf(f thermo.Fluid) medium {
	if w, ok := f.(thermo.Wet); ok {
		return medium{Fluid: f, wet: w}
	}
	blend, _ := f.(thermo.Blend)
	return medium{Fluid: f, blend: blend, balance: thermo.BalanceOf(f)}
}

func (m *medium) inlet(x *State) (thermo.Balance, error) {
	b, err := m.at(x.Inlet, x.Pressure)
	if err != nil {
		err = fmt.Errorf("inlet: %w", err)
	}
	return b, err
}

func (m *medium) outlet(x *State) (thermo.Balance, error) {
	b, err := m.at(x.Outlet, x.OutletPressure)
	if err != nil {
		err = fmt.Errorf("outlet: %w", err)
	}
	return b, err
}

func (m *medium) at(T, p float64) (thermo.Balance, error) {
	if m.wet == nil {
		return m.balance(T, p)
	}
	s, err := m.wet.Sensible(T, p)
	return thermo.Balance{Enthalpy: s.Enthalpy, Cp: s.Cp, Density: s.Density}, err
}

// medium is what flows in the state x.
func (q *equation) medium(x *State) (medium, error) {
	if q.humid == nil {
		return q.declared, nil
	}
	w, err := q.humid.Carrying(thermo.Moisture{Kind: q.HumidityKind, Value: x.Humidity}, x.Inlet, x.Pressure)
	if err != nil {
		return medium{}, fmt.Errorf("humidity at the inlet: %w", err)
	}
	return medium{Fluid: w, wet: w}, nil
}

// largestMassFlow, kg/s, is beyond any pipe: what gives more is no flow but the
// absurd number of a transmitter without a signal, and would spoil the registers.
const largestMassFlow = 1e6

// work is the equation that [Work] tells of.
func (q *equation) work(m *medium, x *State) (r Result, err error) {
	if r.Inlet, err = m.inlet(x); err != nil {
		return r, err
	}
	if r.Outlet, err = m.outlet(x); err != nil {
		return r, err
	}
	r.Density, r.MassFlow, r.Duty = q.heat(m, x, &r.Inlet, &r.Outlet)
	if !(r.MassFlow <= largestMassFlow) {
		return r, fmt.Errorf("mass flow of %g kg/s is more than any pipe carries", r.MassFlow)
	}
	return r, nil
}

func (q *equation) heat(m *medium, x *State, in, out *thermo.Balance) (density, mass, duty float64) {
	density = in.Density
	if q.MeterAtOutlet {
		density = out.Density
	}
	mass = q.mass(m, x.Flow, density)
	duty = mass * (out.Enthalpy - in.Enthalpy)
	if q.Gives {
		duty = -duty
	}
	return density, mass, duty + q.correction(x)
}

// mass is the mass flow, kg/s, that the meter shows as flow where the fluid in it has the
// density.
func (q *equation) mass(m *medium, flow, density float64) float64 {
	if q.FlowKind == VolumeFlow && q.CalibratedAt == 0 { // most are; the rest is no part of each duty
		return flow * density
	}
	return q.otherMass(m, flow, density)
}

func (q *equation) otherMass(m *medium, flow, density float64) float64 {
	switch q.FlowKind {
	case VolumeFlow:
		flow *= density
	case MolarFlow:
		flow *= m.MolarMass()
	}
	if q.CalibratedAt == 0 {
		return flow
	}
	return flow * q.Felt(density)
}

// Felt is what flows over what the meter shows, where the fluid in it has the density: 1
// but of a stream whose meter is [Stream.CalibratedAt] another.
func (s *Stream) Felt(density float64) float64 {
	switch {
	case s.CalibratedAt == 0:
		return 1
	case s.FlowKind == VolumeFlow:
		return math.Sqrt(s.CalibratedAt / density)
	}
	return math.Sqrt(density / s.CalibratedAt)
}
