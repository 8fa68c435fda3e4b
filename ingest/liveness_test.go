package ingest

import (
	"strings"
	"testing"
)

func alive(l Liveness) Tag {
	return Tag{Name: "plc", Topic: "plc/alive", Scale: 1, Min: 0, Max: 1, QoS: 1, Liveness: &l}
}

func TestHeartbeat(t *testing.T) {
	for _, payload := range []string{"", " ", "7", "alive", "{", `{"a":1,"a":2}`, "\xff\x00", strings.Repeat("x", MaxPayload+1)} {
		if o := decodeOne(t, alive(Liveness{}), payload, false); o.Refusal != nil || o.Value != 1 || o.At != arrival {
			t.Errorf("%.20q: %+v, %v; want 1 at its arrival", payload, o.Reading, o.Refusal)
		}
	}
	if o := decodeOne(t, alive(Liveness{}), "7", true); o.Refusal == nil || o.Refusal.Reason != Retained {
		t.Errorf("a heartbeat that the broker kept: %+v, %v", o.Reading, o.Refusal)
	}
}

// A heartbeat with a stamp counts at that time, and not at all where the stamp cannot be
// read: also where a message before it had one.
func TestHeartbeatWithAStamp(t *testing.T) {
	tag := alive(Liveness{})
	tag.Time = "/t"
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		payload string
		want    Reason // reasons: none
	}{
		{`{"t":1774745940}`, reasons}, {"", Empty}, {`{"t":1774745940`, Truncated}, {`{"s":1}`, TimeMissing}, {"7", TimeMissing}, {`{"n":[1,2],"t":1774745940}`, reasons},
	} {
		out, _ := d.Decode(tag.Topic, []byte(tt.payload), arrival, false, nil)
		switch r := out[0].Refusal; {
		case tt.want == reasons && (r != nil || out[0].Value != 1 || out[0].At != 1774745940e9 || !out[0].Stamped):
			t.Errorf("%q: %+v, %v", tt.payload, out[0].Reading, r)
		case tt.want != reasons && (r == nil || r.Reason != tt.want):
			t.Errorf("%q: %+v, %v; want %v", tt.payload, out[0].Reading, r, tt.want)
		}
	}
}

func TestAvailability(t *testing.T) {
	words := Liveness{Online: "up", Offline: "down"}
	inJSON := alive(words)
	inJSON.Value = "/state"
	flag := alive(Liveness{Online: "true", Offline: "false"})
	flag.Value = "/on"
	for _, tt := range []struct {
		tag     Tag
		payload string
		value   float64
		refused Reason // reasons: none
	}{
		{alive(words), "up", 1, reasons}, {alive(words), " down\n", 0, reasons},
		{alive(words), "Up", 0, WrongWord}, {alive(words), "up and away", 0, WrongWord}, {alive(words), "1", 0, WrongWord}, {alive(words), `"up"`, 0, WrongWord},
		{alive(words), " ", 0, Empty}, {alive(words), strings.Repeat("x", MaxPayload+1), 0, TooLarge},
		{inJSON, `{"state":"up"}`, 1, reasons}, {inJSON, `{"state":"\u0064own"}`, 0, reasons}, {inJSON, `{"state":"?"}`, 0, WrongWord},
		{inJSON, `{"state":null}`, 0, WrongType}, {inJSON, `{"state":{}}`, 0, WrongType}, {inJSON, `{}`, 0, ValueMissing}, {inJSON, "up", 0, NotJSON},
		{flag, `{"on":true}`, 1, reasons}, {flag, `{"on":false}`, 0, reasons}, {flag, `{"on":1}`, 0, WrongWord},
	} {
		o := decodeOne(t, tt.tag, tt.payload, false)
		switch {
		case tt.refused == reasons && (o.Refusal != nil || o.Value != tt.value):
			t.Errorf("%.20q: %v, %v; want %v", tt.payload, o.Value, o.Refusal, tt.value)
		case tt.refused != reasons && (o.Refusal == nil || o.Refusal.Reason != tt.refused):
			t.Errorf("%.20q: %v, %v; want %v", tt.payload, o.Value, o.Refusal, tt.refused)
		}
	}
	if o := decodeOne(t, alive(words), "up", true); o.Refusal == nil || o.Refusal.Reason != Retained {
		t.Errorf("a word that the broker kept, of unknown age: %+v, %v", o.Reading, o.Refusal)
	}
	words.Kept = true
	if o := decodeOne(t, alive(words), "up", true); o.Refusal != nil || o.Value != 1 || o.At != arrival {
		t.Errorf("the last word, which holds until there is another: %+v, %v", o.Reading, o.Refusal)
	}
}

// One topic may tell that its source is alive and carry a value as well.
func TestHeartbeatOfATopicWithValues(t *testing.T) {
	tag := alive(Liveness{})
	tag.Topic = celsius().Topic
	d, err := NewDecoder([]Tag{celsius(), tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := d.Decode(tag.Topic, []byte(`{"v":60,"t":17`), arrival, false, nil)
	if len(out) != 2 || out[0].Refusal == nil || out[0].Refusal.Reason != Truncated || out[1].Refusal != nil || out[1].Value != 1 {
		t.Errorf("broken JSON: %+v", out)
	}
}

func TestLivenessIsChecked(t *testing.T) {
	if _, err := NewDecoder([]Tag{alive(Liveness{Online: "x", Offline: "x"})}, 0); err == nil || !strings.Contains(err.Error(), `same word "x"`) {
		t.Errorf("one word for both: %v", err)
	}
	words := alive(Liveness{Online: "up", Offline: "down"})
	words.Time = "/t"
	if _, err := NewDecoder([]Tag{words}, 0); err == nil || !strings.Contains(err.Error(), "without a value pointer") {
		t.Errorf("words with a stamp and no pointer: %v", err)
	}
}
