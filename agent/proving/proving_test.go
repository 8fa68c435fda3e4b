package proving_test

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/proving"
	"heatreeve/agent/site"
	"heatreeve/ingest/quality"
	"heatreeve/thermo/unit"
)

const epoch = int64(1_790_000_000_000_000_000)

const file = `
site: Test Bench
timezone: UTC
barometer: 100 kPa
broker: {url: mqtt://127.0.0.1:1883}
tags:
  TT-1: {topic: a/TT-1, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  TT-2: {topic: a/TT-2, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  FT-1: {topic: a/FT-1, unit: m3/h, value: /v, time: /ts, accuracy: 0.5 % of reading}
  PT-1: {topic: a/PT-1, unit: barg, value: /v, time: /ts, accuracy: 0.5 % of 10 bar}
  ET-1: {topic: a/ET-1, unit: kWh, value: /v, time: /ts, accuracy: 1 % of reading, resolution: 0.01 kWh, counts: {}}
loads:
  hall:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: PT-1, meter_at: outlet, gives: heat, idle_below: 0.2 m3/h}
    witness: ET-1
    design: {duty: 457 kW, allow: 5 %, pressure: 6 barg}
`

// plant is what the bench sends: 10 m³/h metered at the outlet from 110 to 70 °C at 6 barg.
type plant struct {
	inlet, outlet, flow, pressure float64 // in the units of the file
	seconds                       int
	lag                           int64   // of stamps, ns
	heat                          float64 // W that the witness counts
}

var sound = plant{inlet: 110, outlet: 70, flow: 10, pressure: 6, seconds: 60}

// config is the bench as the engine sees it.
func config(s *site.Site) loads.Config {
	cfg := loads.Config{Grid: int64(s.Timing.Grid)}
	for i := range s.Tags {
		t := &s.Tags[i]
		tag := loads.Tag{Name: t.Name, MaxAge: int64(t.MaxAge), Accuracy: loads.Accuracy(t.Accuracy), Resolution: t.Resolution}
		if t.Counter != nil {
			tag.Counter = &loads.Counter{}
		}
		cfg.Tags = append(cfg.Tags, tag)
	}
	l := &s.Loads[0]
	kind := loads.VolumeFlow
	if l.Stream.FlowKind == unit.MassFlow {
		kind = loads.MassFlow
	}
	cfg.Loads = []loads.Load{{Name: l.Name, HasWitness: l.HasWitness, Witness: loads.Source(l.Witness), Stream: loads.Stream{
		Fluid: l.Stream.Fluid, Flow: loads.Source(l.Stream.Flow), FlowKind: kind, Inlet: loads.Source(l.Stream.Inlet), Outlet: loads.Source(l.Stream.Outlet),
		Pressure: loads.Source(l.Stream.Pressure), OutletPressure: loads.Source(l.Stream.OutletPressure),
		MeterAtOutlet: l.Stream.MeterAtOutlet, Gives: l.Stream.Gives, Margin: l.Stream.Margin, IdleBelow: l.Stream.IdleBelow,
	}}}
	return cfg
}

