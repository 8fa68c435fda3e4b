package site

import (
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/thermo/unit"
)

// maltings has each of the keys by which accounts are kept of what no rate tells.
const maltings = `
site: Maltings
timezone: UTC
barometer: 100 kPa
broker: {url: "mqtt://127.0.0.1"}
tags:
  T1: {topic: a/1, unit: °C, accuracy: IEC 60751 A, resolution: 0.01 K, deadband: 0.36 °F, reports: on change, alive: {topic: plc/beat, within: 30 s}}
  T2: {topic: a/2, unit: °C, accuracy: IEC 60751 A, reports: on change, alive: {topic: plc/state, online: up, offline: " down"}}
  T3: {topic: a/3, unit: °C, accuracy: IEC 60751 A, range: [0 °C, 120 °C], reports: on change, alive: {topic: plc/beat, within: 30 s}}
  T4: {topic: a/4, unit: °C, accuracy: IEC 60751 A, reports: on change, alive: {topic: plc/json, online: "1", offline: "0", value: /s, time: /t, time_unit: ms, within: 1 h}}
  FQ: {topic: b/1, unit: m3, accuracy: 0.5 % of reading, resolution: 10 L, counts: {rolls_over_at: 100 000 m3, largest: 36 m3/h}, max_age: 10 min}
  FP: {topic: b/2, unit: pulses, accuracy: 1 % of reading, counts: {pulse: 2.5 L, rolls_over_at: 65 536 pulses, largest: 18 m3/h}}
  GQ: {topic: b/3, unit: Nm3, accuracy: 1 % of reading, counts: {}}
  ET: {topic: b/4, unit: MWh, accuracy: 2 % of reading, counts: {}}
  LT: {topic: c/1, unit: hL, accuracy: 1 % of 80 hL}
  PQ: {topic: c/2, unit: kW, accuracy: 1 % of reading}
  FT: {topic: c/3, unit: m3/h, accuracy: 0.5 % of reading}
loads:
  wash house:
    stream: {fluid: water, flow: FQ, inlet: T1, outlet: T2, pressure: 3 barg, meter_at: outlet, gives: heat}
    witness: ET
  rinser:
    stream: {fluid: water, flow: FP, inlet: T1, outlet: T2, pressure: 3 barg, meter_at: inlet, gives: heat}
  burner gas:
    stream: {fluid: methane, flow: GQ, inlet: T1, outlet: T2, pressure: 0.2 barg, takes: heat}
  brew house:
    stream:
      fluid: water
      flow: FT
      inlet: T1
      outlet: T2
      pressure: 3 barg
      meter_at: outlet
      gives: heat
      pair: 0.9
      corrections: {pump: PQ, stored: {content: 900 L, metal: 650 kg steel}}
    design: {duty: 850 kW, allow: 8 %, inlet: 95 °C, outlet: 65 °C}
  cooler:
    stream: {fluid: water, flow: FT, inlet: T1, outlet: T2, pressure: 3 barg, meter_at: inlet, gives: heat, corrections: {pump: 2.2 kW, hold: 250 L, stored: {metal: 55 kJ/K, over: 2 min}}}
  kettle:
    vessel: {fluid: water, temperature: T3, pressure: 0 barg, content: LT, shell: 500 kg steel, over: 20 min, still: 2 %, takes: heat, idle_below: 2 kW, margin: 3 K}
  buffer:
    vessel: {fluid: N2, temperature: T3, pressure: 8 barg, content: 12 t, rigid: true, gives: heat}
timing: {bridge: 15 min}
`

