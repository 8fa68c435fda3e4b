package food

import (
	"math"
	"strings"
	"testing"
)

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		c    Composition
		want string
	}{
		{Composition{}, "food {}: the mass fractions make 0 together"},
		{Composition{Water: 0.9, Fat: 0.05}, "food {water: 90 %, fat: 5 %}: the mass fractions make 0.95 together"},
		{Composition{Water: 0.9, Fat: 0.11}, "make 1.01 together"},
		{Composition{Water: 1.1}, "mass fraction of water is 1.1"},
		{Composition{Water: 1, Fibre: -0.1}, "mass fraction of fibre is -0.1"},
		{Composition{Water: math.NaN()}, "mass fraction of water is NaN"},
		{Composition{Water: 0.1, Fat: 0.05, Carbohydrate: 0.85}, "it has 0.1 of water and 0.05 of fat; with less than 0.2 of the one and 0.5 of the other it is no liquid"},
		{Composition{Water: 0.19, Fat: 0.49, Carbohydrate: 0.32}, "it is no liquid"},
	} {
		if f, err := New(tt.c); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%+v) = %v, %v; want an error with %q", tt.c, f, err, tt.want)
		}
	}
}

// An analysis that misses the whole by a little is scaled to it.
func TestCompositionIsScaled(t *testing.T) {
	whole := mustNew(t, Composition{Water: 0.875, Carbohydrate: 0.125})
	short := mustNew(t, Composition{Water: 0.875 * 0.996, Carbohydrate: 0.125 * 0.996})
	a, err1 := whole.At(300, atm)
	b, err2 := short.At(300, atm)
	if err1 != nil || err2 != nil || !(math.Abs(a.Cp/b.Cp-1) <= 1e-14) || !(math.Abs(a.Density/b.Density-1) <= 1e-14) {
		t.Errorf("%+v, %v; scaled %+v, %v", a, err1, b, err2)
	}
}

func TestNames(t *testing.T) {
	for written, want := range map[string]string{
		"Whole Milk": "whole milk", "whole-milk": "whole milk", "milk": "whole milk", "beer wort 12 °P": "beer wort", "WORT": "beer wort", "orangejuice": "orange juice",
	} {
		if f, err := Product(written); err != nil || f.Name() != want {
			t.Errorf("Product(%q) = %v, %v; want %q", written, f, err, want)
		}
	}
	_, err := Product("whole mlk")
	if want := `unknown food "whole mlk", did you mean "whole milk"; known: whole milk, skim milk, cream, whey, beer wort, orange juice`; err == nil || err.Error() != want {
		t.Errorf("Product(whole mlk): %v; want %s", err, want)
	}
	for other, name := range also {
		if f, err := Product(other); err != nil || f.Name() != name {
			t.Errorf("%q leads to %v, %v; want %q", other, f, err, name)
		}
	}
	f := mustNew(t, Composition{Water: 0.873, Fat: 0.039, Protein: 0.033, Carbohydrate: 0.048, Ash: 0.007})
	if want := "food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.8 %, ash: 0.7 %}"; f.Name() != want {
		t.Errorf("name %q, want %q", f.Name(), want)
	}
}
