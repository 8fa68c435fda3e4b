package agent

import (
	"bytes"
	"context"
	"math"
	"regexp"
	"strings"
	"testing"
	"time"

	"golang.org/x/sync/errgroup"

	"heatreeve/agent/demo"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/survey"
	"heatreeve/ingest"
)

// knows is what an engineer of the plant fills in, by the beginning of the line that has the
// blanks, or by what stands behind the blank's key.
var knows = []struct{ line, key, value string }{
	{"site:", "site", "Brackwater Creamery"},
	{"timezone:", "timezone", "Europe/Dublin"},
	{"  FT-401:", "unit", "Nm3/h"}, {"  FT-301:", "unit", "m3/h"}, {"  FT-2", "unit", "m3/h"},
	{"  PT-", "unit", "barg"},
	{"  TT-4", "accuracy", "IEC 60751 B"}, {"  TT-", "accuracy", "IEC 60751 A"},
	{"  FT-", "accuracy", "0.5 % of reading"}, {"  PT-", "accuracy", "0.25 % of 16 bar"},
	{"  hw:", "fluid", "water"}, {"  hw:", "meter_at", "inlet"},
	{"  chw:", "fluid", "glycol"}, {"  chw:", "meter_at", "inlet"},
	{"  milk:", "fluid", "whole milk"}, {"  milk:", "pressure", "4 barg"}, {"  milk:", "meter_at", "inlet"},
	{"  air:", "fluid", "dry air"}, {"  air:", "pressure", "4 kPag"}, {"  air:", "meter_at", ""},
}

// complete fills in a draft as the engineer would.
func complete(t *testing.T, draft string) string {
	t.Helper()
	var done strings.Builder
	at := ""
	for line := range strings.Lines(draft) {
		if strings.HasPrefix(line, "  ") && !strings.HasPrefix(line, "    ") {
			at = line
		}
		for _, k := range knows {
			place := line
			if strings.HasPrefix(line, "    ") {
				place = at
			}
			if !strings.HasPrefix(place, k.line) {
				continue
			}
			blank := k.key + ": " + survey.Blank
			if k.value == "" {
				line = strings.Replace(line, ", "+blank, "", 1)
			}
			line = strings.Replace(line, blank, k.key+": "+k.value, 1)
		}
		done.WriteString(line)
	}
	text := strings.Replace(done.String(), "barometer: 101.325 kPa", "barometer: 100.9 kPa", 1)
	text = strings.Replace(text, "\ntags:", "\nfluids: {glycol: {propylene glycol: 32 %, uncertainty: 0.6 %}}\ntags:", 1)
	if left := regexp.MustCompile(`(?m)^.*: ___.*$`).FindAllString(text, -1); len(left) > 0 {
		t.Fatalf("left to fill in: %q", left)
	}
	return text
}

// A survey of the demo's plant drafts a site file that, once completed, gives the duties that
// the demo's own gives of the same messages.
func TestSurveyOfTheDemoGivesItsDuties(t *testing.T) {
	d, err := demo.Start(demo.Options{Speed: 60})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var g errgroup.Group
	g.Go(func() error { return d.Run(ctx) })

	s := survey.New(0)
	var heard []ingest.Heard
	o := connectionOf(d.Site.Broker)
	o.ClientID, o.Now = "surveyor", d.Clock.Now
	g.Go(func() error {
		return ingest.Listen(ctx, o, []string{"#"}, func(h ingest.Heard) {
			s.Hear(survey.Message{Topic: h.Topic, Payload: h.Payload, Retained: h.Retained, At: h.At})
			h.Payload = bytes.Clone(h.Payload)
			heard = append(heard, h)
			if len(heard) == 1000 {
				cancel()
			}
		})
	})
	timeout := time.AfterFunc(time.Minute, cancel)
	defer timeout.Stop()
	if err := g.Wait(); err != nil {
		t.Fatal(err)
	}
	if len(heard) < 1000 {
		t.Fatalf("heard %d messages in a minute", len(heard))
	}
	var draft strings.Builder
	if err := (survey.Draft{Broker: d.Site.Broker, Topics: s.Topics()}).Write(&draft); err != nil {
		t.Fatal(err)
	}
	drafted, err := site.Parse("draft.yaml", []byte(complete(t, draft.String())))
	if err != nil {
		t.Fatalf("%v\n%s", err, draft.String())
	}
	got, want := duties(t, drafted, heard), duties(t, d.Site, heard)
	for own, name := range map[string]string{"hot-water": "hw", "chilled-glycol": "chw", "dryer-air": "air", "milk": "milk"} {
		if want[own] == 0 || !(math.Abs(got[name]/want[own]-1) <= 1e-3) {
			t.Errorf("%s: %g W by the draft, %g W by the demo's file", own, got[name], want[own])
		}
	}
}

// duties are those of a site's loads after the messages.
func duties(t *testing.T, s *site.Site, heard []ingest.Heard) map[string]float64 {
	t.Helper()
	decoder, err := ingest.NewDecoder(signalsOf(s), 0)
	if err != nil {
		t.Fatal(err)
	}
	engine, err := loads.New(plantOf(s))
	if err != nil {
		t.Fatal(err)
	}
	var beat loads.Beat
	for _, h := range heard {
		out, _ := decoder.Decode(h.Topic, h.Payload, h.At, h.Retained, nil)
		for _, o := range out {
			if o.Refusal != nil {
				t.Fatal(o.Refusal)
			}
			beat.Readings = append(beat.Readings, loads.Reading{Tag: o.Tag, At: o.At, Value: o.Value, Mark: o.Mark})
			beat.Through = max(beat.Through, o.At)
		}
	}
	engine.Advance(beat, nil)
	all := map[string]float64{}
	for i, l := range engine.Snapshot().Loads {
		if !l.Figure.Measured() {
			t.Fatalf("%s: %v: %s", s.Loads[i].Name, l.Figure.Fault, l.Figure.Reason)
		}
		all[s.Loads[i].Name] = l.Figure.Duty
	}
	return all
}
