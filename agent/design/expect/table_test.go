package expect

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func near(t testing.TB, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s = %.10g, want %.10g ± %g", what, got, want, within)
	}
}

var outdoor = Scale{Tag: "OT", Unit: "°C", Factor: 1, Offset: 273.15}

func line() Table {
	return Table{Axes: []Axis{{Scale: outdoor, At: []float64{263.15, 273.15, 288.15}}}, Duty: []float64{400e3, 300e3, 0}, Uncertainty: 0.05}
}

// Half way from −10 °C to 0 °C between 400 kW and 300 kW; a third of the way from 0 °C to 15 °C.
func TestTableOfOneTag(t *testing.T) {
	for c, want := range map[float64]float64{-10: 400e3, -5: 350e3, 0: 300e3, 5: 200e3, 15: 0} {
		e := line().At(Conditions{Drivers: []float64{273.15 + c}})
		if !e.Known {
			t.Fatalf("%g °C: %s", c, e.Why)
		}
		near(t, "duty", e.Duty, want, 1e-6)
		near(t, "uncertainty", e.Lasting, 0.05*want, 1e-6)
	}
	for _, tt := range []struct {
		drivers []float64
		want    string
	}{
		{[]float64{288.2}, `tag "OT" is at 15.05 °C, and what is expected is known from -10 °C to 15 °C`},
		{[]float64{263}, "is at -10.15 °C"}, {[]float64{math.NaN()}, `tag "OT", by which the duty is expected, has no value`}, {nil, "has no value"},
	} {
		if e := line().At(Conditions{Drivers: tt.drivers}); e.Known || !strings.Contains(e.Why, tt.want) {
			t.Errorf("at %v: %+v, want it not to be known: %s", tt.drivers, e, tt.want)
		}
	}
}

// A bilinear table gives back what is itself bilinear, 2 + 3x + 5y + 7xy, at any place inside.
func TestTableOfTwoTags(t *testing.T) {
	f := func(x, y float64) float64 { return 2 + 3*x + 5*y + 7*x*y }
	table := Table{Axes: []Axis{{Driver: 1, At: []float64{0, 1, 4}}, {Driver: 0, At: []float64{-2, 3}}}}
	for _, x := range table.Axes[0].At {
		for _, y := range table.Axes[1].At {
			table.Duty = append(table.Duty, f(x, y))
		}
	}
	if err := table.Check(); err != nil {
		t.Fatal(err)
	}
	rapid.Check(t, func(t *rapid.T) {
		x, y := rapid.Float64Range(0, 4).Draw(t, "x"), rapid.Float64Range(-2, 3).Draw(t, "y")
		e := table.At(Conditions{Drivers: []float64{y, x}})
		if !e.Known || math.Abs(e.Duty-f(x, y)) > 1e-9 {
			t.Fatalf("at %g and %g: %+v, want %g", x, y, e, f(x, y))
		}
	})
}

func TestTablesThatCannotBe(t *testing.T) {
	for _, tt := range []struct {
		table Table
		want  string
	}{
		{Table{}, "against 0 tags"},
		{Table{Axes: []Axis{{At: []float64{1}}}, Duty: []float64{1}}, "at least two"},
		{Table{Axes: []Axis{{Scale: outdoor, At: []float64{273.15, 273.15}}}, Duty: []float64{1, 2}}, "must rise"},
		{Table{Axes: []Axis{{At: []float64{1, 2}}}, Duty: []float64{1, 2, 3}}, "3 duties: its places want 2"},
	} {
		if err := tt.table.Check(); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%+v: %v, want %q", tt.table, err, tt.want)
		}
	}
}

func TestWeek(t *testing.T) {
	var w Week
	w.Duty[30], w.Uncertainty = 5e3, 0.1
	if e := w.At(Conditions{Hour: 30}); !e.Known || e.Duty != 5e3 || e.Lasting != 500 {
		t.Errorf("Tuesday at six: %+v, want 5 kW", e)
	}
	if e := w.At(Conditions{Hour: 168}); e.Known {
		t.Errorf("hour 168: %+v, want it not to be known", e)
	}
}
