package agent

import (
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/ingest"
	"heatreeve/ingest/screen"
)

// What the file tells beyond flows and temperatures reaches the engine.
func TestPlantOfTheMaltings(t *testing.T) {
	m := newMaltings(t)
	cfg := plantOf(m.site)
	if cfg.Bridge != 15*60*sec || len(cfg.Tags) != 23 {
		t.Errorf("bridge %d ns, %d tags", cfg.Bridge, len(cfg.Tags))
	}
	tag := func(name string) loads.Tag {
		i := slices.IndexFunc(cfg.Tags, func(t loads.Tag) bool { return t.Name == name })
		if i < 0 {
			t.Fatalf("no tag %q", name)
		}
		return cfg.Tags[i]
	}
	if c := tag("wash/total"); c.Counter == nil || c.Counter.Modulus != 1e5 || !(math.Abs(c.Counter.Largest*180-1) <= 1e-14) || c.Resolution != 0.01 || c.MaxAge != 600*sec {
		t.Errorf("wash/total: %+v, %+v", c, c.Counter)
	}
	if c := tag("cold/in"); !c.OnChange || cfg.Tags[c.Alive].Name != "ostrel/cold/beat" || cfg.Tags[c.Alive].MaxAge != 30*sec || c.Deadband != 0.2 || c.Counter != nil {
		t.Errorf("cold/in: %+v", c)
	}
	brew, wash, kettle, buffer := cfg.Loads[0], cfg.Loads[1], cfg.Loads[4].Vessel, cfg.Loads[5].Vessel
	if s := brew.Stream; s.Pair != 0.9 || !s.HasPump || cfg.Tags[s.Pump.Tag].Name != "brew/pump" || !(s.Stored > 3.9e6) || s.StoredOver != 300*sec || brew.HasWitness || brew.Vessel != nil {
		t.Errorf("brew house: %+v", brew)
	}
	if !wash.HasWitness || cfg.Tags[wash.Witness.Tag].Name != "wash/heat" || cfg.Loads[3].Stream.Hold != 0.09 {
		t.Errorf("keg washer: %+v; yeast cooler: %+v", wash, cfg.Loads[3])
	}
	if kettle.ContentKind != loads.ContentVolume || kettle.Shell != 2400*477 || kettle.Over != 600*sec || kettle.Still != 0.005 || kettle.IdleBelow != 5e3 || kettle.Margin != 2 || kettle.Gives || kettle.Rigid {
		t.Errorf("mash kettle: %+v", kettle)
	}
	if !buffer.Rigid || buffer.Content.Value != 6 || !cfg.Loads[6].Vessel.Gives {
		t.Errorf("buffer: %+v", buffer)
	}
	signals := signalsOf(m.site)
	if beat, state := signals[21].Liveness, signals[22].Liveness; beat == nil || beat.Online != "" || state == nil || *state != (ingest.Liveness{Online: "up", Offline: "down"}) {
		t.Errorf("signs of life: %+v, %+v", beat, state)
	}
}

// What the reader takes the engine takes as well, where they both check.
func TestEngineTakesWhatTheReaderTakes(t *testing.T) {
	text, err := configs.Files.ReadFile("ostrel-maltings.yaml")
	if err != nil {
		t.Fatal(err)
	}
	for _, change := range []struct{ from, to string }{
		{"", ""},
		{"unit: m3/h, value: /v, time: /ts, accuracy: 1 % of reading, range: [0 m3/h, 8 m3/h]", "unit: kg/h, value: /v, time: /ts, accuracy: 1 % of reading"}, // a hold by mass
		{"pressure: 0 kPag, takes: heat}", "pressure: 0 kPag, takes: heat, corrections: {hold: 2 m3, pump: 3 kW}}"},                                           // of a solid
		{"stored: {content: 900 L, metal: 650 kg steel, over: 5 min}", "hold: 900 L, stored: {metal: 650 kg steel}"},
		{"counts: {rolls_over_at: 100 000 m3, largest: 20 m3/h}, max_age: 10 min", "counts: {}, reports: on change, alive: {topic: x, within: 1 min}, max_age: 10 min"},
		{"counts: {rolls_over_at: 100 000 m3, largest: 20 m3/h}, max_age: 10 min", "counts: {since: last message, largest: 20 m3/h}, max_age: 10 min"},
		{"content: kettle/level, shell: 2.4 t stainless steel 304", "content: 6 m3"},
		{"still: 0.5 %", "still: 0 %"},
		{"content: 6 m3, rigid: true", "content: 180 kg, rigid: true"},
		{"content: 6 m3, rigid: true", "content: 6 m3, rigid: false"},
		{"range: [0 °C, 120 °C]}", "range: [0 °C, 120 °C], reports: on change, alive: {topic: ostrel/cold/beat, time: /ts, within: 30 s}}"},
		{"witness: wash/heat", "design: {duty: 1 kW, allow: 5 %}"},
		{"timing: {bridge: 15 min}", "timing: {bridge: 2 h, grid: 5 s}"},
		{"    witness: wash/heat\n", ""},
		{"takes: heat, idle_below: 5 kW", "gives: heat, idle_below: 0 kW"},
	} {
		if !strings.Contains(string(text), change.from) {
			t.Errorf("the example has no %q", change.from)
		}
		changed := strings.Replace(string(text), change.from, change.to, 1)
		if strings.HasPrefix(change.to, "design") {
			changed = strings.Replace(changed, "\n    design: {duty: 180 kW, allow: 10 %, inlet: 85 °C, outlet: 60 °C}", "", 1)
		}
		s, err := site.Parse("changed.yaml", []byte(changed))
		if err != nil {
			t.Errorf("%q: %v", change.to, err)
			continue
		}
		if _, err := loads.New(plantOf(s)); err != nil {
			t.Errorf("the reader takes %q, and the engine says: %v", change.to, err)
		}
	}
}

