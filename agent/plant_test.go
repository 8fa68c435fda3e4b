package agent

import (
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/ingest"
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
