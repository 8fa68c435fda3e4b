package loads

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/water"
)

// closed is a plant of one vessel: its temperature is tag 0, its pressure tag 1 and its
// content tag 2, where v says so.
func closed(v Vessel) Config {
	return Config{
		Grid:  second,
		Tags:  []Tag{{Name: "TT", MaxAge: 2 * minute}, {Name: "PT", MaxAge: 2 * minute}, {Name: "LT", MaxAge: 2 * minute}},
		Loads: []Load{{Name: "tank", Vessel: &v}},
	}
}

// follows puts the readings of the function through the engine, every dt seconds in
// [from, to], and books what ends by then.
func follows(e *Engine, tag int, from, to, dt float64, value func(s float64) float64) {
	for s := from; s <= to; s += dt {
		e.Advance(Beat{[]Reading{{Tag: tag, At: through(s), Value: value(s)}}, through(s)}, nil)
	}
}

// 500 kg of water that warm by 1.5 K in 10 minutes take 5.24 kW (m·c·ΔT/t with 4.19 kJ/(kg K),
// that of water near 70 °C).
func TestVesselOfWater(t *testing.T) {
	v := tank()
	v.Fluid = water.Liquid()
	e := engine(t, closed(v))
	follows(e, 0, 0, 1200, 10, func(s float64) float64 { return 342.4 + 1.5*s/600 })
	f := e.Snapshot().Loads[0].Figure
	near(t, "duty", f.Duty, 5.24e3, 5)
	near(t, "rate", f.Rate, 1.5/600, 1e-12)
	near(t, "content", f.Content, 342.4+3, 0.03)
	near(t, "mass", f.Mass, 500, 0)
}

// Heat of the content is positive in the vessel's service, and the registers know which
// way it went.
func TestVesselSigns(t *testing.T) {
	for _, tt := range []struct {
		gives              bool
		rate               float64
		duty, given, taken float64 // W
	}{
		{false, 1e-3, 2000, 0, 2000},
		{false, -1e-3, -2000, 2000, 0},
		{true, -1e-3, 2000, 2000, 0},
		{true, 1e-3, -2000, 0, 2000},
	} {
		v := tank()
		v.Gives = tt.gives
		e := engine(t, closed(v))
		follows(e, 0, 0, 300+600, 10, func(s float64) float64 { return 320 + tt.rate*s })
		l := e.Snapshot().Loads[0]
		near(t, "duty", l.Figure.Duty, tt.duty, 1e-6)
		near(t, "given", l.Given, 600*tt.given, 1e-3)
		near(t, "taken", l.Taken, 600*tt.taken, 1e-3)
		if l.Measured != 600*second || l.Missing != 300*second {
			t.Errorf("measured %d s, missing %d s; want 600, and 300 until half of the span has readings", l.Measured/second, l.Missing/second)
		}
	}
}

// A tank at rest is heated with 20 kW for an hour and rests again. What is booked is
// the heat, late by half the span: the rate stands for the middle of it. Where the line
// bends, scatter about it is taken for uncertainty, and the first and last few watts are not
// told from rest.
func TestVesselHeatedForAnHour(t *testing.T) {
	v := tank()
	v.Shell = 50e3
	const power, from, to = 20e3, 1800.0, 1800.0 + 3600
	capacity := 500*4000 + v.Shell
	e := engine(t, closed(v))
	level := func(s float64) float64 { return 320 + power/capacity*(min(max(s, from), to)-from) }
	follows(e, 0, 0, (from+to)/2, 10, level)
	l := e.Snapshot().Loads[0]
	near(t, "duty in the middle", l.Figure.Duty, power, 1e-6)
	near(t, "taken by the middle", l.Taken, power*(1800-300), 2e-3*power*1800)
	follows(e, 0, (from+to)/2+10, to+1200, 10, level)
	l = e.Snapshot().Loads[0]
	near(t, "taken", l.Taken, power*3600, 1e-4*power*3600)
	near(t, "given", l.Given, 0, 0)
}