func bench(t *testing.T, text string) (*site.Site, *proving.Trial) {
	t.Helper()
	s, err := site.Parse("bench.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	trial, err := proving.New(s, config(s))
	if err != nil {
		t.Fatal(err)
	}
	return s, trial
}

// send plays the plant to the trial, with a change to single readings; nil for none.
func (p plant) send(s *site.Site, trial *proving.Trial, change func(tag string, h *proving.Heard) bool) {
	for i := range p.seconds + 1 {
		now := epoch + int64(i)*1e9
		var all []proving.Heard
		for k := range s.Tags {
			tag := &s.Tags[k]
			x := map[string]float64{"TT-1": p.inlet, "TT-2": p.outlet, "FT-1": p.flow, "PT-1": p.pressure, "ET-1": 1000 + p.heat*float64(i)/3.6e6}[tag.Name]
			h := proving.Heard{Reading: loads.Reading{Tag: k, At: now - p.lag, Value: tag.Scale*x + tag.Offset}, Arrival: now, Stamped: true}
			if change == nil || change(tag.Name, &h) {
				all = append(all, h)
			}
		}
		trial.Hear(all)
	}
}

func found(r *proving.Result) (all []string) {
	tell := func(name string, fs []proving.Finding) {
		for _, f := range fs {
			all = append(all, fmt.Sprintf("%d %s: %s", f.Level, name, f.Text))
		}
	}
	for i := range r.Tags {
		tell(r.Tags[i].Name, r.Tags[i].Findings)
	}
	for i := range r.Loads {
		tell(r.Loads[i].Name, r.Loads[i].Findings)
	}
	return all
}

// Of a plant that is as its file says nothing is found but what may be as it should be.
func TestSoundPlant(t *testing.T) {
	s, trial := bench(t, file)
	sound.send(s, trial, nil)
	r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
	if r.Faults() != 0 {
		t.Errorf("%d faults: %q", r.Faults(), found(&r))
	}
	tag := r.Tags[3]
	if tag.Live != 61 || tag.Every != 1 || tag.Shown != "6 barg" || tag.Value != 700e3 || tag.Behind != 0 {
		t.Errorf("%+v", tag)
	}
	if f := r.Loads[0].Figure; !f.Measured() || r.Loads[0].Basis.Stream == nil || f.Duty < 456e3 || f.Duty > 459e3 {
		t.Errorf("%+v", f)
	}
}

// Each mistake is found under its name, and counted as grave as it is.
func TestMistakes(t *testing.T) {
	fault := func(name, text string) string { return fmt.Sprintf("%d %s: %s", proving.Fault, name, text) }
	note := func(name, text string) string { return fmt.Sprintf("%d %s: %s", proving.Note, name, text) }
	unitOf := func(tag, from, to string) func(string) string {
		return func(text string) string {
			return strings.Replace(text, tag+", unit: "+from, tag+", unit: "+to, 1)
		}
	}
	design := func(kW string) func(string) string {
		return func(text string) string { return strings.Replace(text, "457 kW", kW, 1) }
	}
	for _, tt := range []struct {
		name   string
		edit   func(string) string
		plant  func(*plant)
		change func(string, *proving.Heard) bool
		want   string
	}{
		{name: "swapped", plant: func(p *plant) { p.inlet, p.outlet = 70, 110 }, want: fault("hall", "the duty is -4")},
		{name: "L/s taken for m3/h", plant: func(p *plant) { p.flow /= 3.6 }, want: fault("hall", "if FT-1 were not in m3/h but in L/s (3.6 times as much)")},
		{name: "m3/h taken for L/s", edit: unitOf("a/FT-1", "m3/h", "L/s"), want: fault("hall", "if FT-1 were not in L/s but in m3/h")},
		{name: "m3/min taken for m3/h", plant: func(p *plant) { p.flow /= 60 }, edit: func(s string) string { return strings.Replace(s, "idle_below: 0.2", "idle_below: 0.02", 1) }, want: "m3/min"},
		{name: "gallons taken for m3/h", plant: func(p *plant) { p.flow *= 4.402868 }, want: "gpm (0.227 times as much)"},
		{name: "gauge taken for absolute", edit: unitOf("a/PT-1", "barg", "bar"), want: fault("hall", "PT-1 shows 6 bar, which is the design's pressure if it is gauge")},
		{name: "absolute taken for gauge", plant: func(p *plant) { p.pressure = 7 }, want: fault("hall", "PT-1 shows 7 barg, which is the design's pressure if it is absolute")},
		{name: "below the air pressure", edit: unitOf("a/PT-1", "barg", "bar"), plant: func(p *plant) { p.pressure, p.inlet, p.outlet = 0.5, 60, 50 }, want: note("hall", "PT-1 shows 0.5 bar absolute, below the air pressure")},
		{name: "meter in the other pipe", plant: func(p *plant) { p.heat, p.seconds = 444.4e3, 600 }, want: fault("hall", "its witness ET-1 agrees with the inlet pipe, and not with the outlet pipe of the file")},
		{name: "meter in its pipe", plant: func(p *plant) { p.heat, p.seconds = 457.0e3, 600 }, want: note("hall", "its witness ET-1 agrees with the outlet pipe, as the file says")},
		{name: "witness too coarse", plant: func(p *plant) { p.heat, p.seconds = 457.0e3, 130 }, edit: func(s string) string { return strings.Replace(s, "0.01 kWh", "1 kWh", 1) }, want: note("hall", "its witness ET-1 cannot tell yet")},
		{name: "far from its witness", plant: func(p *plant) { p.heat, p.seconds = 40e3, 130 }, want: note("hall", "its witness ET-1 agrees with neither: off by 1042 % and 1011 %")},
		{name: "°C taken for °F", edit: func(s string) string {
			return strings.Replace(unitOf("a/TT-2", "°C", "°F")(s), "allow: 5 %", "allow: 5 %, inlet: 110 °C, outlet: 70 °C", 1)
		}, want: fault("hall", "TT-2 shows 70 °F; in °C that would be at the design's 70 °C: check its unit")},
		{name: "large", plant: func(p *plant) { p.flow *= 60 }, want: note("hall", "with the meter in the outlet pipe, as the file says, 27418 kW")},
		{name: "witness in steps that the file does not tell", plant: func(p *plant) { p.heat, p.seconds = 444.4e3, 600 }, edit: func(s string) string { return strings.Replace(s, ", resolution: 0.01 kWh", "", 1) },
			change: func(tag string, h *proving.Heard) bool {
				if tag == "ET-1" {
					h.Value = math.Floor(h.Value/36e6) * 36e6
				}
				return true
			}, want: note("hall", "its witness ET-1 cannot tell yet which pipe is right: listen for 148 minutes")},
		{name: "zero offset", plant: func(p *plant) { p.flow = 0.15 }, want: note("hall", "if the pump is off, 0.15 m3/h of FT-1 is its zero offset")},
		{name: "no difference", plant: func(p *plant) { p.outlet = 109.9 }, want: note("hall", "inlet and outlet differ by -0.10 K")},
		{name: "far from design", edit: design("9000 kW"), want: note("hall", "the duty is 0.0508 times the design")},
		{name: "boiling", plant: func(p *plant) { p.pressure = 0.2 }, want: fault("hall", "no duty: near saturation")},
		{name: "silent", change: func(tag string, _ *proving.Heard) bool { return tag != "TT-2" }, want: fault("TT-2", `no message on topic "a/TT-2" in 60 s`)},
		{name: "silent load", change: func(tag string, _ *proving.Heard) bool { return tag != "TT-2" }, want: fault("hall", "no duty: no reading")},
		{name: "only kept", change: func(tag string, h *proving.Heard) bool {
			h.Retained = tag == "TT-2"
			return !h.Retained || h.At == epoch
		}, want: fault("TT-2", "only a message that the broker had kept")},
		{name: "slower than max_age", plant: func(p *plant) { p.seconds = 240 }, change: func(tag string, h *proving.Heard) bool { return tag != "TT-2" || (h.At-epoch)%120e9 == 0 }, want: fault("TT-2", "2m0s without a reading, but max_age is 1m0s")},
		{name: "stuck", want: note("TT-1", "has not moved in 61 readings")},
		{name: "another zone", plant: func(p *plant) { p.lag = 3600e9 }, want: fault("TT-1", "stamps are 1h0m0s behind this machine's clock, more than its max_age of 1m0s: figures would be shown blind; that is the step of a time zone")},
		{name: "a little late", plant: func(p *plant) { p.lag = 20e9 }, want: note("TT-1", "stamps are 20s behind")},
		{name: "ahead", plant: func(p *plant) { p.lag = -25e9 }, want: fault("TT-1", "stamps are 25s ahead of this machine's clock, which refuses more than 30s")},
		{name: "doubted", change: func(tag string, h *proving.Heard) bool {
			if tag == "TT-1" {
				h.Mark = quality.OffSpec
			}
			return true
		}, want: note("TT-1", "61 readings uncertain by their source: out-of-specification")},
		{name: "doubted duty", change: func(tag string, h *proving.Heard) bool {
			if tag == "TT-1" {
				h.Mark = quality.OffSpec
			}
			return true
		}, want: note("hall", "the duty is uncertain: TT-1 is out-of-specification")},
	} {
		text, p := file, sound
		if tt.edit != nil {
			text = tt.edit(text)
		}
		if tt.plant != nil {
			tt.plant(&p)
		}
		s, trial := bench(t, text)
		p.send(s, trial, tt.change)
		r := trial.Tell(float64(p.seconds), make([][]proving.Refused, len(s.Tags)))
		if got := strings.Join(found(&r), "\n"); !strings.Contains(got, tt.want) {
			t.Errorf("%s: found\n%s\nwant %s", tt.name, got, tt.want)
		}
	}
}

func TestRefusedMessages(t *testing.T) {
	s, trial := bench(t, file)
	sound.send(s, trial, func(tag string, _ *proving.Heard) bool { return tag != "TT-2" })
	refused := make([][]proving.Refused, len(s.Tags))
	refused[0] = []proving.Refused{{Reason: "not-json", Count: 3}}
	refused[1] = []proving.Refused{{Reason: "out-of-range", Count: 61, Last: "payload \"900\" is too much"}}
	r := trial.Tell(60, refused)
	got := strings.Join(found(&r), "\n")
	for _, want := range []string{
		fmt.Sprintf("%d TT-1: 3 messages refused, not-json\n", proving.Note),
		fmt.Sprintf("%d TT-2: 61 messages refused, out-of-range: payload \"900\" is too much\n", proving.Fault),
	} {
		if !strings.Contains(got, want) {
			t.Errorf("found\n%s\nwant %s", got, want)
		}
	}
	if strings.Contains(got, "no message on topic") {
		t.Errorf("found\n%s\nthough messages came", got)
	}
}

// A pump that runs and a bypass that is shut stand as they are: no note says that they are stuck.
func TestStatesThatStand(t *testing.T) {
	s, trial := bench(t, strings.NewReplacer("loads:", `  P-1: {topic: a/P-1, unit: "%", accuracy: ± 1 %}
  V-1: {topic: a/V-1, unit: "%", accuracy: ± 1 %}
loads:`, "    witness: ET-1", "    witness: ET-1\n    running: P-1\n    bypass: {open: V-1}").Replace(file))
	sound.send(s, trial, nil)
	r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
	if got := strings.Join(found(&r), "\n"); strings.Contains(got, "P-1: has not moved") || strings.Contains(got, "V-1: has not moved") || !strings.Contains(got, "TT-1: has not moved") {
		t.Error(got)
	}
}

// The units that a flow is tried in are those of the trade that differ by the well-known factors.
func TestFlowUnitsHaveTheWellKnownFactors(t *testing.T) {
	have := map[string]float64{}
	for _, u := range unit.Named(unit.VolumeFlow) {
		have[u.Symbol] = u.Factor
	}
	for symbol, want := range map[string]float64{"L/s": 3.6, "m3/min": 60, "gpm": 0.2271247} {
		if k := have[symbol] / have["m3/h"]; k < want*0.9999 || k > want*1.0001 {
			t.Errorf("%s is %g m3/h, want %g", symbol, k, want)
		}
	}
}
