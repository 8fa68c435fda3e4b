package site

import (
	"strings"
	"testing"
)

// Units to show figures in have their defaults, and may be spelled as people do.
func TestShownIn(t *testing.T) {
	const file = "site: Mill\ntimezone: UTC\nbroker: {url: mqtt://127.0.0.1}\ntags: {TT-1: {topic: a, unit: °C, accuracy: 1 K}, FT-1: {topic: f, unit: kg/s, accuracy: 1 % of reading}}\n" +
		"loads: {l: {stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: 20 °C, pressure: 4 bar, gives: heat}}}\n"
	for block, want := range map[string]string{
		"": "kW|MWh|°C|kg/s",
		"shown_in: {duty: TR, heat: GJ, temperature: degF}\n": "ton of refrigeration|GJ|°F|kg/s",
	} {
		s, err := Parse("mill.yaml", []byte(file+block))
		if err != nil {
			t.Fatal(err)
		}
		if got := s.Shown.Key(); got != want {
			t.Errorf("%q: %s, want %s", block, got, want)
		}
	}
	_, err := Parse("mill.yaml", []byte(file+"shown_in: {flow: m3/h}\n"))
	if want := `mill.yaml:6:18: shown_in.flow: "m3/h" is no unit to show it in; allowed are kg/s, kg/h, t/h, lb/h`; err == nil || !strings.Contains(err.Error(), want) {
		t.Errorf("%v, want %s", err, want)
	}
}
