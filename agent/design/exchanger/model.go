package exchanger

import (
	"errors"
	"math"
)

// Film is the heat transfer on one side at the design point: its resistance falls with the
// flow to the power of Exponent, and by PerKelvin of itself for each kelvin by which the mean
// of inlet and outlet is above Temperature. Turbulent films have exponents of 0.8 in tubes (F.
// W. Dittus and L. M. K. Boelter, 1930), about 0.6 on a shell's side (D. Q. Kern, Process Heat
// Transfer, 1950) and 0.6 to 0.7 between plates; laminar ones 0 to 0.33.
type Film struct {
	Resistance  float64 // K/W
	Flow        float64 // kg/s
	Exponent    float64
	PerKelvin   float64 // 1/K
	Temperature float64 // K
}

// At is the resistance at another flow and mean temperature, K/W.
func (f *Film) At(flow, temperature float64) float64 {
	r := f.Resistance
	if f.Exponent != 0 {
		r *= math.Exp(-f.Exponent * math.Log(flow/f.Flow)) // half the time of math.Pow
	}
	if f.PerKelvin != 0 {
		r /= max(0.1, 1+f.PerKelvin*(temperature-f.Temperature))
	}
	return r
}

// Model is an exchanger when it is clean: two films and the wall between them, K/W. 1/UA is
// the sum of the three.
type Model struct {
	Arrangement
	Hot, Cold Film
	Wall      float64
}

// Stream is one side in one state, with the standard uncertainties of its readings; that of
// cp is a fraction.
type Stream struct {
	Flow, Cp, Inlet, Outlet                     float64
	FlowError, CpError, InletError, OutletError float64
}

// Capacity is the capacity rate, W/K.
func (s *Stream) Capacity() float64 { return s.Flow * s.Cp }

// State is what both sides do.
type State struct{ Hot, Cold Stream }

// Clean is the conductance UA of the clean exchanger at the flows and temperatures of a
// state, W/K.
func (m *Model) Clean(s *State) float64 {
	return 1 / (m.Hot.At(s.Hot.Flow, (s.Hot.Inlet+s.Hot.Outlet)/2) + m.Wall + m.Cold.At(s.Cold.Flow, (s.Cold.Inlet+s.Cold.Outlet)/2))
}

// rates are the smaller capacity rate, its ratio to the other, and whose it is.
func (s *State) rates() (least, ratio float64, hotIsMin bool) {
	h, c := s.Hot.Capacity(), s.Cold.Capacity()
	if h <= c {
		return h, h / c, true
	}
	return c, c / h, false
}

// ErrNoDrive says that the hot side does not enter warmer than the cold one, or that a side
// does not flow.
var ErrNoDrive = errors.New("the hot side does not enter warmer than the cold side, or a side does not flow")

// Driven tells whether heat can pass from the hot to the cold side.
func (s *State) driven() bool {
	return s.Hot.Capacity() > 0 && s.Cold.Capacity() > 0 && s.Hot.Inlet > s.Cold.Inlet
}

// Duty is the duty of the clean exchanger at the inlets and flows of a state, W.
func (m *Model) Duty(s *State) (float64, error) {
	return m.passed(s, m.Clean(s))
}

// passed is the duty that a conductance passes.
func (m *Model) passed(s *State, conductance float64) (float64, error) {
	if !s.driven() {
		return 0, ErrNoDrive
	}
	least, ratio, hotIsMin := s.rates()
	eps := m.Effectiveness(conductance/least, ratio, hotIsMin)
	return eps * least * (s.Hot.Inlet - s.Cold.Inlet), nil
}

// Sensitivity is the change of the clean exchanger's duty for a change of its conductance by
// all of itself, W: dΦ/d ln UA. It is 0 where no heat can pass.
func (m *Model) Sensitivity(s *State) float64 {
	const step = 1e-4
	up, down := m.scaled(1+step), m.scaled(1-step)
	above, err := up.Duty(s)
	if err != nil {
		return 0
	}
	below, _ := down.Duty(s)
	return (above - below) / (2 * step)
}

// scaled is the model with all its conductances times by.
func (m *Model) scaled(by float64) Model {
	x := *m
	x.Hot.Resistance /= by
	x.Cold.Resistance /= by
	x.Wall /= by
	return x
}