// A tank that cools towards its surroundings: T = Ta + D·e^(−t/τ). The line through a
// span w has a closed form, with h = w/2τ: −D/τ·e^(−tm/τ)·3·(h·cosh h − sinh h)/h³, tm the
// middle. The heat over two hours is that of the temperatures half a span before their ends.
func TestVesselThatCools(t *testing.T) {
	v := tank()
	v.Gives = true
	const surroundings, D, tau, capacity = 290.0, 60.0, 4 * 3600.0, 500 * 4000.0
	e := engine(t, closed(v))
	temperature := func(s float64) float64 { return surroundings + D*math.Exp(-s/tau) }
	follows(e, 0, 0, 3600, 5, temperature)
	before := e.Snapshot().Loads[0]
	h := 600 / tau / 2
	want := capacity * D / tau * math.Exp(-(3600-300)/tau) * 3 * (h*math.Cosh(h) - math.Sinh(h)) / (h * h * h)
	near(t, "duty", before.Figure.Duty, want, 1e-3*want)
	follows(e, 0, 3605, 3*3600, 5, temperature)
	heat := e.Snapshot().Loads[0].Given - before.Given
	want = capacity * (temperature(3600-300) - temperature(3*3600-300))
	near(t, "heat of two hours", heat, want, 1e-3*want)
}

// Nitrogen in a vessel of constant volume: dU/dt is m·(u2 − u1)/Δt of the fluid itself, and
// less than dH/dt at constant pressure by m·R/M·dT/dt (cp − cv = R of an ideal gas).
func TestRigidVesselOfGas(t *testing.T) {
	n2, err := gas.New(map[string]float64{"N2": 1}, gas.Ideal)
	if err != nil {
		t.Fatal(err)
	}
	const rate, T0, p0 = 0.02, 300.0, 5e5
	duty := make(map[bool]float64)
	for _, rigid := range []bool{true, false} {
		v := Vessel{Fluid: n2, Temperature: FromTag(0), Pressure: FromTag(1), Rigid: rigid,
			Content: Constant(40), ContentKind: ContentMass, Over: 5 * minute}
		e := engine(t, closed(v))
		for s := 0.0; s <= 600; s += 5 {
			T := T0 + rate*s
			e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: T}, {Tag: 1, At: through(s), Value: p0 * T / T0}}, through(s)}, nil)
		}
		duty[rigid] = e.Snapshot().Loads[0].Figure.Duty
	}
	a, err1 := n2.At(T0+rate*300, p0*(1+rate*300/T0))
	b, err2 := n2.At(T0+rate*600, p0*(1+rate*600/T0))
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	want := 40 * (b.InternalEnergy - a.InternalEnergy) / 300
	near(t, "dU/dt", duty[true], want, 1e-5*want)
	near(t, "dH/dt − dU/dt", duty[false]-duty[true], 40*thermo.R/n2.MolarMass()*rate, 1e-3)
}

// Steam is not ideal. In 3 m³ of constant volume it goes along the states of its own
// density; the heat of the two hours between them is m·(u2 − u1).
func TestRigidVesselOfSteam(t *testing.T) {
	steam := water.Steam()
	v := Vessel{Fluid: steam, Temperature: FromTag(0), Pressure: FromTag(1), Rigid: true,
		Content: Constant(3), ContentKind: ContentVolume, Over: 5 * minute}
	e := engine(t, closed(v))
	first, err := steam.At(520, 1e6)
	if err != nil {
		t.Fatal(err)
	}
	temperature := func(s float64) float64 { return 520 + s/60 }
	var at [2]thermo.Properties
	for s, p := 0.0, 1e6; s <= 7200+150+150; s += 10 {
		var state thermo.Properties
		state, p = isochore(t, steam, first.Density, temperature(s), p)
		switch s {
		case 0:
			at[0] = state
		case 7200:
			at[1] = state
		}
		e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: temperature(s)}, {Tag: 1, At: through(s), Value: p}}, through(s)}, nil)
	}
	l := e.Snapshot().Loads[0]
	want := 3 * first.Density * (at[1].InternalEnergy - at[0].InternalEnergy)
	// from 150 s on, when half of the span has readings, for 7350 s
	near(t, "heat", l.Taken, want*7350/7200, 2e-3*want)
	near(t, "mass", l.Figure.Mass, 3*first.Density, 1e-9*first.Density)
}

