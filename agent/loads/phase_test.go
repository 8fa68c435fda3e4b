package loads

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// vapour is a gas with w kg of vapour per kg of dry gas, whose dew point rises by 1 K
// a gram and by 1 K a bar, from 273.15 K: figures for the head. Its cp is 1000 J/(kg K)
// when dry and 2000 J/(kg K) more for each kg/kg of vapour.
type vapour struct {
	steady
	w float64
}

func newVapour(w float64) vapour {
	return vapour{steady{cp: 1000 + 2000*w, rho: 1, phase: thermo.Gas}, w}
}

func (v vapour) Span(p float64) (float64, float64) {
	return 273.15 + 1e3*v.w + p/1e5, math.Inf(1)
}

func (v vapour) Sensible(T, p float64) (thermo.Properties, error) { return v.steady.At(T, p) }

func (v vapour) At(T, p float64) (thermo.Properties, error) {
	if lo, _ := v.Span(p); T < lo {
		return thermo.Properties{}, &thermo.RangeError{Fluid: "vapour", Quantity: "temperature", Value: T, Bound: lo, Below: true, Why: "dew point"}
	}
	return v.Sensible(T, p)
}

// live is a vapour whose humidity comes from a tag: as a humidity ratio, or as a
// relative humidity φ of φ·(T − 273.15 K) grams.
type live struct{ vapour }

func (live) Carrying(m thermo.Moisture, T, p float64) (thermo.Wet, error) {
	if m.Kind == thermo.HumidityRatio {
		return newVapour(m.Value), nil
	}
	if !(m.Value >= 0 && m.Value <= 1) {
		return nil, fmt.Errorf("relative humidity of %g %% is not between 0 %% and 100 %%", 100*m.Value)
	}
	return newVapour(m.Value * (T - 273.15) / 1e3), nil
}

const (
	humidity = 3
	coil     = 4
)

// airCooler is a load that cools 2 kg/s of a humid gas, at 0 Pa so that the dew point
// is that of the grams alone.
func airCooler(kind thermo.MoistureKind, hasCoil bool) Config {
	cfg := plant(live{newVapour(0)})
	cfg.Tags = append(cfg.Tags, Tag{Name: "MT", MaxAge: minute}, Tag{Name: "TC", MaxAge: minute})
	s := &cfg.Loads[0].Stream
	s.Pressure, s.OutletPressure, s.Margin = Constant(0), Constant(0), 1
	s.Humidity, s.HumidityKind = FromTag(humidity), kind
	s.Coil, s.HasCoil = FromTag(coil), hasCoil
	return cfg
}

func airAt(s, inC, outC, moisture, coilC float64) []Reading {
	t := epoch + int64(s*1e9)
	return append(at(s, 2, 273.15+inC, 273.15+outC), Reading{Tag: humidity, At: t, Value: moisture}, Reading{Tag: coil, At: t, Value: 273.15 + coilC})
}

// A heater that barely warms air near saturation dries it all the same, and a coil
// warmer than the inlet cools nothing.
func TestHeatedAirDoesNotCondense(t *testing.T) {
	for _, hasCoil := range []bool{false, true} {
		e := engine(t, airCooler(thermo.HumidityRatio, hasCoil))
		e.Advance(Beat{airAt(0, 10.1, 10.6, 0.010, 10.9), through(1)}, nil)
		if f := e.Snapshot().Loads[0].Figure; f.Fault != NoFault || f.Latent || f.Note != "" {
			t.Errorf("coil %v: fault %v, latent %v, note %q", hasCoil, f.Fault, f.Latent, f.Note)
		}
	}
}

