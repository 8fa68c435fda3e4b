package relay

import (
	"bytes"
	"encoding/json"
	"math"
	"net/url"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/agent/warn"
	"heatreeve/configs"
	"heatreeve/ingest/quality"
)

const second = int64(time.Second)

// base is event time at the start: 2023-11-14 22:14:00 UTC.
const base = 1_700_000_040 * second

func schema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(configs.ResultSchema))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("result.schema.json", doc); err != nil {
		t.Fatal(err)
	}
	s, err := c.Compile("result.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func snapshot(at int64, duty float64) *view.Snapshot {
	return &view.Snapshot{At: at, Slack: 5 * second, Loads: []view.Load{{
		Name: "hot/water", Figure: loads.Figure{At: at, Duty: duty, Uncertainty: duty / 50, Mark: quality.None},
		Until: at + 60*second, Verdict: design.Holding,
		Booked: loads.Totals{Given: 3.6e9, Measured: 7200 * second, Uncertain: 60 * second, Missing: second},
		Means:  [3]loads.Mean{{Coverage: 1}, {Coverage: 0.5}, {Coverage: 1.0 / 3}},
	}}}
}

func relayed(every time.Duration) *Relay {
	return New("Brackwater", "plant/heat", []string{"hot/water"}, every)
}

// look wants n results, and returns the last.
func look(t *testing.T, r *Relay, s *view.Snapshot, now int64, last bool, n int) (got map[string]any) {
	t.Helper()
	results, err := r.Look(s, now, time.Unix(0, now), last)
	if err != nil || len(results) != n {
		t.Fatalf("%d results, %v; want %d", len(results), err, n)
	}
	for _, x := range results {
		if x.Topic != "plant/heat/hot%2Fwater" {
			t.Errorf("topic %q", x.Topic)
		}
		doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(x.Payload))
		if err != nil {
			t.Fatal(err)
		}
		if err := schema(t).Validate(doc); err != nil {
			t.Errorf("%s: %v", x.Payload, err)
		}
		if err := json.Unmarshal(x.Payload, &got); err != nil {
			t.Fatal(err)
		}
	}
	return got
}

func TestDocument(t *testing.T) {
	got := look(t, relayed(time.Second), snapshot(base, 640e3), base, false, 1)
	want := map[string]any{
		"site": "Brackwater", "load": "hot/water", "time": "2023-11-14T22:14:00Z", "duty_watts": 640e3, "uncertainty_watts": 12800.0,
		"verdict": "holding", "quality": "good", "heat_given_joules": 3.6e9, "heat_taken_joules": 0.0, "bridged_given_joules": 0.0, "bridged_taken_joules": 0.0,
		"measured_seconds": 7200.0, "uncertain_seconds": 60.0, "bridged_seconds": 0.0, "missing_seconds": 1.0,
		"coverage_ratio": map[string]any{"1m": 1.0, "15m": 0.5, "1h": 0.3333},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got %v\nwant %v", got, want)
	}
}

// A figure that has run out of age is told as blind, though event time stands still, and
// so is one that is no number.
func TestWhatIsNotKnownIsNull(t *testing.T) {
	r := relayed(time.Second)
	look(t, r, snapshot(base, 640e3), base, false, 1)
	got := look(t, r, snapshot(base, 640e3), base+100*second, false, 1)
	if got["duty_watts"] != nil || got["verdict"] != "blind" || got["quality"] != "bad" || got["reason"] == nil {
		t.Errorf("out of age: %v", got)
	}
	look(t, r, snapshot(base, 640e3), base+101*second, false, 1) // its coverage fades
	if got := look(t, relayed(time.Second), snapshot(base, math.NaN()), base, false, 1); got["duty_watts"] != nil {
		t.Errorf("no number: %v", got)
	}
}