// isochore finds the state of the given density at T, from the guess p of its pressure.
func isochore(t *testing.T, f thermo.Fluid, density, T, p float64) (thermo.Properties, float64) {
	t.Helper()
	for range 100 {
		s, err := f.At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(density/s.Density-1) < 1e-12 {
			return s, p
		}
		p *= density / s.Density
	}
	t.Fatalf("no pressure at which %s has %g kg/m³ at %g K", f.Name(), density, T)
	return thermo.Properties{}, 0
}

// While a vessel is filled its temperature tells what came in, not what was heated. It is
// still again once the span holds one content only.
func TestVesselBeingFilled(t *testing.T) {
	v := tank()
	v.Content = FromTag(2)
	e := engine(t, closed(v))
	for s := 0.0; s <= 3600; s += 10 {
		kg := 500 + 2*math.Sin(s) // restless by 0.8 %
		if s >= 1800 {
			kg += 100
		}
		e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: 320 + s/1000}, {Tag: 2, At: through(s), Value: kg}}, through(s)}, nil)
		switch f := e.Snapshot().Loads[0].Figure; {
		case s > 310 && s <= 1800 || s >= 2410:
			if f.Fault != NoFault {
				t.Fatalf("%g s: fault %v (%s)", s, f.Fault, f.Reason)
			}
		case s >= 1810 && s < 2390:
			if f.Fault != Moving || !strings.Contains(f.Reason, "in the last 600 s, by more than 1 %") {
				t.Fatalf("%g s: fault %v (%s), want content changing", s, f.Fault, f.Reason)
			}
		}
	}
}

func TestVesselFaults(t *testing.T) {
	gone := tank()
	gone.Content = FromTag(2)
	hot := tank()
	hot.Margin = 5
	for _, tt := range []struct {
		name  string
		v     Vessel
		T     float64
		fault Fault
		want  string
	}{
		{"no content yet", gone, 320, NoReading, `tag "LT"`},
		{"near boiling", hot, 416, Saturation, "content at 142.85 °C is within 5 K of boiling at 146.85 °C"},
		{"out of range", Vessel{Fluid: steady{cp: 1, rho: 1, hi: 9999, phase: thermo.Liquid}, Temperature: FromTag(0), Pressure: Constant(1e5),
			Content: Constant(1), ContentKind: ContentMass, Over: minute}, 601, OutOfRange, "content: steady"},
	} {
		e := engine(t, closed(tt.v))
		follows(e, 0, 0, 900, 10, func(float64) float64 { return tt.T })
		if f := e.Snapshot().Loads[0].Figure; f.Fault != tt.fault || !strings.Contains(f.Reason, tt.want) {
			t.Errorf("%s: fault %v, reason %q; want %v, %q", tt.name, f.Fault, f.Reason, tt.fault, tt.want)
		}
	}
	e := engine(t, closed(tank()))
	follows(e, 0, 0, 200, 10, func(float64) float64 { return 320 })
	checkFigure(t, e, Fitting, `tag "TT": 20 points over 190 s of the last 600 s do not tell a rate yet; 3 over half of it do`)
	negative := tank()
	negative.Content = FromTag(2)
	e = engine(t, closed(negative))
	for s := 0.0; s <= 600; s += 10 {
		e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: 320}, {Tag: 2, At: through(s), Value: -1}}, through(s)}, nil)
	}
	checkFigure(t, e, OutOfRange, "content of -1 kg: it must not be below zero, nor more than any vessel holds")
}

