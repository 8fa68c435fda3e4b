package fluidtest

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"heatreeve/thermo"
)

// sound is a made-up liquid with cp = 4000 J/(kg K), 1000 kg/m³, that freezes at
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
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/1000, Cp: 4000, Cv: 4000, Density: 1000}, nil
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