func TestWhatIsTold(t *testing.T) {
	r := relayed(10 * time.Second)
	look(t, r, &view.Snapshot{Loads: make([]view.Load, 1)}, base, false, 0) // nothing worked yet
	look(t, r, snapshot(base, 640e3), base, false, 1)
	look(t, r, snapshot(base+9*second, 650e3), base+9*second, false, 0)        // too soon
	look(t, r, snapshot(base+10*second, 640e3), base+10*second, false, 0)      // nothing but the time has changed
	look(t, r, snapshot(base+11*second, 640e3+0.04), base+11*second, false, 0) // nor by less than a tenth of a watt
	look(t, r, snapshot(base-second, 660e3), base+12*second, false, 0)         // older
	look(t, r, snapshot(base+13*second, 660e3), base+13*second, false, 1)
	look(t, r, snapshot(base+14*second, 661e3), base+14*second, true, 1) // the last: at once
	look(t, r, snapshot(base+14*second, 661e3), base+14*second, true, 0)
}

// Names of loads come back from topics, whatever is in them, and mean nothing there.
func TestLevels(t *testing.T) {
	for _, name := range []string{"hot-water", "a/b", "100 % +#$", "%2F", "Wärme", "$SYS"} {
		level := Level(name)
		if strings.ContainsAny(level, "/+#$") {
			t.Errorf("%q: level %q", name, level)
		}
		if back, err := url.PathUnescape(level); err != nil || back != name {
			t.Errorf("%q came back as %q, %v", name, back, err)
		}
	}
}

// The schema has the keys of the document, and the words of the verdicts and qualities.
func TestSchemaIsOfTheDocument(t *testing.T) {
	s := schema(t)
	var keys, always []string
	for i := range reflect.TypeFor[document]().NumField() {
		key, options, _ := strings.Cut(reflect.TypeFor[document]().Field(i).Tag.Get("json"), ",")
		if keys = append(keys, key); options == "" {
			always = append(always, key)
		}
	}
	var have []string
	for key := range s.Properties {
		have = append(have, key)
	}
	sorted := func(x []string) []string { return slices.Sorted(slices.Values(x)) }
	if !slices.Equal(sorted(have), sorted(keys)) || !slices.Equal(sorted(s.Required), sorted(always)) {
		t.Errorf("schema has %q, needs %q;\nthe document %q, always %q", have, s.Required, keys, always)
	}
	var verdicts []any
	for _, v := range design.Verdicts {
		verdicts = append(verdicts, v.String())
	}
	words := func(x []any) []string {
		var out []string
		for _, w := range x {
			out = append(out, w.(string))
		}
		return sorted(out)
	}
	if got := words(s.Properties["verdict"].Enum.Values); !slices.Equal(got, words(verdicts)) {
		t.Errorf("verdicts %q, want %q", got, verdicts)
	}
	qualities := []any{quality.Good.String(), quality.Uncertain.String(), quality.Bad.String()}
	if got := words(s.Properties["quality"].Enum.Values); !slices.Equal(got, words(qualities)) {
		t.Errorf("qualities %q, want %q", got, qualities)
	}
}

// A warning is told at once when it begins, is acknowledged and is over, and otherwise no
// more often than every; its end stays.
func TestWarningsAreTold(t *testing.T) {
	r := relayed(time.Minute)
	w := warn.Listed{Entry: warn.Entry{Warning: design.Warning{Kind: design.WarnShort, Subject: "hot/water", Begin: base, Since: base, Now: -0.2}, Times: 1}}
	told := func(at int64, n int, want string) {
		t.Helper()
		s := &view.Snapshot{Warnings: warn.Board{All: []warn.Listed{w}}}
		got, err := r.Warnings(s, time.Unix(0, at), false)
		if err != nil || len(got) != n {
			t.Fatalf("%d told, %v; want %d", len(got), err, n)
		}
		if n > 0 && (got[0].Topic != "plant/heat/warnings/hot%2Fwater/short" || !strings.Contains(string(got[0].Payload), want)) {
			t.Errorf("%s %s, want %s", got[0].Topic, got[0].Payload, want)
		}
	}
	told(base, 1, `"state":"unacknowledged","active":true`)
	told(base+second, 0, "")
	w.Now = -0.3
	told(base+2*second, 0, "")
	told(base+61*second, 1, `"deviation_ratio":-0.3`)
	w.Mark = &warn.Mark{By: "J. Marsh", Reason: "pump", At: base}
	told(base+62*second, 1, `"by":"J. Marsh"`)
	w.Mark, w.End, w.Seen = nil, base+63*second, true
	told(base+63*second, 1, `"state":"normal","active":false`)
	told(base+200*second, 0, "")
}
