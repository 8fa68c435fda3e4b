package loads

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// steady is a fluid with constant properties, so that a test's figure can be
// worked in the head.
type steady struct {
	cp, rho, molar, lo, hi, uCp, uRho float64
	phase                             thermo.Phase
}

func (s steady) Name() string                                { return "steady" }
func (s steady) Source() string                              { return "constant by construction" }
func (s steady) Phase() thermo.Phase                         { return s.phase }
func (s steady) Bounds() thermo.Bounds                       { return thermo.Bounds{MinT: 200, MaxT: 600, MaxP: 1e8} }
func (s steady) Span(float64) (float64, float64)             { return s.lo, s.hi }
func (s steady) Uncertainty(T, p float64) (float64, float64) { return s.uCp, s.uRho }
func (s steady) MolarMass() float64                          { return s.molar }
func (s steady) At(T, p float64) (thermo.Properties, error) {
	if T > 600 {
		return thermo.Properties{}, &thermo.RangeError{Fluid: "steady", Quantity: "temperature", Value: T, Bound: 600, Why: "by construction"}
	}
	return thermo.Properties{Enthalpy: s.cp * T, Cp: s.cp, Cv: s.cp, Density: s.rho}, nil
}

var liquid = steady{cp: 4000, rho: 1000, molar: 0.02, lo: 273.15, hi: 420, phase: thermo.Liquid}

const (
	flow = iota
	inlet
	outlet
)

// plant is one load that gives heat: mass flow, two temperatures, 5 bar.
func plant(f thermo.Fluid) Config {
	return Config{
		Grid: second,
		Tags: []Tag{{Name: "FT", MaxAge: minute}, {Name: "TI", MaxAge: minute}, {Name: "TO", MaxAge: minute}},
		Loads: []Load{{Name: "boiler", Stream: Stream{
			Fluid: f, FlowKind: MassFlow, Flow: FromTag(flow), Inlet: FromTag(inlet), Outlet: FromTag(outlet),
			Pressure: Constant(5e5), OutletPressure: Constant(5e5), Gives: true, Margin: 5,
		}}},
	}
}

func engine(t *testing.T, cfg Config) *Engine {
	t.Helper()
	e, err := New(cfg)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// epoch is an instant on a minute, so that windows and minutes begin with it.
const epoch = 1_700_000_040 * second

// at sets the three tags at epoch+s seconds.
func at(s, q, ti, to float64) []Reading {
	t := epoch + int64(s*1e9)
	return []Reading{{Tag: flow, At: t, Value: q}, {Tag: inlet, At: t, Value: ti}, {Tag: outlet, At: t, Value: to}}
}

func through(s float64) int64 { return epoch + int64(s*1e9) }

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.12g, want %.12g ± %g", what, got, want, tol)
	}
}
