package agent

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
)

func boardMill(t *testing.T) *site.Site {
	t.Helper()
	text, err := configs.Files.ReadFile("marrowick-board-mill.yaml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := site.Parse("marrowick-board-mill.yaml", text)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// millClock is when the messages of the board mill come.
var millClock = time.Date(2026, 3, 3, 6, 0, 1, 0, time.UTC)

// tell decodes messages, topic and payload by turns, and returns what came of them, by tag.
func tell(t *testing.T, s *site.Site, messages ...string) map[string][]ingest.Outcome {
	t.Helper()
	d, err := ingest.NewDecoder(signalsOf(s), s.Timing.Ahead)
	if err != nil {
		t.Fatal(err)
	}
	all := make(map[string][]ingest.Outcome)
	for i := 0; i < len(messages); i += 2 {
		out, known := d.Decode(messages[i], []byte(messages[i+1]), millClock.UnixNano(), false, nil)
		if !known {
			t.Fatalf("no tag reads %q", messages[i])
		}
		for _, o := range out {
			all[s.Tags[o.Tag].Name] = append(all[s.Tags[o.Tag].Name], o)
		}
	}
	return all
}

// What the instruments of the board mill send, and the duties that this is. Resistances at
// 115 and 65 °C by IEC 60751 (144.18 and 125.16 ohm of a Pt100); 8.8 mA is three tenths of
// the span, a quarter of the pressure half the flow, and 13 mA three quarters of it by the
// root. Duties by the Python package iapws 1.5 (IAPWS-IF97): 12 m³/h at 947.196 kg/m³ through
// a meter for 965.4, and 9 t/h at 5.4585 kg/m³ through one for 4.854.
func TestDutiesOfRawSignals(t *testing.T) {
	s := boardMill(t)
	const now = `"2026-03-03T06:00:00Z"`
	all := tell(t, s,
		"marrowick/io/7", `{"t":`+now+`,"ch":[144.60171,1251.5996,8.8,62.5]}`,
		"marrowick/ua/TI-31", `{"Value":195,"SourceTimestamp":`+now+`,"Unit":"degC"}`,
		"marrowick/ua/TI-32", `{"Value":260,"SourceTimestamp":`+now+`,"Status":1083179008,"Unit":"°C"}`,
		"marrowick/ua/PI-31", `{"Value":10,"SourceTimestamp":`+now+`,"Status":0}`,
		"marrowick/ua/FI-31", `{"Value":13,"SourceTimestamp":`+now+`}`,
	)
	e, err := loads.New(plantOf(s))
	if err != nil {
		t.Fatal(err)
	}
	beat := loads.Beat{Through: millClock.UnixNano()}
	for name, outcomes := range all {
		for _, o := range outcomes {
			if o.Refusal != nil {
				t.Fatalf("%s: %v", name, o.Refusal)
			}
			beat.Readings = append(beat.Readings, loads.Reading{Tag: o.Tag, At: o.At, Value: o.Value, Mark: o.Mark})
		}
	}
	e.Advance(beat, nil)
	snapshot := e.Snapshot()
	for i, want := range []struct{ duty, flow float64 }{{670423.54, 3.1875153}, {403433.71, 2.6511147}} {
		f := snapshot.Loads[i].Figure
		if f.Fault != loads.NoFault || math.Abs(f.Duty/want.duty-1) > 2e-5 || math.Abs(f.MassFlow/want.flow-1) > 1e-5 {
			t.Errorf("%s: %v %s, %.7g W at %.7g kg/s; want %.7g at %.7g", s.Loads[i].Name, f.Fault, f.Reason, f.Duty, f.MassFlow, want.duty, want.flow)
		}
	}
	if m := all["steam/out"][0].Mark; m != quality.LastUsable {
		t.Errorf("the outlet of the steam is %v, want %v", m, quality.LastUsable)
	}
}

// The accuracy of a transmitter, 0.2 % of its span, is the 0.032 mA by which a zero may be
// off and is still one; what NE 43 calls no failure is within the range of the tag.
func TestMarksOfRawSignals(t *testing.T) {
	s := boardMill(t)
	for _, tt := range []struct {
		mA   float64
		barg float64
		mark quality.Mark
	}{
		{4, 0, quality.None}, {3.97, -0.01875, quality.None}, {3.96, -0.025, quality.BelowSpan}, {3.6, -0.25, quality.BelowSpan},
		{20.03, 10.01875, quality.None}, {20.5, 10.3125, quality.AboveSpan}, {21, 10.625, quality.AboveSpan},
		{3.59, math.NaN(), quality.Failed}, {22, math.NaN(), quality.Failed},
	} {
		o := tell(t, s, "marrowick/io/7", fmt.Sprintf(`{"t":"2026-03-03T06:00:00Z","ch":[120,1200,%v,0]}`, tt.mA))["condensate/pressure"][0]
		same := math.Abs(o.Value-101e3-tt.barg*1e5) < 1e-6 || math.IsNaN(o.Value) && math.IsNaN(tt.barg)
		if o.Refusal != nil || o.Mark != tt.mark || !same {
			t.Errorf("%v mA: %v Pa, %v, %v; want %v barg, %v", tt.mA, o.Value, o.Mark, o.Refusal, tt.barg, tt.mark)
		}
	}
}

// A minute of samples, each with its own stamp, of which one comes from a device that is
// being checked; and a plain list a second apart.
func TestSamplesOfTheLogger(t *testing.T) {
	s := boardMill(t)
	var rows, flows []string
	begin := millClock.Add(-time.Minute)
	for i := range 60 {
		health := ""
		if i == 30 {
			health = `,"health":"C"`
		}
		rows = append(rows, fmt.Sprintf(`{"ts":%d,"ti":%d.5,"to":34%s}`, begin.Add(time.Duration(i)*time.Second).UnixMilli(), 50+i%5, health))
		flows = append(flows, fmt.Sprint(20+0.5*float64(i)))
	}
	all := tell(t, s, "marrowick/log/1", `{"rows":[`+strings.Join(rows, ",")+`]}`,
		"marrowick/log/2", fmt.Sprintf(`{"first":%d,"q":[%s]}`, begin.UnixMilli(), strings.Join(flows, ",")))
	for _, name := range []string{"white water/in", "white water/out", "white water/flow"} {
		if len(all[name]) != 60 {
			t.Fatalf("%s: %d readings, want 60", name, len(all[name]))
		}
	}
	for i := range 60 {
		in, flow := all["white water/in"][i], all["white water/flow"][i]
		at := begin.Add(time.Duration(i) * time.Second).UnixNano()
		if in.At != at || flow.At != at || flow.Refusal != nil {
			t.Errorf("sample %d: stamped %d and %d, want %d; %v", i, in.At, flow.At, at, flow.Refusal)
		}
		if want := (20 + 0.5*float64(i)) / 1000; math.Abs(flow.Value-want) > 1e-12 {
			t.Errorf("sample %d: %v m³/s, want %v", i, flow.Value, want)
		}
		if want := i == 30; (in.Mark == quality.FunctionCheck) != want {
			t.Errorf("sample %d: %v", i, in.Mark)
		}
	}
}

func TestQualityInWordsOfTheSource(t *testing.T) {
	s := boardMill(t)
	for word, want := range map[string]quality.Mark{"ok": quality.None, "held": quality.Doubted, "manual": quality.Doubted, "open": quality.Rejected} {
		all := tell(t, s, "marrowick/hood", fmt.Sprintf(`{"at":"2026-03-03T06:00:00Z","in":{"v":14,"q":%q},"out":{"v":95,"q":"ok"},"flow":40000}`, word))
		if o := all["hood/in"][0]; o.Refusal != nil || o.Mark != want {
			t.Errorf("%s: %v, %v; want %v", word, o.Mark, o.Refusal, want)
		}
	}
	all := tell(t, s, "marrowick/hood", `{"at":"2026-03-03T06:00:00Z","in":{"v":14,"q":"fine"},"out":{"v":95},"flow":40000}`)
	for _, name := range []string{"hood/in", "hood/out"} {
		if o := all[name][0]; o.Refusal == nil || o.Refusal.Reason != ingest.UnknownQuality {
			t.Errorf("%s: %+v, %v; want %v", name, o.Reading, o.Refusal, ingest.UnknownQuality)
		}
	}
}

// Another signal of a tag makes its numbers mean something else.
func TestMeaningOfASignal(t *testing.T) {
	s := boardMill(t)
	before := meaning(&s.Tags[2])
	s.Tags[2].Signal = nil
	if after := meaning(&s.Tags[2]); after == before {
		t.Errorf("%q with and without a signal", after)
	}
}