// 2 kg/s with 10 g/kg have cp = 1020 J/(kg K): 20 K are 40.8 kW of sensible heat, above
// the dew point of 10 °C and below it.
func TestSensiblePartOfAWetGas(t *testing.T) {
	for _, tt := range []struct {
		name          string
		in, out, coil float64
		hasCoil       bool
		latent        bool
		inNote        string
	}{
		{name: "dry coil", in: 32, out: 12, coil: 11.5, hasCoil: true},
		{name: "outlet near", in: 30.5, out: 10.5, coil: 40, hasCoil: true, latent: true, inNote: "sensible part only: outlet at 10.50 °C is within 1 K of the dew point at 10.00 °C"},
		{name: "outlet below", in: 25, out: 5, latent: true, inNote: "sensible part only: outlet at 5.00 °C is below the dew point at 10.00 °C"},
		{name: "coil below", in: 36, out: 16, coil: 6, hasCoil: true, latent: true, inNote: "sensible part only: coil at 6.00 °C is below the dew point at 10.00 °C"},
		{name: "cold coil that the load has not", in: 36, out: 16, coil: 6},
		{name: "heated from near saturation", in: 10.1, out: 30.1},
	} {
		e := engine(t, airCooler(thermo.HumidityRatio, tt.hasCoil))
		e.Advance(Beat{airAt(0, tt.in, tt.out, 0.010, tt.coil), through(1)}, nil)
		l := e.Snapshot().Loads[0]
		f := l.Figure
		if f.Fault != NoFault || f.Latent != tt.latent || !strings.HasPrefix(f.Note, tt.inNote) || (f.Note != "") != tt.latent {
			t.Errorf("%s: fault %v (%s), latent %v, note %q; want latent %v and %q", tt.name, f.Fault, f.Reason, f.Latent, f.Note, tt.latent, tt.inNote)
		}
		near(t, tt.name, math.Abs(f.Duty), 40.8e3, 1e-6)
		near(t, tt.name+", booked", l.Given+l.Taken, 40.8e3, 1e-6)
	}
}

// A gas of constant composition that comes in below its dew point carries fog.
func TestFogAtTheInlet(t *testing.T) {
	s := Stream{Fluid: newVapour(0.010), FlowKind: MassFlow, Margin: 1}
	r, err := Work(&s, State{Flow: 2, Inlet: 273.15 + 9.9, Outlet: 273.15 + 29.9})
	if err != nil || !r.Latent || !strings.HasPrefix(r.Note, "sensible part only: inlet at 9.90 °C is below") {
		t.Errorf("%+v, %v; want a remark on the inlet", r.Remark, err)
	}
	near(t, "duty", r.Duty, 2*1020*20, 1e-6)
}

func TestHumidityThatIsNone(t *testing.T) {
	cfg := airCooler(thermo.RelativeHumidity, true)
	cfg.Tags[humidity].MaxAge = 10 * second
	cfg.Tags[coil].MaxAge = 20 * second
	for _, tt := range []struct {
		name     string
		readings []Reading
		until    float64
		fault    Fault
		inReason string
	}{
		{"no reading", at(0, 2, 300, 290), 1, NoReading, `"MT"`},
		{"beyond saturation", airAt(0, 30, 20, 1.2, 25), 1, OutOfRange, "humidity at the inlet: relative humidity of 120 %"},
		{"stale", airAt(0, 30, 20, 0.5, 25), 11, Stale, `"MT"`},
		{"stale coil", append(airAt(0, 30, 20, 0.5, 25), Reading{Tag: humidity, At: epoch + 15*second, Value: 0.5}), 21, Stale, `"TC"`},
		{"good", airAt(0, 30, 20, 0.5, 25), 10, NoFault, ""},
	} {
		e := engine(t, cfg)
		e.Advance(Beat{tt.readings, through(tt.until)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Fault != tt.fault || !strings.Contains(f.Reason, tt.inReason) {
			t.Errorf("%s: fault %v, reason %q; want %v, ...%s...", tt.name, f.Fault, f.Reason, tt.fault, tt.inReason)
		}
	}
}

// The humidity's age counts while air flows, and not while the load is idle.
func TestUntilKnowsTheHumidity(t *testing.T) {
	cfg := airCooler(thermo.RelativeHumidity, false)
	cfg.Tags[humidity].MaxAge = 10 * second
	for flowing, want := range map[float64]int64{2: through(10), 0: through(60)} {
		e := engine(t, cfg)
		readings := airAt(0, 30, 20, 0.5, 25)
		readings[0].Value = flowing
		e.Advance(Beat{readings, through(5)}, nil)
		l := e.Snapshot().Loads[0]
		if l.Until != want || l.Figure.Until != want {
			t.Errorf("flow %g: until %d s, the figure's %d s; want %d s", flowing, (l.Until-epoch)/second, (l.Figure.Until-epoch)/second, (want-epoch)/second)
		}
	}
}

// By hand: w = φ·(T1 − 273.15 K)/1000, Q = 2·(1000 + 2000·w)·(T1 − T2). At φ = 0.5,
// T1 = 30 °C, T2 = 10 °C, w = 0.015: ∂Q/∂φ = 2·2000·0.030·20 = 2400 W, and
// ∂Q/∂T1 = 2·1030 + 2·2000·0.0005·20 = 2100 W/K, for the warmer the inlet, the more
// vapour the same relative humidity is.
func TestHumidityIsAPartOfTheUncertainty(t *testing.T) {
	cfg := airCooler(thermo.RelativeHumidity, false)
	root3 := math.Sqrt(3)
	cfg.Tags[humidity].Accuracy = Accuracy{Abs: 0.03 * root3}
	cfg.Tags[inlet].Accuracy = Accuracy{Abs: 0.1 * root3}
	e := engine(t, cfg)
	e.Advance(Beat{airAt(0, 30, 10, 0.5, 25), through(1)}, nil)
	f := e.Snapshot().Loads[0].Figure
	near(t, "duty", f.Duty, 41.2e3, 1e-6)
	near(t, "share of the humidity", f.Share[PartHumidity], 72, 1e-6)
	near(t, "share of the inlet", f.Share[PartInlet], 210, 1e-6)
	near(t, "uncertainty", f.Uncertainty, math.Hypot(72, 210), 1e-6)

	saturated := airAt(0, 30, 10, 1, 25) // only the drier side is there
	e = engine(t, cfg)
	e.Advance(Beat{saturated, through(1)}, nil)
	near(t, "share at saturation", e.Snapshot().Loads[0].Figure.Share[PartHumidity], 72, 1e-6)
}

func TestHumidityWantsAHumidFluid(t *testing.T) {
	cfg := airCooler(thermo.RelativeHumidity, false)
	cfg.Loads[0].Stream.Fluid = newVapour(0.01)
	if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), `"boiler"`) {
		t.Errorf("New: %v, want an error that names the load", err)
	}
	if _, err := Work(&cfg.Loads[0].Stream, State{Flow: 1}); err == nil || !strings.Contains(err.Error(), "steady") {
		t.Errorf("Work: %v, want an error that names the fluid", err)
	}
}

