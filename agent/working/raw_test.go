package working

import (
	"encoding/json"
	"math"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest/quality"
)

const rawSite = `
site: Fennick Wash House
timezone: UTC
barometer: 101.3 kPa
broker: {url: mqtt://127.0.0.1}
tags:
  Pt: {topic: io, unit: °C, signal: Pt100, lead: 0.42 ohm, value: /a, accuracy: IEC 60751 A}
  Cold: {topic: io, unit: °F, signal: Pt1000, value: /b, accuracy: IEC 60751 A}
  P: {topic: io, unit: barg, signal: 4-20 mA, range: [2 barg, 10 barg], value: /c, accuracy: 0.2 % of 10 bar}
  F: {topic: io, unit: t/h, signal: square root of 4-20 mA, range: [0 t/h, 12 t/h], value: /d, accuracy: 1 % of reading}
  D: {topic: io, unit: m3/h, signal: square root of pressure, differential: 250 mbar, range: [0 m3/h, 12 m3/h], value: /e, accuracy: 1 % of reading}
loads:
  bath:
    stream: {fluid: water, flow: F, inlet: Pt, outlet: Cold, pressure: P, meter_at: inlet, calibrated_at: 965 kg/m3, gives: heat}
  basin:
    stream: {fluid: water, flow: D, inlet: Pt, outlet: Cold, pressure: P, meter_at: inlet, calibrated_at: 965 kg/m3, gives: heat}
`

// heard is a load without a duty, of which each input was heard.
func heard(t *testing.T, load int, values map[string]float64) *Working {
	t.Helper()
	s, err := site.Parse("raw.yaml", []byte(rawSite))
	if err != nil {
		t.Fatal(err)
	}
	at := time.Date(2026, 12, 2, 6, 0, 0, 0, time.UTC).UnixNano()
	x := Subject{Site: s, Load: load, Basis: loads.Basis{Grid: 1e9, Figure: loads.Figure{At: at, Fault: loads.BadReading}}}
	stream := s.Loads[load].Stream
	for _, in := range []struct {
		name   string
		source site.Source
	}{{"flow", stream.Flow}, {"inlet", stream.Inlet}, {"outlet", stream.Outlet}, {"pressure", stream.Pressure}} {
		r := loads.Reading{Tag: in.source.Tag, At: at - 4e8, Value: values[in.name]}
		fault := loads.NoFault
		if math.IsNaN(r.Value) {
			r.Mark, fault = quality.NoValue, loads.BadReading
		}
		x.Basis.Inputs = append(x.Basis.Inputs, loads.Input{Name: in.name, Source: loads.Source{Tag: in.source.Tag}, Held: r, Fault: fault})
	}
	return Of(x)
}

func shownAs(w *Working, symbol string) string {
	for _, s := range w.Sections {
		for _, l := range s.Lines {
			if l.Symbol == symbol {
				return l.Shown + " " + l.Unit
			}
		}
	}
	return ""
}

// A quantity leads back to the signal that it came by. The tables of IEC
// 60751:2008 have 130.90 ohm for a Pt100 at 80 °C, here with its leads, and 80.31 at -50 °C,
// of which the equation by hand gives 803.0628 for a Pt1000; the rest is arithmetic: a flow of 9 in 12 is 9/16 of the pressure, 13 mA
// and 140.625 mbar, and 4 in a range from 2 to 10 is 8 mA.
func TestRawSignalsAreWorkedBack(t *testing.T) {
	mass := heard(t, 0, map[string]float64{"flow": 9 / 3.6, "inlet": 353.15, "outlet": 223.15, "pressure": 501.3e3})
	volume := heard(t, 1, map[string]float64{"flow": 9 / 3600., "inlet": 353.15, "outlet": 223.15, "pressure": 501.3e3})
	still := heard(t, 0, map[string]float64{"inlet": 353.15, "outlet": 223.15, "pressure": 501.3e3})
	for _, tt := range []struct {
		w            *Working
		symbol, want string
	}{
		{mass, "RT1", "131.317 ohm"}, {mass, "RT2", "803.0628 ohm"}, {mass, "Ip1", "8 mA"},
		{mass, "Ims", "13 mA"}, {volume, "ΔpV", "140.625 mbar"}, {still, "Ims", ""},
	} {
		got := shownAs(tt.w, tt.symbol)
		number, unit, _ := strings.Cut(got, " ")
		want, as, _ := strings.Cut(tt.want, " ")
		if unit != as || !(tt.want == got || math.Abs(parse(number)-parse(want)) < 0.002) {
			t.Errorf("%s is %q, want %q", tt.symbol, got, tt.want)
		}
	}
}

// A reading without a value is told as such, and as JSON.
func TestReadingWithoutValue(t *testing.T) {
	w := heard(t, 0, map[string]float64{"flow": 2.5, "inlet": math.NaN(), "outlet": 223.15, "pressure": 501.3e3})
	text, err := json.Marshal(w)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{`"words":"inlet, by Pt100, without a number"`, `"value":null`, `inlet: tag \"Pt\" had no number at 2026-12-02 05:59:59 +00:00; `} {
		if !strings.Contains(string(text), want) {
			t.Errorf("does not say %s:\n%s", want, text)
		}
	}
	var back Working
	if err := json.Unmarshal(text, &back); err != nil {
		t.Fatal(err)
	}
	again, err := json.Marshal(back)
	if err != nil || string(again) != string(text) {
		t.Errorf("read and written again, %v: %s, not %s", err, again, text)
	}
	if strings.Contains(string(text), "NaN") || strings.Count(string(text), "null") != 3 {
		t.Errorf("%s", text)
	}
}
