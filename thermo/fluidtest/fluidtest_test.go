package fluidtest

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"heatreeve/thermo"
)

// sound is a made-up liquid with cp = 4000 J/(kg K), cv a little less, 1000 kg/m³, that freezes at
// 280 K and boils at 360 K; wrong, when set, spoils what it returns.
type sound struct {
	wrong func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error)
}

func (sound) Name() string                  { return "sound" }
func (sound) Source() string                { return "made up" }
func (sound) Phase() thermo.Phase           { return thermo.Liquid }
func (sound) Bounds() thermo.Bounds         { return thermo.Bounds{MinT: 270, MaxT: 370, MinP: 1e3, MaxP: 1e6} }
func (sound) Span(float64) (lo, hi float64) { return 280, 360 }
func (sound) Uncertainty(T, p float64) (cp, density float64) {
	return 0.01, 0.01
}
func (sound) MolarMass() float64 { return 0.018 }

func (f sound) At(T, p float64) (thermo.Properties, error) {
	s, err := f.right(T, p)
	if f.wrong != nil {
		return f.wrong(T, p, s, err)
	}
	return s, err
}

func (f sound) right(T, p float64) (thermo.Properties, error) {
	if err := f.Bounds().Check("sound", T, p, "range"); err != nil {
		return thermo.Properties{}, err
	}
	if T < 280 {
		return thermo.Properties{}, &thermo.RangeError{Fluid: "sound", Quantity: "temperature", Value: T, Bound: 280, Below: true, Why: "freezing point"}
	}
	if T > 360 {
		return thermo.Properties{}, &thermo.RangeError{Fluid: "sound", Quantity: "temperature", Value: T, Bound: 360, Why: "boiling point"}
	}
	h := 4000*(T-300) + p/1000
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/1000, Cp: 4000, Cv: 3990, Density: 1000}, nil
}

func TestSoundFluidPasses(t *testing.T) { Run(t, sound{}) }

// tally counts complaints.
type tally int

func (*tally) Helper()                 {}
func (n *tally) Errorf(string, ...any) { *n++ }

// escaped is where the fault of allocating leaves what it made.
var escaped []byte

// faults of a fluid, each with the check that has to catch it.
var faults = []struct {
	fault, check string
	wrong        func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error)
}{
	{"NaN", "state", edit(func(T float64, s *thermo.Properties) { s.Cv = math.NaN() })},
	{"density of zero", "state", edit(func(T float64, s *thermo.Properties) { s.Density = 0 })},
	{"cv above cp", "state", edit(func(T float64, s *thermo.Properties) { s.Cv = 4001 })},
	{"cv as cp", "state", edit(func(T float64, s *thermo.Properties) { s.Cv = s.Cp })},
	{"u off by 1 J/kg", "state", edit(func(T float64, s *thermo.Properties) { s.InternalEnergy++ })},
	{"cp off by 5e-6", "state", edit(func(T float64, s *thermo.Properties) { s.Cp *= 1 + 5e-6 })},
	{"falling enthalpy", "rising", edit(func(T float64, s *thermo.Properties) { s.Enthalpy *= -1 })},
	{"no bounds", "box", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		return sound{}.right(320, 1e5)
	}},
	{"clamped to the phase", "phase", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		return sound{}.right(min(max(T, 280), 360), p)
	}},
	{"another type of error", "phase", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		if err != nil {
			err = errors.New("out of range")
		}
		return s, err
	}},
	{"an end that is off by a millikelvin", "phase", editError(func(e *thermo.RangeError) { e.Bound -= 1e-3 * side(e) })},
	{"an end that is the very state", "phase", editError(func(e *thermo.RangeError) { e.Bound = e.Value })},
	{"the end on the wrong side", "phase", editError(func(e *thermo.RangeError) { e.Below, e.Bound = !e.Below, e.Value })},
	{"an end in pressure that has nothing to do with it", "phase", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		return s, inPressure(err, p, p*(1+1e-8))
	}},
	{"the wrong name", "box", editError(func(e *thermo.RangeError) { e.Fluid = "oil" })},
	{"the wrong bound", "box", editError(func(e *thermo.RangeError) { e.Bound += 0.1 })},
	{"the wrong side", "box", editError(func(e *thermo.RangeError) { e.Below = !e.Below })},
	{"no reason", "box", editError(func(e *thermo.RangeError) { e.Why = "" })},
	{"NaN let through", "nonsense", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		if math.IsNaN(T) {
			return s, nil
		}
		return s, err
	}},
	{"figures beside an error", "nonsense", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		s.Cp = 1
		return s, err
	}},
	{"an allocation", "allocations", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		escaped = fmt.Appendf(nil, "%g", T)
		return s, err
	}},
}