// The humidity held, and what waits, survive a stop: the next run goes on to the bit.
func TestHumidLoadAfterARestart(t *testing.T) {
	cfg := airCooler(thermo.RelativeHumidity, true)
	cfg.Tags[humidity].Accuracy = Accuracy{Abs: 0.02}
	straight, stopped := engine(t, cfg), engine(t, cfg)
	feed := func(e *Engine, from, to int) {
		for s := from; s < to; s++ {
			x := float64(s)
			e.Advance(Beat{airAt(x, 30+x/7, 12-x/90, 0.5+x/977, 9), through(x - 4)}, nil)
		}
	}
	feed(straight, 0, 200)
	feed(stopped, 0, 77)
	state, err := stopped.Save()
	if err != nil {
		t.Fatal(err)
	}
	again := engine(t, cfg)
	if err := again.Restore(state); err != nil {
		t.Fatal(err)
	}
	feed(again, 77, 200)
	if got, want := fingerprint(again), fingerprint(straight); !slices.Equal(got, want) {
		t.Errorf("%x, want %x", got, want)
	}
	if f := again.Snapshot().Loads[0].Figure; !f.Latent || f.Remark != straight.Snapshot().Loads[0].Figure.Remark {
		t.Errorf("remark %+v, want that of the run without a stop", f.Remark)
	}
}

// A chilled circuit 5 K above freezing has nothing to remark upon, one 2 K above has,
// and both have their duty; a margin of less than 3 K is the margin here too.
func TestNearFreezing(t *testing.T) {
	for _, tt := range []struct {
		ti, to, margin float64
		fault          Fault
		inNote         string
	}{
		{12, 6, 5, NoFault, ""},
		{12, 5, 20, NoFault, ""},
		{12, 2, 20, NoFault, "near freezing: outlet at 2.00 °C is within 3 K of freezing at 0.00 °C"},
		{1, 6, 5, NoFault, "near freezing: inlet at 1.00 °C is within 3 K of freezing"},
		{12, 2, 1, NoFault, ""},
		{12, 0.5, 1, NoFault, "near freezing: outlet at 0.50 °C is within 1 K of freezing"},
	} {
		cfg := plant(liquid)
		cfg.Loads[0].Stream.Margin = tt.margin
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 2, 273.15+tt.ti, 273.15+tt.to), through(1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Fault != tt.fault || f.Latent || !strings.HasPrefix(f.Note, tt.inNote) || (f.Note == "") != (tt.inNote == "") {
			t.Errorf("%g to %g °C, margin %g K: fault %v, note %q; want %v, %q", tt.ti, tt.to, tt.margin, f.Fault, f.Note, tt.fault, tt.inNote)
		}
		near(t, "duty", f.Duty, 8000*(tt.ti-tt.to), 1e-6)
	}
}