func parse(t *testing.T, text string) *Site {
	t.Helper()
	s, err := Parse("plant.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func (s *Site) tagNamed(t *testing.T, name string) *Tag {
	t.Helper()
	i := slices.IndexFunc(s.Tags, func(t Tag) bool { return t.Name == name })
	if i < 0 {
		t.Fatalf("no tag %q", name)
	}
	return &s.Tags[i]
}

func TestCounters(t *testing.T) {
	s := parse(t, maltings)
	fq, fp, gq, et := s.tagNamed(t, "FQ"), s.tagNamed(t, "FP"), s.tagNamed(t, "GQ"), s.tagNamed(t, "ET")
	if fq.Counter == nil || *fq.Counter != (Counter{Modulus: 100000, Largest: 0.01}) || fq.MaxAge != 10*time.Minute || fq.Max != 100000 || fq.Min != 0 {
		t.Errorf("FQ = %+v, %+v", fq, fq.Counter)
	}
	if fq.Accuracy != (Accuracy{Rel: 0.005}) || fq.Resolution != 0.01 {
		t.Errorf("FQ: accuracy %+v, resolution %g m³", fq.Accuracy, fq.Resolution)
	}
	// A pulse of 2.5 L: 65,536 of them are 163.84 m³.
	if fp.Unit.Symbol != "L" || fp.Scale != 0.0025 || fp.Resolution != 0.0025 || *fp.Counter != (Counter{Modulus: 163.84, Largest: 0.005}) || fp.MaxAge != 15*time.Minute {
		t.Errorf("FP = %+v, %+v", fp, fp.Counter)
	}
	if *gq.Counter != (Counter{}) || gq.Resolution != 0 || gq.Max < 1e9 || et.Unit.Dimension != unit.Energy || et.Scale != 3.6e9 {
		t.Errorf("GQ = %+v, ET = %+v", gq, et)
	}
	if each := parse(t, strings.Replace(maltings, "rolls_over_at: 65 536 pulses", "since: last message", 1)).tagNamed(t, "FP"); !each.Counter.Each || each.Counter.Modulus != 0 || each.Scale != 0.0025 || fp.Counter.Each {
		t.Errorf("since the last message: %+v, %+v; since the start: %+v", each, each.Counter, fp.Counter)
	}
	for i, want := range []unit.Dimension{unit.VolumeFlow, unit.VolumeFlow, unit.MolarFlow} {
		if st := s.Loads[i].Stream; st.FlowKind != want || st.Flow.Constant() {
			t.Errorf("%s: flow %+v of kind %v, want %v", s.Loads[i].Name, st.Flow, st.FlowKind, want)
		}
	}
	if w := s.Loads[0]; !w.HasWitness || s.Tags[w.Witness.Tag].Name != "ET" || s.Loads[1].HasWitness {
		t.Errorf("witnesses: %+v, %+v", w.Witness, s.Loads[1].Witness)
	}
	if s.Timing.Bridge != 15*time.Minute {
		t.Errorf("bridge %v", s.Timing.Bridge)
	}
}

// Each topic that tells of a source is one tag behind the declared ones, whichever of
// their tags named it.
func TestLivenessTags(t *testing.T) {
	s := parse(t, maltings)
	if s.Declared() != 11 || len(s.Tags) != 14 {
		t.Fatalf("%d declared of %d tags", s.Declared(), len(s.Tags))
	}
	t1, t2, t3, t4 := s.Tags[0], s.Tags[1], s.Tags[2], s.Tags[3]
	if !t1.OnChange || t1.Alive != 11 || t2.Alive != 12 || t3.Alive != 11 || t4.Alive != 13 {
		t.Errorf("alive by %d, %d, %d, %d", t1.Alive, t2.Alive, t3.Alive, t4.Alive)
	}
	if !(math.Abs(t1.Deadband-0.2) <= 1e-15) || t1.Resolution != 0.01 || t3.Deadband != 0 {
		t.Errorf("dead bands %g and %g K, resolution %g K", t1.Deadband, t3.Deadband, t1.Resolution)
	}
	beat, state, inJSON := s.Tags[11], s.Tags[12], s.Tags[13]
	if beat.Name != "plc/beat" || beat.Topic != "plc/beat" || *beat.Liveness != (Liveness{}) || beat.MaxAge != 30*time.Second || beat.QoS != 1 {
		t.Errorf("beat = %+v", beat)
	}
	if *state.Liveness != (Liveness{"up", "down", true}) || state.MaxAge < 24*365*time.Hour {
		t.Errorf("state = %+v, %+v", state, state.Liveness)
	}
	if *inJSON.Liveness != (Liveness{"1", "0", false}) || inJSON.MaxAge != time.Hour || inJSON.Value != "/s" || inJSON.Time != "/t" || inJSON.TimeFormat != "ms" {
		t.Errorf("in JSON = %+v, %+v", inJSON, inJSON.Liveness)
	}
	for name, want := range map[string]time.Duration{"T1": 0, "FQ": 10 * time.Minute, "LT": time.Minute, "plc/beat": 30 * time.Second, "plc/state": 0} {
		if got := s.tagNamed(t, name).Holds(); got != want {
			t.Errorf("%s holds for %v, want %v", name, got, want)
		}
	}
	if s := parse(t, plant); s.Declared() != len(s.Tags) {
		t.Errorf("%d declared of %d tags, where none reports on change", s.Declared(), len(s.Tags))
	}
}

// The heat capacities are by other means: water at 80 °C and 4 bar has 971.937 kg/m³ and
// 4194.86 J/(kg K) (IAPWS-IF97 as the Python package iapws works it), carbon steel 425 + 0.773 t − 1.69e-3 t² +
// 2.22e-6 t³ (EN 1993-1-2:2005, 3.4.1.2): 477.16 J/(kg K) at 80 °C and 465.78 at 60 °C.
func TestCorrections(t *testing.T) {
	s := parse(t, maltings)
	a, b := s.Loads[3].Stream, s.Loads[4].Stream
	if a.Pair != 0.9 || !a.HasPump || s.Tags[a.Pump.Tag].Name != "PQ" || a.Hold != 0 || a.StoredOver != 5*time.Minute {
		t.Errorf("brew house: %+v", a)
	}
	if want := 0.9*971.937*4194.86 + 650*477.16; !(math.Abs(a.Stored/want-1) <= 1e-5) {
		t.Errorf("brew house stores %g J/K, want %g", a.Stored, want)
	}
	if b.Pair != 0 || !b.HasPump || b.Pump != (Source{-1, 2200}) || b.Hold != 0.25 || b.Stored != 55e3 || b.StoredOver != 2*time.Minute {
		t.Errorf("cooler: %+v", b)
	}
	if c := s.Loads[2].Stream; c.HasPump || c.Stored != 0 || c.Hold != 0 || !c.Pump.Constant() {
		t.Errorf("burner gas: %+v", c)
	}
	kettle, buffer := s.Loads[5].Vessel, s.Loads[6].Vessel
	if !(math.Abs(kettle.Shell/(500*465.78)-1) <= 2e-5) || buffer.Shell != 0 {
		t.Errorf("shells %g and %g J/K", kettle.Shell, buffer.Shell)
	}
}

func TestVessels(t *testing.T) {
	s := parse(t, maltings)
	l := s.Loads[5]
	v := l.Vessel
	if l.Stream != nil || v.FluidName != "water" || s.Tags[v.Temperature.Tag].Name != "T3" || s.Tags[v.Content.Tag].Name != "LT" || v.ContentKind != unit.Volume || v.Pressure.Value != 100e3 ||
		v.Rigid || v.Gives || v.Over != 20*time.Minute || v.Still != 0.02 || v.IdleBelow != 2000 || v.Margin != 3 {
		t.Errorf("kettle = %+v", v)
	}
	b := s.Loads[6].Vessel
	if b.ContentKind != unit.Mass || b.Content != (Source{-1, 12000}) || !b.Rigid || !b.Gives || b.Over != 10*time.Minute || b.Still != 0.01 || b.Margin != 5 || b.IdleBelow != 0 {
		t.Errorf("buffer = %+v", b)
	}
	if name, f := l.Fluid(); name != "water" || f.Name() != "water" {
		t.Errorf("fluid %q, %q", name, f.Name())
	}
	for i, want := range []string{"FQ T1 T2 ET", "FP T1 T2", "GQ T1 T2", "FT T1 T2 PQ", "FT T1 T2", "T3 LT", "T3"} {
		var got []string
		for _, src := range s.Loads[i].Sources() {
			if !src.Constant() {
				got = append(got, s.Tags[src.Tag].Name)
			}
		}
		if strings.Join(got, " ") != want {
			t.Errorf("%s reads %q, want %s", s.Loads[i].Name, got, want)
		}
	}
}

func TestMassOf(t *testing.T) {
	for text, want := range map[string]string{
		"120 kg steel": "120 kg|steel", "1 200 kg stainless steel 304": "1200 kg|stainless steel 304", "2.4 t  dry  concrete": "2.4 t|dry concrete",
		"500kg copper": "500 kg|copper", "3 short ton (US) brick": "3 short ton (US)|brick",
		"500 kg": "", "steel": "", "40 kJ/K": "", "": "",
	} {
		got := ""
		if q, name, ok := massOf(text); ok {
			got = q.String() + "|" + name
		}
		if got != want {
			t.Errorf("%q is %q, want %q", text, got, want)
		}
	}
}
