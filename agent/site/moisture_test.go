package site

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
)

// The limits of a measure are those that package air has: just within there is an air of
// that humidity, under some pressure and at some temperature, and just beyond there is none.
func TestLimitsAreThoseOfAir(t *testing.T) {
	b := air.Live().Bounds()
	some := func(m measure, x float64) bool {
		for _, T := range []float64{b.MinT, 293.15, b.MaxT} {
			for _, p := range []float64{b.MinP, b.MaxP} {
				if _, err := air.HumidityRatio(thermo.Moisture{Kind: m.kind, Value: x}, T, p); err == nil {
					return true
				}
			}
		}
		return false
	}
	for _, m := range measures {
		lo, hi, span := m.limits(0)
		step := 1e-3 * math.Max(1, hi-lo)
		if m.kind == thermo.HumidityRatio {
			step = 1e-6
		}
		if !some(m, lo+step) || !some(m, hi-step) || some(m, lo-step) || some(m, hi+step) {
			t.Errorf("%s: %g to %g (%s): within %v and %v, beyond %v and %v", m.key, lo, hi, span, some(m, lo+step), some(m, hi-step), some(m, lo-step), some(m, hi+step))
		}
		_, at1bar, _ := m.limits(100e3)
		if at1bar > hi {
			t.Errorf("%s: up to %g at 1 bar, and up to %g at any pressure", m.key, at1bar, hi)
		}
	}
}

// Dry air is as good a humidity as any, and no load is blind for it.
func TestDryAirIsAHumidity(t *testing.T) {
	for _, humidity := range []string{"relative_humidity: 0 %", "humidity_ratio: 0 g/kg", "humidity_ratio: 0 kg/kg", "relative_humidity: 102 %", "humidity_ratio: 250 g/kg"} {
		s, err := Parse("plant.yaml", []byte(strings.Replace(plant, "loads:\n", fmt.Sprintf(`loads:
  duct: {stream: {fluid: moist air, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 1 bar, meter_at: inlet, %s, gives: heat}}
`, humidity), 1)))
		if err != nil {
			t.Errorf("%s: %v", humidity, err)
			continue
		}
		duct := s.Loads[0].Stream
		dry := strings.Contains(humidity, ": 0 ")
		if duct.HumidityKind == 0 || !duct.Humidity.Constant() || (duct.Humidity.Value == 0) != dry {
			t.Errorf("%s: %+v", humidity, duct)
		}
		humid := duct.Fluid.(thermo.Humid)
		f, err := humid.Carrying(thermo.Moisture{Kind: duct.HumidityKind, Value: duct.Humidity.Value}, 353.15, 100e3)
		if dry && (err != nil || f.Name() != "moist air 0 g/kg") {
			t.Errorf("%s: %v, %v", humidity, f, err)
		}
	}
}
