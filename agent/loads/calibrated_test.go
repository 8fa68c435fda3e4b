package loads

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// perfect is a gas whose density is p/(100·T), so that it can be told by hand.
type perfect struct{ steady }

func (perfect) At(T, p float64) (thermo.Properties, error) {
	return thermo.Properties{Enthalpy: 1000 * T, Cp: 1000, Cv: 900, Density: p / (100 * T)}, nil
}

var dpGas = perfect{steady{molar: 0.03, lo: 100, hi: 9999, uRho: 0.01, phase: thermo.Gas}}

// A meter reckoned for 20 kg/m³ in a gas of 5 bar and 400 K, of 12.5 kg/m³: of what it
// shows, √(12.5/20) = 0.790569 flows by mass or as normal volume, √(20/12.5) = 1.264911 by
// volume. The rules are those for a transmitter that was calibrated for one density.
func TestCalibratedAtAnotherDensity(t *testing.T) {
	x := State{Flow: 2, Inlet: 400, Outlet: 380, Pressure: 5e5, OutletPressure: 5e5}
	for kind, want := range map[FlowKind]float64{MassFlow: 2 * 0.790569415, VolumeFlow: 2 * 1.264911064 * 12.5, MolarFlow: 2 * 0.03 * 0.790569415} {
		s := Stream{Fluid: dpGas, FlowKind: kind, Gives: true, CalibratedAt: 20}
		r, err := Work(&s, x)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "mass flow", r.MassFlow, want, 1e-8*want)
		near(t, "duty", r.Duty, want*20e3, 1e-8*want*20e3)
		s.CalibratedAt = 12.5
		same, err := Work(&s, x)
		s.CalibratedAt = 0
		plain, err2 := Work(&s, x)
		if err != nil || err2 != nil {
			t.Fatal(err, err2)
		}
		near(t, "mass flow at the density it is calibrated at", same.MassFlow, plain.MassFlow, 1e-12*plain.MassFlow)
		s.CalibratedAt, s.MeterAtOutlet = 20, true
		if r, err = Work(&s, x); err != nil {
			t.Fatal(err)
		}
		near(t, "density at the outlet", r.Density, 5e5/100/380, 1e-9)
	}
}

// The root of the density is left in a flow by mass and by volume alike, so half of what
// the density may be off is in the duty, and half of the pressure; of the inlet temperature,
// minus half beside its part in the difference. By hand: 5 bar ± 2 %, density ± 1 %, and
// 400 K ± 4 K at a difference of 20 K, standard uncertainties.
func TestUncertaintyOfACalibratedFlow(t *testing.T) {
	for _, kind := range []FlowKind{MassFlow, VolumeFlow, MolarFlow} {
		cfg := plant(dpGas)
		root3 := math.Sqrt(3)
		cfg.Tags = append(cfg.Tags, Tag{Name: "PT", MaxAge: minute, Accuracy: Accuracy{Rel: 0.02 * root3}})
		cfg.Tags[inlet].Accuracy = Accuracy{Abs: 0.04 * root3}
		s := &cfg.Loads[0].Stream
		s.FlowKind, s.CalibratedAt, s.Pressure, s.OutletPressure = kind, 20, FromTag(3), FromTag(3)
		e := engine(t, cfg)
		e.Advance(Beat{append(at(0, 2, 400, 380), Reading{Tag: 3, At: epoch, Value: 5e5}), through(1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Fault != NoFault {
			t.Fatalf("kind %d: %v, %s", kind, f.Fault, f.Reason)
		}
		near(t, "share of the density", f.Share[PartDensity], 0.005*f.Duty, 1e-9*f.Duty)
		near(t, "share of the pressure", f.Share[PartPressure], 0.01*f.Duty, 1e-5*f.Duty) // the curve of the root over 2 %
		near(t, "share of the inlet", f.Share[PartInlet], (0.04/20-0.5*0.04/400)*f.Duty, 1e-7*f.Duty)
	}
}

// What passes a hold is what flows, not what the meter shows.
func TestHoldOfACalibratedFlow(t *testing.T) {
	for kind, want := range map[FlowKind]float64{MassFlow: 2 * 0.790569415 / 12.5, VolumeFlow: 2 * 1.264911064, MolarFlow: 2 * 0.03 * 0.790569415 / 12.5} {
		q, err := equationOf(&Stream{Fluid: dpGas, FlowKind: kind, CalibratedAt: 20})
		if err != nil {
			t.Fatal(err)
		}
		got, err := q.displacement(&q.declared, &State{Flow: 2, Inlet: 400, Pressure: 5e5})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "volume", got, want, 1e-8*want)
	}
}

func TestCalibratedAtNoDensity(t *testing.T) {
	for _, rho := range []float64{-1, math.NaN(), math.Inf(1)} {
		cfg := plant(dpGas)
		cfg.Loads[0].Stream.CalibratedAt = rho
		if _, err := New(cfg); err == nil {
			t.Errorf("calibrated at %v kg/m³ was accepted", rho)
		}
	}
}
