package loads

import (
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
	humid "heatreeve/thermo/air"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/table"
	"heatreeve/thermo/water"
)

// operating is a load at work, with what may be wrong with each input.
type operating struct {
	name   string
	stream Stream
	x      State
	inputs [PartCp]doubt
	// fluid returns the fluid whose strength is off by z standard uncertainties; nil
	// where there is nothing to be off.
	fluid func(z float64) thermo.Fluid
}

// figure is what the engine makes of it.
func (o *operating) figure(t *testing.T) Figure {
	t.Helper()
	q, err := equationOf(&o.stream)
	if err != nil {
		t.Fatal(err)
	}
	var f Figure
	if q.figure(&f, &steps{x: o.x, d: o.inputs}); !f.Measured() {
		t.Fatalf("%s: %v (%s)", o.name, f.Fault, f.Reason)
	}
	return f
}

// strengths is the number of neighbouring mixtures on either side, to 4.5 standard
// uncertainties.
const strengths = 150

// draws returns the duty with every error drawn: those that last from the distribution
// that one gives, and what changes from reading to reading normally. The errors of a pair
// are made of one that is common and of one of each. The fluid's own figures are off by
// one factor of the enthalpy difference and by one of the density.
func (o *operating) draws(t *testing.T, draw func(*rand.Rand) float64) func(*rand.Rand) float64 {
	t.Helper()
	s := &o.stream
	work := o.works(t)
	cp, density := o.leftOpen(t)
	one := func(rng *rand.Rand, d *doubt, shared float64) float64 {
		return d.accuracy*math.Sqrt(1-shared)*draw(rng) + math.Sqrt(d.coarse)*rectangular(rng) + math.Sqrt(d.scatter)*normal(rng)
	}
	return func(rng *rand.Rand) float64 {
		x, common := o.x, math.Sqrt(s.Pair)*draw(rng)
		x.Flow += one(rng, &o.inputs[PartFlow], 0)
		x.Inlet += one(rng, &o.inputs[PartInlet], s.Pair) + common*o.inputs[PartInlet].accuracy
		x.Outlet += one(rng, &o.inputs[PartOutlet], s.Pair) + common*o.inputs[PartOutlet].accuracy
		x.Humidity += one(rng, &o.inputs[PartHumidity], 0)
		pressure := one(rng, &o.inputs[PartPressure], 0)
		x.Pressure += pressure
		x.OutletPressure += pressure
		duty := work(draw(rng), &x) * (1 + cp*draw(rng))
		switch {
		case s.CalibratedAt > 0: // it shows the root of ρ·v², whatever is reckoned from that
			duty *= math.Sqrt(1 + density*draw(rng))
		case s.FlowKind == VolumeFlow:
			duty *= 1 + density*draw(rng)
		}
		return duty
	}
}

// works returns the heat equation with the strength off by z.
func (o *operating) works(t *testing.T) func(z float64, x *State) float64 {
	n := 0
	if o.fluid != nil {
		n = strengths
	}
	var equations []equation
	for k := -n; k <= n; k++ {
		s := o.stream
		if o.fluid != nil {
			s.Fluid = o.fluid(4.5 * float64(k) / strengths)
		}
		q, err := equationOf(&s)
		if err != nil {
			t.Fatal(err)
		}
		equations = append(equations, q)
	}
	return func(z float64, x *State) float64 {
		q := &equations[n+int(math.Round(max(-1, min(z/4.5, 1))*float64(n)))]
		m, err := q.medium(x)
		if err != nil {
			t.Fatal(err)
		}
		r, err := q.work(&m, x)
		if err != nil {
			t.Fatal(err)
		}
		return r.Duty
	}
}

// leftOpen returns the relative standard uncertainties of the fluid's figures without
// that of the strength, whose own are drawn.
func (o *operating) leftOpen(t *testing.T) (cp, density float64) {
	f := o.stream.Fluid
	if o.fluid != nil {
		f = o.fluid(0)
	}
	if h, ok := f.(thermo.Humid); ok {
		wet, err := h.Carrying(thermo.Moisture{Kind: o.stream.HumidityKind, Value: o.x.Humidity}, o.x.Inlet, o.x.Pressure)
		if err != nil {
			t.Fatal(err)
		}
		f = wet
	}
	cpIn, densityIn := f.Uncertainty(o.x.Inlet, o.x.Pressure)
	cpOut, densityOut := f.Uncertainty(o.x.Outlet, o.x.OutletPressure)
	if o.stream.MeterAtOutlet {
		return max(cpIn, cpOut), densityOut
	}
	return max(cpIn, cpOut), densityIn
}

