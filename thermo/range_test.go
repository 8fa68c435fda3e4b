package thermo_test

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

func TestBoundsCheck(t *testing.T) {
	box := thermo.Bounds{MinT: 300, MaxT: 400, MinP: 0, MaxP: 2e5}
	for _, s := range []struct{ T, p float64 }{{300, 1e5}, {400, 2e5}, {350, 1e-9}} {
		if err := box.Check("oil", s.T, s.p, "range of the table"); err != nil {
			t.Errorf("%g K, %g Pa: %v, want no error", s.T, s.p, err)
		}
	}
	for _, tt := range []struct {
		T, p float64
		want string
	}{
		{290, 1e5, "oil: temperature 16.85 °C is below 26.85 °C (range of the table)"},
		{410, 1e5, "oil: temperature 136.85 °C is above 126.85 °C (range of the table)"},
		{350, 3e5, "oil: pressure 300 kPa is above 200 kPa (range of the table)"},
		{350, -1e3, "oil: pressure -1 kPa is below 0 kPa (range of the table)"},
		{350, 0, "oil: pressure 0 kPa is below 0 kPa (an absolute pressure is above zero)"},
		{math.NaN(), 1e5, "oil: temperature NaN °C is below 26.85 °C (not a number)"},
		{350, math.NaN(), "oil: pressure NaN kPa is below 0 kPa (not a number)"},
		{290, math.NaN(), "oil: temperature 16.85 °C is below 26.85 °C (range of the table)"},
	} {
		err := box.Check("oil", tt.T, tt.p, "range of the table")
		if e := new(thermo.RangeError); !errors.As(err, &e) || err.Error() != tt.want {
			t.Errorf("%g K, %g Pa: %v, want %q", tt.T, tt.p, err, tt.want)
		}
	}
	// A box without an end still refuses what is not finite.
	open := thermo.Bounds{MinT: 0, MaxT: math.Inf(1), MinP: 0, MaxP: math.Inf(1)}
	for _, s := range []struct{ T, p float64 }{{math.Inf(1), 1e5}, {300, math.Inf(1)}} {
		if err := open.Check("oil", s.T, s.p, "no range"); err == nil {
			t.Errorf("%g K, %g Pa: accepted", s.T, s.p)
		}
	}
}
