package loads

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// A hand calculation and the running engine are one and the same equation.
func TestWorkIsTheEnginesFigure(t *testing.T) {
	cfg := plant(water.Liquid())
	s := &cfg.Loads[0].Stream
	for _, kind := range []FlowKind{MassFlow, VolumeFlow, MolarFlow} {
		for _, atOutlet := range []bool{false, true} {
			s.FlowKind, s.MeterAtOutlet = kind, atOutlet
			e := engine(t, cfg)
			e.Advance(Beat{at(0, 0.02, 350, 330), through(1)}, nil)
			f := e.Snapshot().Loads[0].Figure
			r, err := Work(s, State{Flow: 0.02, Inlet: 350, Outlet: 330, Pressure: 5e5, OutletPressure: 5e5})
			if err != nil || r.Duty != f.Duty || r.MassFlow != f.MassFlow || r.Density != f.Density {
				t.Errorf("kind %d, meter at outlet %v: %+v, %v; the engine has %g W, %g kg/s, %g kg/m³", kind, atOutlet, r, err, f.Duty, f.MassFlow, f.Density)
			}
		}
	}
}

// IAPWS R7-97(2012), Table 5 (from memory): water at 300 K and 3 MPa has h = 115.331273
// kJ/kg and v = 0.100215168e-2 m³/kg; at 300 K and 80 MPa h = 184.142828 kJ/kg.
func TestWorkAgainstPublishedStates(t *testing.T) {
	s := Stream{Fluid: water.Liquid(), FlowKind: VolumeFlow}
	r, err := Work(&s, State{Flow: 1, Inlet: 300, Outlet: 300, Pressure: 3e6, OutletPressure: 80e6})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "density at the meter", r.Density, 1/0.100215168e-2, 1e-6*r.Density)
	near(t, "duty", r.Duty, r.Density*(184.142828e3-115.331273e3), 1e-6*r.Duty)
	near(t, "inlet's enthalpy", r.Inlet.Enthalpy, 115.331273e3, 1e-3)
	near(t, "outlet's enthalpy", r.Outlet.Enthalpy, 184.142828e3, 1e-3)
}

func TestWorkRefuses(t *testing.T) {
	s := Stream{Fluid: liquid, FlowKind: MassFlow, Margin: 5}
	for _, tt := range []struct {
		x    State
		want string
	}{
		{State{Flow: -1, Inlet: 350, Outlet: 330}, "flow of -1"},
		{State{Flow: math.NaN(), Inlet: 350, Outlet: 330}, "flow of NaN"},
		{State{Flow: 1, Inlet: 350, Outlet: 416}, "outlet at 142.85 °C is within 5 K of boiling"},
		{State{Flow: 1e7, Inlet: 350, Outlet: 330}, "1e+07 kg/s"},
	} {
		if _, err := Work(&s, tt.x); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%+v: error %v, want one with %q", tt.x, err, tt.want)
		}
	}
	hot := Stream{Fluid: steady{cp: 1000, rho: 1, hi: 9999, phase: thermo.Liquid}, FlowKind: MassFlow}
	_, err := Work(&hot, State{Flow: 1, Inlet: 601, Outlet: 330})
	var out *thermo.RangeError
	if !errors.As(err, &out) || !strings.HasPrefix(err.Error(), "inlet: ") {
		t.Errorf("error %v, want a RangeError of the inlet", err)
	}
}
