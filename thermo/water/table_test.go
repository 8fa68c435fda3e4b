package water

import (
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// box is a range to tabulate: K and Pa.
type box struct{ T1, T2, p1, p2 float64 }

func (b box) tabulate(f thermo.Fluid) thermo.Fluid { return Tabulate(f, b.T1, b.T2, b.p1, b.p2) }

var boxes = []struct {
	name    string
	fluid   thermo.Fluid
	box     box
	answers float64 // at least this part of the states of the box
}{
	{"heating water", Liquid(), box{273.15, 473.15, 1e5, 25e5}, 0.97},
	{"chilled water", Liquid(), box{272, 300, 2e5, 10e5}, 0.99},
	{"feed water", Liquid(), box{300, 620, 10e5, 300e5}, 0.9},
	{"water at high pressure", Liquid(), box{273.15, 623.15, 1e5, 100e6}, 0.6},
	{"process steam", Steam(), box{373.15, 673.15, 1e5, 25e5}, 0.98},
	{"narrow steam", Steam(), box{433.15, 523.15, 5e5, 12e5}, 0.98},
	{"vacuum steam", Steam(), box{290, 400, 0, 1e5}, 0.95},
	{"live steam", Steam(), box{673.15, 823.15, 50e5, 150e5}, 0.95},
	{"dense steam", Steam(), box{729, 870, 8e3, 34e6}, 0.9},
	{"supercritical steam", Steam(), box{850, 900, 15e6, 70e6}, 0.9},
	{"steam at any pressure", Steam(), box{360, 1072, 37e6, 75e6}, 0.2},
}

// tableErrors are the largest ones of a table against the exact fluid, relative.
type tableErrors struct {
	box                  string
	h, density, cp, rise float64 // h of 1 kJ/kg at least; rise of h over 1 K
	states, answered     int
}

// add compares a state, at which both have to agree if there is one.
func (e *tableErrors) add(t *testing.T, exact, tabulated func(T, p float64) (thermo.Balance, error), T, p float64) {
	t.Helper()
	want, err := exact(T, p)
	got, err2 := tabulated(T, p)
	if err != nil {
		if err2 == nil || err2.Error() != err.Error() {
			t.Errorf("%s, %g K, %g Pa: %+v, %v; want %v", e.box, T, p, got, err2, err)
		}
		return
	}
	if err2 != nil {
		t.Fatal(err2)
	}
	e.states++
	if got != want {
		e.answered++
	}
	e.h = max(e.h, math.Abs(got.Enthalpy-want.Enthalpy)/max(math.Abs(want.Enthalpy), 1e3))
	e.density = max(e.density, math.Abs(got.Density/want.Density-1))
	e.cp = max(e.cp, math.Abs(got.Cp/want.Cp-1))
	above, err1 := exact(T+1, p)
	gotAbove, err2 := tabulated(T+1, p)
	if err1 != nil || err2 != nil {
		return
	}
	e.rise = max(e.rise, math.Abs((gotAbove.Enthalpy-got.Enthalpy)/(above.Enthalpy-want.Enthalpy)-1))
}

// random compares n states of the box, each other one with a pressure whose
// logarithm is evenly spread.
func (e *tableErrors) random(t *testing.T, exact, tabulated thermo.Fluid, b box, n int, random *rand.Rand) {
	t.Helper()
	want, got := thermo.BalanceOf(exact), thermo.BalanceOf(tabulated)
	for k := range n {
		T, p := b.T1+random.Float64()*(b.T2-b.T1), b.p1+random.Float64()*(b.p2-b.p1)
		if k%2 == 1 && b.p1 > 0 {
			p = b.p1 * math.Pow(b.p2/b.p1, random.Float64())
		}
		e.add(t, want, got, T, p)
	}
	if !(e.h <= 2e-7 && e.density <= 2e-7 && e.rise <= 3e-6 && e.cp <= 1e-5) {
		t.Errorf("%s: h off by %.2e, density %.2e, a rise over 1 K %.2e, cp %.2e; want 2e-7, 2e-7, 3e-6, 1e-5", e.box, e.h, e.density, e.rise, e.cp)
	}
}

// The errors that Tabulate promises, at random states of each box.
func TestTableErrors(t *testing.T) {
	for _, tt := range boxes {
		f := tt.box.tabulate(tt.fluid)
		e := tableErrors{box: tt.name}
		e.random(t, tt.fluid, f, tt.box, 60000, rand.New(rand.NewPCG(97, 1)))
		answers := float64(e.answered) / float64(e.states)
		t.Logf("%s: h within %.1e, density %.1e, cp %.1e, rise over 1 K %.1e; %.1f %% from the table, %d B",
			tt.name, e.h, e.density, e.cp, e.rise, 100*answers, bytesOf(f))
		if answers < tt.answers {
			t.Errorf("%s: the table answers %.3f of the states, want %g", tt.name, answers, tt.answers)
		}
		if n := bytesOf(f); n > 400e3 {
			t.Errorf("%s: %d B", tt.name, n)
		}
	}
}

// From one column to the next, h and cp go on within their errors, though each
// column has pressures of its own.
func TestTableIsSmooth(t *testing.T) {
	for _, tt := range boxes {
		b := tt.box
		tabulated := thermo.BalanceOf(b.tabulate(tt.fluid))
		var h, cp float64
		T1 := max(b.T1, lowestTemperature*(1+clear))
		for T := T1 + 1; T < b.T2; T++ {
			for x := 0.003; x < 1; x += 0.0171 {
				p := b.p1 + x*(b.p2-b.p1)
				l, err1 := tabulated(T-1e-9, p)
				r, err2 := tabulated(T+1e-9, p)
				if err1 != nil || err2 != nil {
					continue
				}
				h = max(h, math.Abs(r.Enthalpy-l.Enthalpy-2e-9*r.Cp)/r.Cp)
				cp = max(cp, math.Abs(r.Cp/l.Cp-1))
			}
		}
		t.Logf("%s: h steps by up to %.1e of the enthalpy of 1 K, cp by %.1e", tt.name, h, cp)
		if h > 3e-6 || cp > 1e-5 {
			t.Errorf("%s: steps of more than 3e-6 of the enthalpy of 1 K or 1e-5 of cp", tt.name)
		}
	}
}

func TestTableConforms(t *testing.T) {
	for _, tt := range boxes {
		t.Run(tt.name, func(t *testing.T) { fluidtest.Run(t, tt.box.tabulate(tt.fluid)) })
	}
}

// Properties of a state in the table agree with each other as the exact ones do.
func TestTableProperties(t *testing.T) {
	for _, tt := range boxes {
		f := tt.box.tabulate(tt.fluid)
		balance := thermo.BalanceOf(f)
		random := rand.New(rand.NewPCG(97, 2))
		for range 2000 {
			T := tt.box.T1 + random.Float64()*(tt.box.T2-tt.box.T1)
			p := tt.box.p1 + random.Float64()*(tt.box.p2-tt.box.p1)
			s, err := f.At(T, p)
			if err != nil {
				continue
			}
			want, _ := tt.fluid.At(T, p)
			if b, err := balance(T, p); err != nil || b != (thermo.Balance{Enthalpy: s.Enthalpy, Cp: s.Cp, Density: s.Density}) {
				t.Errorf("%s, %g K, %g Pa: balance %+v, %v; properties %+v", tt.name, T, p, b, err, s)
			}
			if !(s.Cp >= s.Cv) || math.Abs(s.Cv/want.Cv-1) > 1e-5 || math.Abs(s.InternalEnergy-s.Enthalpy+p/s.Density) > 1e-9*max(math.Abs(s.Enthalpy), p/s.Density) {
				t.Errorf("%s, %g K, %g Pa: %+v, exact %+v", tt.name, T, p, s, want)
			}
		}
	}
}

func TestTabulateTwice(t *testing.T) {
	for _, tt := range boxes {
		a, b := thermo.BalanceOf(tt.box.tabulate(tt.fluid)), thermo.BalanceOf(tt.box.tabulate(tt.fluid))
		for x := 0.001; x < 1; x += 0.0137 {
			T, p := tt.box.T1+x*(tt.box.T2-tt.box.T1), tt.box.p1+x*(tt.box.p2-tt.box.p1)
			s1, _ := a(T, p)
			s2, _ := b(T, p)
			if s1 != s2 {
				t.Errorf("%s, %g K, %g Pa: %+v, built again %+v", tt.name, T, p, s1, s2)
			}
		}
	}
}

type other struct{ thermo.Fluid }

func TestNothingToTabulate(t *testing.T) {
	nan := math.NaN()
	for _, tt := range []struct {
		fluid thermo.Fluid
		box   box
	}{
		{Liquid(), box{300, 300, 1e5, 2e5}}, {Liquid(), box{310, 300, 1e5, 2e5}}, {Liquid(), box{300, 310, 2e5, 1e5}},
		{Liquid(), box{200, 270, 1e5, 2e5}}, {Liquid(), box{300, 310, 101e6, 102e6}}, {Liquid(), box{400, 410, 1e3, 2e3}},
		{Liquid(), box{650, 700, 25e6, 30e6}}, {Steam(), box{1100, 1200, 1e5, 2e5}}, {Steam(), box{300, 310, 1e5, 2e5}},
		{Steam(), box{nan, 310, 1e3, 2e3}}, {Steam(), box{300, nan, 1e3, 2e3}}, {Steam(), box{300, 310, nan, 2e3}}, {Steam(), box{300, 310, 1e3, nan}},
		{other{Liquid()}, box{300, 310, 1e5, 2e5}},
	} {
		if got := tt.box.tabulate(tt.fluid); got != tt.fluid {
			t.Errorf("%s, %+v: got %T, want the fluid itself", tt.fluid.Name(), tt.box, got)
		}
	}
}
