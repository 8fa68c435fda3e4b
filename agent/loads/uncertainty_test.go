package loads

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// Propagation by hand (JCGM 100:2008, 5.1.2): 2.000 L/s ± 1 %, ρ 977.7 kg/m³ ±
// 0.05 %, cp 4.19 kJ/(kg K) ± 0.2 %, 70 and 50 °C ± 0.15 K each, independent:
// 163.863 kW with √(1² + 0.05² + 0.2² + (0.2121/20·100)²) = 1.472 %.
func TestUncertaintyByHand(t *testing.T) {
	fluid := steady{cp: 4190, rho: 977.7, hi: 420, uCp: 0.002, uRho: 0.0005, phase: thermo.Liquid}
	cfg := plant(fluid)
	cfg.Loads[0].Stream.FlowKind = VolumeFlow
	root3 := math.Sqrt(3)
	cfg.Tags[flow].Accuracy = Accuracy{Rel: 0.01 * root3}
	cfg.Tags[inlet].Accuracy = Accuracy{Abs: 0.15 * root3}
	cfg.Tags[outlet].Accuracy = Accuracy{Abs: 0.15 * root3}
	e := engine(t, cfg)
	e.Advance(Beat{at(0, 2e-3, 343.15, 323.15), through(1)}, nil)
	f := e.Snapshot().Loads[0].Figure
	near(t, "duty", f.Duty, 163.863e3, 0.5)
	near(t, "relative uncertainty", f.Uncertainty/f.Duty, 0.01472, 5e-6)
	near(t, "share of the flow", f.Share[PartFlow], 1638.63, 0.01)
	near(t, "share of the outlet", f.Share[PartOutlet], -0.15*2e-3*977.7*4190, 1e-6)
}

// Class A of IEC 60751 is 0.15 K + 0.002·|t|: 0.290 K at 70 °C, so 0.1674 K
// standard.
func TestAccuracyStandard(t *testing.T) {
	near(t, "class A at 70 °C", Accuracy{Abs: 0.15, Rel: 0.002, Zero: 273.15}.Standard(343.15), 0.290/math.Sqrt(3), 1e-12)
}

// One pressure signal for both ends moves both: its share is that of one tag,
// counted once.
func TestSharedPressureCountsOnce(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags = append(cfg.Tags, Tag{Name: "PT", MaxAge: minute, Accuracy: Accuracy{Abs: 1e4}})
	s := &cfg.Loads[0].Stream
	s.Pressure, s.OutletPressure = FromTag(3), FromTag(3)
	e := engine(t, cfg)
	e.Advance(Beat{append(at(0, 2, 350, 330), Reading{Tag: 3, At: epoch, Value: 5e5}), through(1)}, nil)
	f := e.Snapshot().Loads[0].Figure
	if f.Fault != NoFault || f.Share[PartOutletPressure] != 0 {
		t.Errorf("fault %v, share of the outlet pressure %g; want none and 0", f.Fault, f.Share[PartOutletPressure])
	}
}

// At the edge of a fluid's range the uncertainty is taken on the side that is
// left, and is there.
func TestUncertaintyAtTheEdge(t *testing.T) {
	fluid := steady{cp: 1000, rho: 1, hi: 9999, phase: thermo.Liquid}
	cfg := plant(fluid)
	cfg.Tags[inlet].Accuracy = Accuracy{Abs: math.Sqrt(3)}
	e := engine(t, cfg)
	e.Advance(Beat{at(0, 2, 600, 500), through(1)}, nil)
	near(t, "uncertainty", e.Snapshot().Loads[0].Figure.Uncertainty, 2000, 1e-6)
}