// A thermometer that reports by exception stands still between its reports, which is
// known while its source is alive. 1 K an hour, told in steps of 0.5 K, is not told from
// rest within ten minutes, and comes out within four hours.
func TestVesselByException(t *testing.T) {
	for _, over := range []int64{10, 240} {
		v := tank()
		v.Over = over * minute
		cfg := closed(v)
		cfg.Tags[0].OnChange, cfg.Tags[0].Alive, cfg.Tags[0].Deadband = true, 1, 0.5
		e := engine(t, cfg)
		last, before := 0.0, 0.0
		for s := 0.0; s <= 30*hours; s += 60 {
			beat := Beat{[]Reading{{Tag: 1, At: through(s), Value: 1}}, through(s)}
			if T := 320 + s/hours; math.Abs(T-last) >= 0.5 {
				beat.Readings = append(beat.Readings, Reading{Tag: 0, At: through(s), Value: T})
				last = T
			}
			e.Advance(beat, nil)
			if s == 6*hours {
				before = e.Snapshot().Loads[0].Taken
			}
		}
		l := e.Snapshot().Loads[0]
		span := float64(over) * 59 / 60 * 60
		near(t, "uncertainty of the rate", l.Figure.Random/(500*4000), 0.5*math.Sqrt(1.5)/span, 0.1*0.5/span)
		switch heat := l.Taken - before; {
		case l.Figure.Fault != NoFault:
			t.Fatalf("fault %v (%s)", l.Figure.Fault, l.Figure.Reason)
		case over == 10 && !(l.Figure.Idle && heat == 0):
			t.Errorf("duty %g W, heat %g J; want a vessel at rest", l.Figure.Duty, heat)
		case over == 240:
			near(t, "heat of a day", heat, 500*4000*24, 0.02*500*4000*24)
		}
	}
}

// The parts of the uncertainty by hand (JCGM 100:2008, 5.1.2): of 500 kg ± 2 % at 4 kJ/(kg K) ±
// 0.5 %, with a shell of 200 kJ/K ± 10 %/√3, warming by 1 mK/s under a thermometer of
// ± (0.3 K + 0.005·|t|)/√3, the offset of which does not count.
func TestVesselUncertaintyByHand(t *testing.T) {
	root3 := math.Sqrt(3)
	v := tank()
	f := liquid
	f.uCp = 0.005
	v.Fluid, v.Content, v.Shell, v.Still = f, FromTag(2), 200e3, 0.01
	cfg := closed(v)
	cfg.Tags[2].Accuracy = Accuracy{Rel: 0.02 * root3}
	for _, offset := range []float64{0.3, 3} {
		cfg.Tags[0].Accuracy = Accuracy{Abs: offset, Rel: 0.005, Zero: 273.15}
		e := engine(t, cfg)
		for s := 0.0; s <= 900; s += 10 {
			wobble := 0.01 * float64(1-2*(int(s/10)%2)) // a scatter of 0.01 K about the line
			e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: 320 + s/1000 + wobble}, {Tag: 2, At: through(s), Value: 500}}, through(s)}, nil)
		}
		g := e.Snapshot().Loads[0].Figure
		near(t, "duty", g.Duty, 2200, 5) // the wobble is not quite level
		near(t, "share of heat capacity", g.Share[PartCp], 2000*0.005, 0.03)
		content := math.Sqrt(math.Pow(2000*0.02, 2) + math.Pow(200*0.1/root3, 2) + math.Pow(2200*0.005/root3, 2))
		near(t, "share of the content", g.Share[PartContent], content, 0.1)
		random := 2.2e6 * 0.01 * math.Sqrt(12./(60*(60*60-1))) / 10
		near(t, "random", g.Random, random, 0.03*random)
		near(t, "variance in a second", g.Variance, g.Random*g.Random*600, 1e-6*g.Variance)
		near(t, "uncertainty", g.Uncertainty, math.Sqrt(content*content+10*10+random*random), 1)
	}
}

