package site

import (
	"reflect"
	"strings"
	"testing"
	"time"
)

const payloads = `
site: X
timezone: UTC
barometer: 100 kPa
broker: {url: "mqtt://127.0.0.1"}
tags:
  coded: {topic: a, unit: °C, value: /v, time: /t, quality: {at: /q, code: OPC UA, absent: good}, unit_at: /u, accuracy: IEC 60751 A}
  worded: {topic: b, unit: °C, value: /v, quality: {at: /q, good: [ok, 1, true], uncertain: held, bad: 0.50}, accuracy: IEC 60751 A}
  listed: {topic: c, unit: °C, samples: /d, value: /v, time: /t, accuracy: IEC 60751 A}
  whole: {topic: d, unit: °C, samples: whole, value: /1, time: /0, time_unit: s, accuracy: IEC 60751 A}
  stepped: {topic: e, unit: °C, samples: /d, time: /d0, step: 250 ms, accuracy: IEC 60751 A}
  loop: {topic: f, unit: barg, signal: 4-20 mA, range: [-1 barg, 9 barg], accuracy: 0.1 % of 10 bar}
  wired: {topic: g, unit: °F, signal: Pt100, lead: 0.4 Ω, accuracy: IEC 60751 A}
  flow: {topic: h, unit: t/h, signal: square root of 4-20 mA, range: [0 t/h, 36 t/h], accuracy: 1 % of reading}
  dp: {topic: i, unit: t/h, signal: square root of pressure, differential: 25 kPa, range: [0 t/h, 36 t/h], cut_off: 2 %, accuracy: 1 % of reading}
  pulses: {topic: j, unit: pulses, value: /v, unit_at: /u, counts: {pulse: 10 L}, accuracy: 1 % of reading}
loads:
  l: {stream: {fluid: water, flow: flow, inlet: coded, outlet: worded, pressure: loop, meter_at: outlet, calibrated_at: 935 kg/m3, gives: heat}}
`

func TestParsePayloads(t *testing.T) {
	s, err := Parse("plant.yaml", []byte(payloads))
	if err != nil {
		t.Fatal(err)
	}
	tags := make(map[string]*Tag)
	for i := range s.Tags {
		tags[s.Tags[i].Name] = &s.Tags[i]
	}
	for name, want := range map[string]any{
		"coded":  &Quality{At: "/q", Code: "OPC UA", AbsentIsGood: true},
		"worded": &Quality{At: "/q", Good: []string{"ok", "1", "true"}, Uncertain: []string{"held"}, Bad: []string{"0.5"}},
	} {
		if got := tags[name].Quality; !reflect.DeepEqual(got, want) {
			t.Errorf("%s: quality %+v, want %+v", name, got, want)
		}
	}
	for name, want := range map[string]Samples{"listed": {At: "/d"}, "whole": {}, "stepped": {At: "/d", Step: 250 * time.Millisecond}} {
		if got := tags[name].Samples; got == nil || *got != want {
			t.Errorf("%s: samples %+v, want %+v", name, got, want)
		}
	}
	for name, want := range map[string]Signal{
		"loop":  {Word: "4-20 mA", Loop: true},
		"wired": {Word: "Pt100", R0: 100, Lead: 0.4},
		"flow":  {Word: "square root of 4-20 mA", Loop: true, Root: true, CutOff: 0.05},
		"dp":    {Word: "square root of pressure", Root: true, FullAt: 25, CutOff: 0.02},
	} {
		if got := tags[name].Signal; got == nil || *got != want {
			t.Errorf("%s: signal %+v, want %+v", name, got, want)
		}
	}
	for name, want := range map[string]string{"coded": "°C", "loop": "mA", "wired": "ohm", "flow": "mA", "dp": "kPa", "pulses": "pulses"} {
		if got := tags[name].Numbers.Symbol; got != want {
			t.Errorf("%s: numbers in %q, want %q", name, got, want)
		}
	}
	if u := tags["coded"].UnitAt; u != "/u" || tags["coded"].Signal != nil || tags["loop"].Quality != nil || tags["coded"].Samples != nil {
		t.Errorf("coded: unit at %q, %+v", u, tags["coded"])
	}
	equal(t, "low end of the loop, absolute", tags["loop"].Min+1, 1)
	equal(t, "high end of the loop, absolute", tags["loop"].Max, 1e6)
	equal(t, "full flow", tags["flow"].Max, 10)
	if st := s.Loads[0].Stream; st.CalibratedAt != 935 || !st.MeterAtOutlet {
		t.Errorf("stream %+v", st)
	}
	if _, err := Parse("plant.yaml", []byte(strings.Replace(payloads, "uncertain: held, ", "", 1))); err != nil {
		t.Errorf("without a word for uncertain: %v", err)
	}
}
