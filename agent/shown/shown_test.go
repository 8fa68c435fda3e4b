package shown

import (
	"math"
	"net/url"
	"strings"
	"testing"

	"heatreeve/thermo/unit"
)

func named(t *testing.T, symbol string, of unit.Dimension) unit.Unit {
	t.Helper()
	u, err := unit.LookupAs(symbol, of)
	if err != nil {
		t.Fatal(err)
	}
	return u
}

// The uncertainty has two digits and the value goes to the same place, also where rounding
// carries (JCGM 100:2008, 7.2.6).
func TestFigure(t *testing.T) {
	for _, tt := range []struct {
		unit                string
		of                  unit.Dimension
		value, expanded     float64
		wantText, wantOther string
	}{
		{"kW", unit.Power, 641234, 10432, "641", "10"},
		{"kW", unit.Power, 177512, 8020, "177.5", "8.0"},
		{"MW", unit.Power, 641234, 10432, "0.641", "0.010"},
		{"Btu/h", unit.Power, 641234, 10432, "2188000", "36000"},
		{"ton of refrigeration", unit.Power, 177512, 8020, "50.5", "2.3"},
		{"kW", unit.Power, 1000, 99.6, "1.00", "0.10"},
		{"kW", unit.Power, -4, 8020, "0.0", "8.0"},
		{"kW", unit.Power, 0, 0, "0", ""},
		{"kW", unit.Power, 641234, 0, "641.2", ""},
		{"kW", unit.Power, math.NaN(), 1, None, ""},
		{"kW", unit.Power, 641234, math.Inf(1), "641.2", ""},
		{"MW", unit.Power, 5, 0.1, "0.00000500", "0.00000010"},
		{"°C", unit.Temperature, 363.15, 0.24, "90.00", "0.24"},
		{"°F", unit.Temperature, 363.15, 0.24, "194.00", "0.43"},
		{"MWh", unit.Energy, 4.4e10, 5e8, "12.22", "0.14"},
	} {
		text, spread := Figure(named(t, tt.unit, tt.of), tt.value, tt.expanded)
		if text != tt.wantText || spread != tt.wantOther {
			t.Errorf("%g ± %g in %s: %q ± %q, want %q ± %q", tt.value, tt.expanded, tt.unit, text, spread, tt.wantText, tt.wantOther)
		}
	}
}

func TestChoose(t *testing.T) {
	usual := Usual()
	if usual.Key() != "kW|MWh|°C|kg/s" {
		t.Errorf("usual units %s", usual.Key())
	}
	u, err := Choose(url.Values{"duty": {"TR"}, "temperature": {"°F"}}, usual)
	if err != nil || u.Key() != "ton of refrigeration|MWh|°F|kg/s" || Label(u.Duty) != "TR" {
		t.Errorf("%s, %v", u.Key(), err)
	}
	if v := u.Values(usual); v.Encode() != "duty=ton+of+refrigeration&temperature=%C2%B0F" {
		t.Errorf("parameters %s", v.Encode())
	}
	if again, err := Choose(u.Values(usual), usual); err != nil || again.Key() != u.Key() {
		t.Errorf("back from its parameters: %s, %v", again.Key(), err)
	}
	for _, wrong := range []url.Values{{"duty": {"kWh"}}, {"heat": {"kW"}}, {"flow": {"m3/h"}}, {"duty": {"W"}}} {
		got, err := Choose(wrong, usual)
		if err == nil || !strings.Contains(err.Error(), "allowed are") || got.Key() != usual.Key() {
			t.Errorf("%v: %s, %v", wrong, got.Key(), err)
		}
	}
}