// Gas by volume is as much as its density says: one per cent of pressure is one per cent of
// the duty, and the density's own uncertainty counts.
func TestVesselByVolume(t *testing.T) {
	n2, err := gas.New(map[string]float64{"N2": 1}, gas.Ideal)
	if err != nil {
		t.Fatal(err)
	}
	v := Vessel{Fluid: n2, Temperature: FromTag(0), Pressure: FromTag(1), Rigid: true, Gives: true,
		Content: Constant(10), ContentKind: ContentVolume, Over: 5 * minute}
	cfg := closed(v)
	cfg.Tags[1].Accuracy = Accuracy{Rel: 0.01 * math.Sqrt(3)}
	e := engine(t, cfg)
	for s := 0.0; s <= 600; s += 5 {
		e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: 400 - s/50}, {Tag: 1, At: through(s), Value: 5e5 * (1 - s/50/400)}}, through(s)}, nil)
	}
	f := e.Snapshot().Loads[0].Figure
	now, err := n2.At(f.Content, f.Pressure)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "mass", f.Mass, 10*now.Density, 1e-9*f.Mass)
	near(t, "mass stays", f.Mass, 10*5e5*n2.MolarMass()/thermo.R/400, 1e-6*f.Mass)
	near(t, "share of the pressure", f.Share[PartPressure], 0.01*f.Duty, 1e-3*f.Duty)
	_, density := n2.Uncertainty(f.Content, f.Pressure)
	near(t, "share of the density", f.Share[PartDensity], density*f.Duty, 0.02*density*f.Duty)
	if !(f.Duty > 0 && f.Share[PartDensity] > 0) {
		t.Errorf("duty %g W, share of the density %g W; want both above zero", f.Duty, f.Share[PartDensity])
	}
}

// Ice forms in a tank before its mean is at freezing: the duty stands, with a remark.
func TestVesselNearFreezing(t *testing.T) {
	v := tank()
	v.Gives, v.Margin = true, 5
	e := engine(t, closed(v))
	follows(e, 0, 0, 900, 10, func(s float64) float64 { return 276 - s/1000 })
	f := e.Snapshot().Loads[0].Figure
	const want = "near freezing: content at 1.96 °C is within 3 K of freezing at 0.00 °C (500.0 kPa absolute), and ice is not in the duty"
	if f.Note != want || f.Latent {
		t.Errorf("note %q, latent %v; want %q", f.Note, f.Latent, want)
	}
	near(t, "duty", f.Duty, 2000, 1e-6)
}

// What a tag read before its source was gone is no part of the slope afterwards.
func TestVesselAfterALapse(t *testing.T) {
	cfg := closed(tank())
	cfg.Tags[0].OnChange, cfg.Tags[0].Alive = true, 1
	e := engine(t, cfg)
	for s := 0.0; s <= 1800; s += 10 {
		if s > 900 && s < 1100 {
			continue
		}
		T := 320 + s/1000
		if s >= 1100 {
			T += 30 // another tank, for all we know
		}
		e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: T}, {Tag: 1, At: through(s), Value: 1}}, through(s)}, nil)
		f := e.Snapshot().Loads[0].Figure
		switch {
		case s >= 310 && s <= 900 || s >= 1410:
			near(t, "duty", f.Duty, 2000, 1e-6)
		case s > 1110 && s < 1390 && f.Fault != Fitting:
			t.Fatalf("%g s: fault %v (%s), want fitting", s, f.Fault, f.Reason)
		}
	}
}

// Readings of beats that were booked elsewhere are a part of the slope; those of another tag
// or another span are not.
func TestTrendsOverARestart(t *testing.T) {
	e := engine(t, closed(tank()))
	follows(e, 0, 0, 400, 10, func(s float64) float64 { return 320 + s/1000 })
	for s := 410.0; s <= 1200; s += 10 {
		e.Adopt(Beat{[]Reading{{Tag: 0, At: through(s), Value: 320 + s/1000}}, through(s)})
	}
	e.Advance(Beat{nil, through(1201)}, nil)
	near(t, "duty", e.Snapshot().Loads[0].Figure.Duty, 2000, 1e-6)
	other, longer := closed(tank()), closed(tank())
	other.Loads[0].Vessel.Temperature = FromTag(1)
	longer.Loads[0].Vessel.Over *= 2
	for _, tt := range []struct {
		cfg    Config
		points int
	}{{closed(tank()), 60}, {other, 0}, {longer, 0}} {
		next := restarted(t, e, tt.cfg)
		if got := next.loads[0].Trends[ofTemperature].fit(through(1201), false); got.Points != tt.points {
			t.Errorf("%d points after a restart, want %d", got.Points, tt.points)
		}
	}
}
