package proving_test

import (
	"strings"
	"testing"

	"heatreeve/agent/proving"
)

// Without a design, units are judged by the witness; with one that the duty is at, the flow
// is in no doubt.
func TestUnitsByTheWitness(t *testing.T) {
	const open = "    design: {duty: 457 kW, allow: 5 %, pressure: 6 barg}\n"
	unitOf := func(tag, from, to string) func(string) string {
		return func(text string) string {
			return strings.Replace(text, tag+", unit: "+from, tag+", unit: "+to, 1)
		}
	}
	none := func(text string) string { return text }
	for _, tt := range []struct {
		name   string
		edit   func(string) string
		design string
		plant  func(*plant)
		want   string
		faults int
	}{
		{"m3/h taken for L/s", unitOf("a/FT-1", "m3/h", "L/s"), "", nil,
			"2 hall: the load served 3.6 times what its witness ET-1 counted; they would agree if FT-1 were not in L/s but in m3/h (0.278 times as much), or ET-1 were not in kWh but in ", 1},
		{"gallons taken for m3/h", none, "", func(p *plant) { p.flow *= 4.402868 }, "4.4 times what its witness ET-1 counted; they would agree if FT-1 were not in m3/h but in gpm (0.227 times as much): check the units", 1},
		{"m3/h taken for m3/min", func(s string) string {
			return strings.Replace(unitOf("a/FT-1", "m3/h", "m3/min")(s), "idle_below: 0.2 m3/h", "idle_below: 0.2 m3/min", 1)
		}, "", nil, "FT-1 were not in m3/min but in m3/h (0.0167 times as much)", 1},
		{"MJ taken for kWh, at the design", none, open, func(p *plant) { p.heat *= 3.6 }, "they would agree if ET-1 were not in kWh but in MJ (0.278 times as much) or kBtu", 1},
		{"a few per cent off", none, "", func(p *plant) { p.heat *= 1.05 }, "agrees with neither", 0},
		{"a mass flow, half of it", func(s string) string {
			return strings.NewReplacer("a/FT-1, unit: m3/h", "a/FT-1, unit: t/h", ", meter_at: outlet", "", "0.2 m3/h", "0.2 t/h").Replace(s)
		}, "", func(p *plant) { p.heat *= 0.5 }, "1 hall: the load served 2.04 times what its witness ET-1 counted", 0},
		{"half of it", none, "", func(p *plant) { p.heat *= 0.5 }, "agrees with neither", 0},
	} {
		s, trial := bench(t, strings.Replace(tt.edit(file), open, tt.design, 1))
		p := sound
		p.heat, p.seconds = 457e3, 300
		if tt.plant != nil {
			tt.plant(&p)
		}
		p.send(s, trial, nil)
		r := trial.Tell(300, make([][]proving.Refused, len(s.Tags)))
		if got := strings.Join(found(&r), "\n"); !strings.Contains(got, tt.want) || r.Faults() != tt.faults {
			t.Errorf("%s: %d faults\n%s\nwant %d, %s", tt.name, r.Faults(), got, tt.faults, tt.want)
		}
	}
}