func celsius(t float64) float64 { return t + 273.15 }

// class returns the standard uncertainty of an IEC 60751 thermometer at t in °C.
func class(abs, rel, t float64) doubt { return doubt{accuracy: (abs + rel*math.Abs(t)) / math.Sqrt(3)} }

// circuit is a stream on f with its flow, its temperatures in °C and its pressure.
func circuit(name string, f thermo.Fluid, kind FlowKind, flow, in, out, p float64) operating {
	return operating{
		name:   name,
		stream: Stream{Fluid: f, FlowKind: kind, Gives: true, Margin: 1},
		x:      State{Flow: flow, Inlet: celsius(in), Outlet: celsius(out), Pressure: p, OutletPressure: p},
		inputs: [PartCp]doubt{
			PartFlow:     {accuracy: 0.005 * flow / math.Sqrt(3)},
			PartInlet:    class(0.15, 0.002, in),
			PartOutlet:   class(0.15, 0.002, out),
			PartPressure: {accuracy: 5e3},
		},
	}
}

func mixed(t *testing.T, solute string, x, u float64) func(z float64) thermo.Fluid {
	return func(z float64) thermo.Fluid {
		f, err := aqueous.New(solute, x+z*u, 0)
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
}

// operatingPoints are circuits as they are met, and some that are hard on a first-order law:
// next to no difference of temperature, a flow near nothing, and a fluid whose cp climbs.
func operatingPoints(t *testing.T) []operating {
	w := water.Tabulate(water.Liquid(), 273.15, 433.15, 1e5, 17e5)
	oil, err := table.New("climbing oil", "by construction", []table.Point{{T: 273.15, Cp: 1600, Density: 900}, {T: 573.15, Cp: 2800, Density: 680}}, table.Options{CpUncertainty: 0.02, DensityUncertainty: 0.005})
	if err != nil {
		t.Fatal(err)
	}
	air, err := gas.DryAir(gas.Ideal)
	if err != nil {
		t.Fatal(err)
	}
	var all []operating
	add := func(o operating, change func(o *operating)) {
		if change != nil {
			change(&o)
		}
		all = append(all, o)
	}
	add(circuit("heating water", w, VolumeFlow, 2e-3, 70, 50, 5e5), nil)
	add(circuit("heating water, matched pair", w, VolumeFlow, 2e-3, 70, 50, 5e5), func(o *operating) { o.stream.Pair = 0.95 })
	add(circuit("chilled water, noisy", w, VolumeFlow, 12e-3, 6, 12, 4e5), func(o *operating) {
		o.stream.Gives, o.inputs[PartFlow].scatter, o.inputs[PartInlet].scatter = false, 9e-8, 0.01
	})
	add(circuit("0.1 K of difference", w, VolumeFlow, 5e-3, 60.1, 60, 4e5), nil)
	add(circuit("no difference, matched pair", w, VolumeFlow, 5e-3, 60, 60, 4e5), func(o *operating) { o.stream.Pair = 0.9 })
	add(circuit("0.05 K the wrong way, coarse numbers", w, MassFlow, 5, 60, 60.05, 4e5), func(o *operating) {
		o.stream.Pair, o.inputs[PartOutlet].coarse, o.inputs[PartInlet].scatter = 0.7, 0.01/12, 4e-4
	})
	add(circuit("flow near nothing", w, MassFlow, 0.02, 80, 30, 4e5), func(o *operating) { o.inputs[PartFlow].accuracy = 0.004 })
	glycol, _ := aqueous.New("propylene glycol", 0.32, 0.02)
	add(circuit("glycol of vague strength", glycol, VolumeFlow, 6e-3, -4, 2, 3e5), func(o *operating) {
		o.stream.Gives, o.fluid = false, mixed(t, "propylene glycol", 0.32, 0.02)
	})
	ethanol, _ := aqueous.New("ethanol", 0.35, 0.02)
	add(circuit("spirit of vague strength, metered at the outlet", ethanol, VolumeFlow, 1e-3, 35, 5, 3e5), func(o *operating) {
		o.stream.MeterAtOutlet, o.fluid = true, mixed(t, "ethanol", 0.35, 0.02)
	})
	add(circuit("hot oil", oil, VolumeFlow, 4e-3, 240, 180, 3e5), func(o *operating) {
		o.inputs[PartInlet], o.inputs[PartOutlet] = doubt{accuracy: 2.5 / math.Sqrt(3)}, doubt{accuracy: 2.5 / math.Sqrt(3)}
	})
	add(circuit("humid air by volume", humid.Live(), VolumeFlow, 0.8, 15, 32, 1.01e5), func(o *operating) {
		o.stream.Gives, o.stream.HumidityKind, o.x.Humidity = false, thermo.RelativeHumidity, 0.6
		o.inputs[PartFlow].accuracy, o.inputs[PartPressure].accuracy, o.inputs[PartHumidity].accuracy = 0.01, 300, 0.1
	})
	add(circuit("air by volume", air, VolumeFlow, 0.8, 180, 60, 1.02e5), func(o *operating) {
		o.inputs[PartFlow].accuracy, o.inputs[PartPressure].accuracy = 0.04, 1e3
	})
	for _, kind := range []FlowKind{MassFlow, VolumeFlow, MolarFlow} {
		unit := map[FlowKind]string{MassFlow: "kg/s", VolumeFlow: "m³/s", MolarFlow: "mol/s"}[kind]
		add(circuit("air by orifice, in "+unit, air, kind, 2, 180, 60, 6e5), func(o *operating) {
			o.stream.CalibratedAt, o.stream.MeterAtOutlet = 3.8, kind == MassFlow
			o.inputs[PartFlow].accuracy, o.inputs[PartPressure].accuracy = 0.01, 25e3
			o.inputs[PartInlet], o.inputs[PartOutlet] = doubt{accuracy: 4}, doubt{accuracy: 3, scatter: 1}
		})
	}
	add(circuit("glycol of vague strength by orifice", glycol, VolumeFlow, 6e-3, -4, 2, 3e5), func(o *operating) {
		o.stream.Gives, o.fluid, o.stream.CalibratedAt = false, mixed(t, "propylene glycol", 0.32, 0.02), 998
	})
	add(circuit("oil of uncertain density by orifice", oil, MassFlow, 4, 240, 180, 3e5), func(o *operating) { o.stream.CalibratedAt = 900 })
	return all
}

// Uncertainty of duty by the law of propagation against that by propagation of
// distributions (JCGM 101:2008, clause 8). With all errors that last normal, both ends of
// the 95 % interval, y ± 1.96·u, agree within the tolerance of u with two digits, widened
// by three standard errors of the draws.
func TestDutyByDraws(t *testing.T) {
	const n = 60_000
	for i, o := range operatingPoints(t) {
		f := o.figure(t)
		s := drawn(n, uint64(i), o.draws(t, normal))
		u := f.Uncertainty
		delta := tolerance(u)
		end := delta + 3*math.Sqrt(0.025*0.975/n)/0.058*u
		t.Logf("%-48s %10.5g W ± %8.4g, drawn ± %8.4g; ends off by %+.3f and %+.3f u, tolerance %.3f u",
			o.name, f.Duty, u, s.sd, (s.lo-f.Duty)/u+1.96, (s.hi-f.Duty)/u-1.96, delta/u)
		near(t, o.name+": mean", s.mean, f.Duty, delta+3*u/math.Sqrt(n))
		near(t, o.name+": standard uncertainty", s.sd, u, delta+3*u/math.Sqrt(2*n))
		near(t, o.name+": lower end", s.lo, f.Duty-1.96*u, end)
		near(t, o.name+": upper end", s.hi, f.Duty+1.96*u, end)
	}
}

// Limits of error are rectangular, and their sum is narrower than normal: by the law's own
// interval too wide, which JCGM 101:2008 shows in its 9.2.3 and 9.2.4. So the ends are held
// to two bounds: y ± 2·u has at least 95 % of the draws, and the interval that has 95 % is no
// narrower than that of one rectangle alone, 0.95·√3·u to each side.
func TestDutyByDrawsWithinLimitsOfError(t *testing.T) {
	const n = 30_000
	for i, o := range operatingPoints(t) {
		f := o.figure(t)
		s := drawn(n, uint64(100+i), o.draws(t, rectangular))
		u := f.Uncertainty
		covered := s.within(f.Duty, 2*u)
		half := (s.hi - s.lo) / 2 / u
		t.Logf("%-48s drawn ± %.4f u; ± 2 u has %.4f of them, and 95 %% are in ± %.3f u", o.name, s.sd/u, covered, half)
		near(t, o.name+": standard uncertainty", s.sd, u, tolerance(u)+3*u/math.Sqrt(2*n))
		if covered < 0.95-3*math.Sqrt(0.95*0.05/n) {
			t.Errorf("%s: ± 2·u has %.4f of the draws", o.name, covered)
		}
		if half < 0.95*math.Sqrt(3)-0.01 || half > 2 {
			t.Errorf("%s: 95 %% of the draws are in ± %.3f·u", o.name, half)
		}
	}
}
