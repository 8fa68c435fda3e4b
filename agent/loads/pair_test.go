package loads

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// paired is the plant of the hand calculation: 2.000 L/s ± 1 %, ρ 977.7 kg/m³ ± 0.05 %,
// cp 4.19 kJ/(kg K) ± 0.2 %, two thermometers of ± 0.15 K whose errors correlate by r.
func paired(r float64) Config {
	fluid := steady{cp: 4190, rho: 977.7, hi: 420, uCp: 0.002, uRho: 0.0005, phase: thermo.Liquid}
	cfg := plant(fluid)
	cfg.Loads[0].Stream.FlowKind = VolumeFlow
	cfg.Loads[0].Stream.Pair = r
	root3 := math.Sqrt(3)
	cfg.Tags[flow].Accuracy = Accuracy{Rel: 0.01 * root3}
	cfg.Tags[inlet].Accuracy = Accuracy{Abs: 0.15 * root3}
	cfg.Tags[outlet].Accuracy = Accuracy{Abs: 0.15 * root3}
	return cfg
}

// Worked by hand from JCGM 100:2008, 5.2.2, equation (16): of 163.863 kW at 20 K
//
//	√(1² + 0.05² + 0.2² + (u_D/20·100)²) %,   u_D² = 2·0.15²·(1 − r),
//
// and of the temperatures alone at 5 K 4.24 %.
func TestMatchedPairByHand(t *testing.T) {
	for _, tt := range []struct{ r, percent float64 }{{0, 1.472}, {0.9, 1.075}, {1, 1.021}} {
		e := engine(t, paired(tt.r))
		e.Advance(Beat{at(0, 2e-3, 343.15, 323.15), through(1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		near(t, "duty", f.Duty, 163.863e3, 0.5)
		near(t, "relative uncertainty in per cent", 100*f.Uncertainty/f.Duty, tt.percent, 5e-4)
	}
	e := engine(t, paired(0))
	e.Advance(Beat{at(0, 2e-3, 343.15, 338.15), through(1)}, nil)
	f := e.Snapshot().Loads[0].Figure
	near(t, "share of both temperatures at 5 K in per cent", 100*math.Hypot(f.Share[PartInlet], f.Share[PartOutlet])/f.Duty, 4.24, 5e-3)
}

// The parts of a pair make up the term 2·r·c1·c2·u1·u2 to the last digits, also of two
// different thermometers, and what a dead band leaves is in neither's pair.
func TestPairIsTheTermOfTheLaw(t *testing.T) {
	for _, r := range []float64{0, 0.3, 0.7, 0.95, 1} {
		cfg := paired(r)
		cfg.Tags[outlet].Accuracy.Abs *= 2
		cfg.Tags[outlet].Deadband, cfg.Tags[inlet].Resolution = 0.3, 0.1
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 2e-3, 343.15, 323.15), through(1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		c := 2e-3 * 977.7 * 4190 // W/K
		want := c * c * (0.15*0.15 + 0.3*0.3 - 2*r*0.15*0.3 + 0.3*0.3/3 + 0.1*0.1/12)
		got := sumOfSquares(f.Share[PartInlet:PartOutlet+1]) + f.Share[PartPair]*f.Share[PartPair]
		near(t, "variance by the temperatures", got, want, 1e-9*want)
		near(t, "all of it", f.Uncertainty*f.Uncertainty, sumOfSquares(f.Share[:])+f.Random*f.Random, 1e-9*want)
	}
}
