package survey

import (
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protowire"

	"heatreeve/agent/site"
)

// True and false, bare, in JSON or as a Boolean of Sparkplug, are states that a load can
// use, and no text.
func TestTrueAndFalse(t *testing.T) {
	s := heard(map[string][]string{"hw/P-1/running": {"true", " true\n"}, "hw/XV-1": {"true", "false"}, "hall/meter": {`{"pump": true, "flow_m3h": 3}`}, "hw/P-2": {"ON"}, "hw/fan": {`{"state": false}`}, "hw/P-3": {`{"state": true}`}})
	got := signals(s)
	for tag, want := range map[string]Signal{
		"running": {Value: "", Min: 1, Max: 1, Count: 2}, "XV-1": {Value: "", Min: 0, Max: 1, Count: 2}, "pump": {Value: "/pump", Min: 1, Max: 1, Count: 1}, "fan-state": {Value: "/state", Min: 0, Max: 0, Count: 1},
	} {
		g := got[tag]
		if !g.Truth || g.Value != want.Value || g.Min != want.Min || g.Max != want.Max || g.Count != want.Count || g.Guess.Quantity != "state" || g.Guess.Why == "" {
			t.Errorf("%s: %+v, want %+v", tag, g, want)
		}
	}
	if len(got) != 6 {
		t.Errorf("%d signals, want five states and a flow", len(got))
	}
	for _, topic := range s.Topics() {
		if want := map[string]Shape{"hw/XV-1": Truth, "hw/P-2": Words}[topic.Name]; want != "" && topic.Shape != want {
			t.Errorf("%s: shape %q, want %q", topic.Name, topic.Shape, want)
		}
	}
}

// So is a Boolean of Sparkplug, but not one by which a node is commanded.
func TestBooleanOfAMetric(t *testing.T) {
	boolean := func(name string) []byte { // name 1, datatype 4 (11: Boolean), value 14
		return append(protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), name), 4<<3, 11, 14<<3, 1)
	}
	all := born(boolean("Pump/Run"), boolean("Node Control/Rebirth")).Topics()[0].Signals
	if len(all) != 1 || all[0].Metric != "Pump/Run" || !all[0].Truth || all[0].Min != 1 {
		t.Errorf("%+v, want the pump alone, and true", all)
	}
}

// The draft has states ready to be used, and not in use: a tag of true and false that is of
// no pump and no bypass reads nothing.
func TestDraftOfAState(t *testing.T) {
	var text strings.Builder
	d := Draft{Broker: site.Broker{URL: "mqtt://127.0.0.1:1883"}, Topics: heard(map[string][]string{"hw/P-1/running": {"true", "false"}}).Topics()}
	if err := d.Write(&text); err != nil {
		t.Fatal(err)
	}
	if want := `  # running: {topic: hw/P-1/running, unit: "%", accuracy: ± 1 %, max_age: 10 s} # false and true`; !strings.Contains(text.String(), want) || strings.Contains(text.String(), "\n  running:") {
		t.Errorf("draft\n%s\nwant %s", text.String(), want)
	}
}
