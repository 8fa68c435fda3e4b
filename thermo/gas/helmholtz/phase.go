package helmholtz

import (
	"math"

	"heatreeve/thermo"
)

// The neighbourhood of the critical point that is refused: pressures within these
// parts of the critical one, at temperatures between these parts of the critical
// one. There cp grows without bound, and the figures of every equation of state
// are at their worst.
const (
	criticalP1, criticalP2 = 0.97, 1.03
	criticalT1, criticalT2 = 0.995, 1.005
)

// melting is a slope in K/Pa steeper than that of the melting curve of any
// substance here.
const melting = 0.3e-6

// leastP in Pa is where a gas begins: thinner, its molecules meet the wall of a pipe before one
// another, and far thinner the arithmetic ends.
const leastP = 1

// gas is the gas of s, and above the critical pressure the fluid above the
// critical temperature.
func gas(s *substance) thermo.Fluid {
	f := newFluid(s)
	f.phase = thermo.Gas
	f.bounds = thermo.Bounds{MinT: s.tripleT, MaxT: s.maxT, MinP: leastP, MaxP: s.maxP}
	return f
}

func liquid(s *substance) thermo.Fluid {
	f := newFluid(s)
	f.name = "liquid " + s.name
	f.phase = thermo.Liquid
	f.bounds = thermo.Bounds{
		MinT: s.tripleT, MaxT: s.criticalT,
		// at lower pressures it boils within a hair of its freezing point
		MinP: max(s.dew.at(1.02*s.tripleT), 1e3), MaxP: min(s.maxP, 50e6),
	}
	return f
}

// Span returns the temperatures between which the fluid is its phase at p in Pa.
//
// A gas begins at its dew point, which is 0 here below the triple pressure (frost
// is not modelled: the range begins at the triple temperature); above the
// critical pressure at the critical temperature. A liquid ends at its boiling
// point, +Inf above the critical pressure (the range ends at the critical
// temperature), and begins at a guard against freezing: the triple temperature
// plus 0.3 K/MPa. Near the critical pressure both keep 0.5 % off the critical
// temperature.
func (f *fluid) Span(p float64) (lo, hi float64) {
	if f.phase == thermo.Gas {
		return f.begin(p), math.Inf(1)
	}
	return f.thaw(p), f.end(p)
}

func (f *fluid) begin(p float64) float64 {
	switch x := p / f.criticalP; {
	case !(p > f.dew.at(f.tripleT)):
		return 0
	case x < criticalP1:
		return f.dew.temperature(p, f.tripleT, f.dew.T)
	case x <= criticalP2:
		return criticalT2 * f.criticalT
	}
	return max(f.criticalT, f.dew.T, f.thaw(p))
}

// thaw is above the melting temperature at p.
func (f *fluid) thaw(p float64) float64 { return f.tripleT + melting*p }

func (f *fluid) end(p float64) float64 {
	switch x := p / f.criticalP; {
	case !(p > f.dew.at(f.tripleT)):
		return f.tripleT
	case x < criticalP1:
		return f.dew.temperature(p, f.tripleT, f.dew.T)
	case x <= criticalP2:
		return criticalT1 * f.criticalT
	}
	return math.Inf(1)
}

// outside returns the error of a state of the box that is not of the phase.
func (f *fluid) outside(T, p float64) error {
	if f.phase == thermo.Gas {
		if p < criticalP1*f.criticalP && (T >= f.dew.T || p <= f.dew.at(T)) {
			return nil
		}
		if lo := f.begin(p); T < lo {
			return f.refusal(T, lo, f.reason(p))
		}
		return nil
	}
	if lo := f.thaw(p); T < lo {
		return f.refusal(T, lo, "guard against freezing")
	}
	if p < criticalP1*f.criticalP && T < f.dew.T && p >= f.dew.at(T) {
		return nil
	}
	if hi := f.end(p); T > hi {
		return f.refusal(T, hi, f.reason(p))
	}
	return nil
}

func (f *fluid) reason(p float64) string {
	switch x := p / f.criticalP; {
	case x > criticalP2:
		return "above the critical pressure a gas begins at the critical temperature"
	case x >= criticalP1:
		return "too near the critical point"
	case f.phase == thermo.Gas:
		return "dew point"
	}
	return "boiling point"
}

func (f *fluid) refusal(T, bound float64, why string) error {
	return &thermo.RangeError{Fluid: f.name, Quantity: "temperature", Value: T, Bound: bound, Below: T < bound, Why: why}
}

// lost is the error of a state where the equation has no density of this phase,
// which no state in range has shown.
func (f *fluid) lost(T float64) error {
	return f.refusal(T, f.criticalT, "the equation of state has no density of this phase here")
}

// bracket is where to seek the density at T. Below the critical temperature it is
// bounded by the density at saturation, with a margin for the error of the
// auxiliary equations; at the critical temperature the two meet.
func (f *fluid) bracket(iso *isotherm, T, q float64) bracket {
	if f.phase == thermo.Gas {
		start := f.equation.thin(iso, q)
		if T >= f.dew.T {
			return bracket{hi: densest, start: start, side: single}
		}
		return bracket{hi: 1.15 * f.vapour.at(T) / f.reducingDensity, start: start, side: thinner}
	}
	d := f.liquid.at(T) / f.reducingDensity
	return bracket{lo: 0.97 * d, hi: densest, start: d, side: denser}
}