// Every check must be able to fail: each fault is caught by the check named.
func TestFaultsAreCaught(t *testing.T) {
	for _, tt := range faults {
		f := sound{tt.wrong}
		var n tally
		for _, c := range checks {
			if c.name == tt.check {
				c.check(suite{f: f, states: states(f)}, &n)
			}
		}
		if n == 0 {
			t.Errorf("%s: %q did not notice", tt.fault, tt.check)
		}
	}
	if len(escaped) == 0 {
		t.Error("the fault of allocating was not reached")
	}
}

// unsure knows nothing of its cp at high pressure.
type unsure struct{ sound }

func (unsure) Uncertainty(T, p float64) (cp, density float64) { return p / 5e5, 0.01 }

// brief has a balance of its own, off by a part of it.
type brief struct {
	sound
	off thermo.Balance
}

func (f brief) Balance(T, p float64) (thermo.Balance, error) {
	s, err := f.right(T, p)
	return thermo.Balance{
		Enthalpy: s.Enthalpy * (1 + f.off.Enthalpy),
		Cp:       s.Cp * (1 + f.off.Cp),
		Density:  s.Density * (1 + f.off.Density),
	}, err
}

func TestFaultsOfOtherMethodsAreCaught(t *testing.T) {
	Run(t, brief{})
	for _, tt := range []struct {
		f     thermo.Fluid
		check func(suite, report)
	}{
		{unsure{}, suite.uncertainty},
		{brief{off: thermo.Balance{Enthalpy: 1e-10}}, suite.balance},
		{brief{off: thermo.Balance{Cp: 1e-10}}, suite.balance},
		{brief{off: thermo.Balance{Density: 1e-10}}, suite.balance},
	} {
		var n tally
		tt.check(suite{f: tt.f, states: states(tt.f)}, &n)
		if n == 0 {
			t.Errorf("%+v passed", tt.f)
		}
	}
}

// side is +1 of an upper and -1 of a lower bound.
func side(e *thermo.RangeError) float64 {
	if e.Below {
		return -1
	}
	return 1
}

// inPressure puts the error of a state at p so that it names a bound of pressure.
func inPressure(err error, p, bound float64) error {
	if e := new(thermo.RangeError); errors.As(err, &e) {
		return &thermo.RangeError{Fluid: e.Fluid, Quantity: "pressure", Value: p, Bound: bound, Below: true, Why: e.Why}
	}
	return err
}

// boils is sound but for its boiling point, 360 K at 100 kPa and rising by a tenth of the
// logarithm of the pressure; it names the pressure it needs, off by a fraction.
type boils struct {
	sound
	off float64
}

func (boils) Span(p float64) (lo, hi float64) { return 280, 360 * math.Pow(p/1e5, 0.1) }

func (f boils) At(T, p float64) (thermo.Properties, error) {
	s, err := f.right(min(T, 360), p)
	if _, hi := f.Span(p); err == nil && T > hi {
		boiling := &thermo.RangeError{Fluid: "sound", Why: "boiling point"}
		return thermo.Properties{}, inPressure(boiling, p, 1e5*math.Pow(T/360, 10)*(1+f.off))
	}
	return s, err
}

func TestPressuresOfBoilingAreCompared(t *testing.T) {
	for _, tt := range []struct {
		off   float64
		fails bool
	}{{0, false}, {1e-8, true}, {0.03, true}, {-5e-9, true}} {
		var n tally
		suite{f: boils{off: tt.off}}.phase(&n)
		if (n > 0) != tt.fails {
			t.Errorf("off by %g: %d complaints, want some: %v", tt.off, n, tt.fails)
		}
	}
}

// An incompressible fluid has one heat capacity.
func TestCapacitiesOfIncompressible(t *testing.T) {
	stiff := thermo.NewIncompressible(320, 280, 360, oily{}.expanding)
	f := oily{law: stiff.PressureLaw(), stiff: stiff, spoil: func(p float64, s thermo.Properties) thermo.Properties {
		s.Cv -= 1
		return s
	}}
	var n tally
	suite{f: f, states: states(f)}.everyState(&n)
	if n == 0 {
		t.Error("cv below cp of an incompressible fluid passed")
	}
}

func edit(change func(T float64, s *thermo.Properties)) func(float64, float64, thermo.Properties, error) (thermo.Properties, error) {
	return func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		if err == nil {
			change(T, &s)
		}
		return s, err
	}
}

func editError(change func(*thermo.RangeError)) func(float64, float64, thermo.Properties, error) (thermo.Properties, error) {
	return func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
		if e := new(thermo.RangeError); errors.As(err, &e) {
			change(e)
		}
		return s, err
	}
}
