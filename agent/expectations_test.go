package agent

import (
	"math"
	"strings"
	"testing"

	"heatreeve/agent/design/expect"
	"heatreeve/agent/site"
)

// halls is an example whose loads go by the weather, a table and the week.
func halls(t *testing.T) *site.Site {
	t.Helper()
	s, err := site.Load("../configs/quillmere-halls.yaml")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// What the site file says is what is expected: by hand, of the example's figures.
func TestExpectationsOfASite(t *testing.T) {
	s := halls(t)
	all := make([]expect.Expectation, len(s.Loads))
	for i := range s.Loads {
		all[i] = expectationOf(s, &s.Loads[i].Design)
	}
	// heating at 1.4 °C and 71 %, Monday at 3: 412 + 21.2·((15.8 − 1.4) − 9.4) + hours[3]
	cold := expect.Conditions{Hour: 3, Drivers: []float64{274.55, 0.71}}
	want := 412e3 + 21.2e3*5 + s.Loads[0].Design.Baseline.Hours[3]
	if e := all[0].At(cold); !e.Known || !e.Joint || math.Abs(e.Duty-want) > 1 {
		t.Errorf("heating: %+v, want %g W", e, want)
	}
	// pool at 0 °C and half full: the mean of 96, 128, 52 and 76 kW
	if e := all[1].At(expect.Conditions{Drivers: []float64{273.15, 0.5}}); !e.Known || math.Abs(e.Duty-88e3) > 1 || math.Abs(e.Lasting-0.04*88e3) > 1 {
		t.Errorf("pool: %+v, want 88 kW ± 4 %%", e)
	}
	// kitchen on a Sunday at eight
	if e := all[2].At(expect.Conditions{Hour: 6*24 + 8}); !e.Known || e.Duty != 26e3 {
		t.Errorf("kitchen: %+v, want 26 kW", e)
	}
	if e := all[0].At(expect.Conditions{Drivers: []float64{303.15, 0.71}}); e.Known || !strings.Contains(e.Why, `tag "outdoor" is at 30 °C, and what is expected is known from -5.2 °C to 16.9 °C`) {
		t.Errorf("heating in summer: %+v", e)
	}
	cfg := plantOf(s)
	for i, want := range []int{2, 2, 0} {
		if n := len(cfg.Loads[i].Drivers); n != want {
			t.Errorf("load %d has %d drivers, want %d", i, n, want)
		}
	}
}