const coolerSite = `
site: Mill
timezone: UTC
barometer: 101.325 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
tags:
  F: {topic: f, unit: kg/s, accuracy: 0.5 % of reading}
  TI: {topic: a, unit: °C, accuracy: IEC 60751 A}
  TO: {topic: b, unit: °C, accuracy: IEC 60751 A}
  MT: {topic: c, unit: "%", accuracy: 3 %, range: [0 %, 100 %]}
  TC: {topic: d, unit: °C, accuracy: IEC 60751 A}
loads:
  cooler:
    stream: {fluid: moist air, flow: F, inlet: TI, outlet: TO, pressure: 0 barg, relative_humidity: MT, coil: TC, gives: heat}
`

// From the site file to the figure: 2 kg/s at 30 °C and 50 % have their dew point at
// 18.4 °C and cp = 1017.22 J/(kg K) (worked by hand in agent/loads).
func TestMoistAirFromTheSite(t *testing.T) {
	s := parsed(t, coolerSite)
	e, err := loads.New(plantOf(s))
	if err != nil {
		t.Fatal(err)
	}
	at := clock.UnixNano()
	for _, tt := range []struct {
		coil float64
		note string
	}{{283.15, "coil at 10.00 °C is below the dew point at 18.4"}, {293.15, ""}} {
		at += sec
		var in []loads.Reading
		for tag, v := range []float64{2, 303.15, 294.15, 0.5, tt.coil} {
			in = append(in, loads.Reading{Tag: tag, At: at, Value: v})
		}
		e.Advance(loads.Beat{Readings: in, Through: at + sec}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Fault != loads.NoFault || f.Latent != (tt.note != "") || !strings.Contains(f.Note, tt.note) {
			t.Errorf("fault %v (%s), note %q; want %q", f.Fault, f.Reason, f.Note, tt.note)
		}
		if want := 2 * 1017.22 * 9; !(math.Abs(f.Duty-want) <= 1) {
			t.Errorf("duty %g W, want %g W", f.Duty, want)
		}
		if f.Share[loads.PartHumidity] == 0 {
			t.Error("the humidity has no part in the uncertainty")
		}
	}
}

// What a tag is tested against, and what stands beside it, reaches the engine.
func TestPlantOfTests(t *testing.T) {
	text, err := configs.Files.ReadFile("tarnholt-heat-works.yaml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := site.Parse("tarnholt", text)
	if err != nil {
		t.Fatal(err)
	}
	cfg := plantOf(s)
	supply := cfg.Tags[0]
	want := screen.Limits{Low: 323.15, High: 388.15, HasRange: true, Fastest: 1.5, StuckAfter: 30 * minute, Spikes: true, Resolution: 0.05, Gap: minute}
	if supply.Screen == nil || *supply.Screen != want {
		t.Errorf("screen %+v, want %+v", supply.Screen, want)
	}
	if !supply.HasBeside || cfg.Tags[supply.Beside].Name != "network/supply temperature B" {
		t.Errorf("beside %q stands tag %d", supply.Name, supply.Beside)
	}
	if l := cfg.Loads[0]; !l.HasRunning || cfg.Tags[l.Running.Tag].Name != "network/pump" || l.Stream.BothWays ||
		!l.HasBypass || cfg.Tags[l.Bypass.Tag].Name != "network/bypass" || l.Settles != 15*minute {
		t.Errorf("load %+v", l)
	}
	if l := cfg.Loads[3]; !l.Stream.BothWays || l.HasRunning {
		t.Errorf("load %+v", l)
	}
	for i, tag := range cfg.Tags {
		if i != 0 && tag.Name != "network/return temperature" && tag.Screen != nil {
			t.Errorf("tag %q is tested, and did not ask for it", tag.Name)
		}
	}
}

// True and false are for the tags of pumps and bypasses alone: of a temperature they are a mistake.
func TestStatesMayBeTrueOrFalse(t *testing.T) {
	text, err := configs.Files.ReadFile("tarnholt-heat-works.yaml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := site.Parse("tarnholt-heat-works.yaml", text)
	if err != nil {
		t.Fatal(err)
	}
	pumps := map[string]bool{}
	for i := range s.Loads {
		if l := &s.Loads[i]; l.HasRunning {
			pumps[s.Tags[l.Running.Tag].Name] = true
		}
		if l := &s.Loads[i]; l.HasBypass {
			pumps[s.Tags[l.Bypass.Tag].Name] = true
		}
	}
	if len(pumps) != 2 {
		t.Fatalf("the example has a pump and a bypass; found %v", pumps)
	}
	for _, tag := range signalsOf(s) {
		if tag.Truth != pumps[tag.Name] {
			t.Errorf("tag %q takes true and false: %v", tag.Name, tag.Truth)
		}
	}
}
