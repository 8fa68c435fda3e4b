package ingest

import (
	"fmt"
	"math"
	"testing"
	"time"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"

	"google.golang.org/protobuf/encoding/protowire"
)

// holding is a tag of which a value holds until another comes.
func holding(t Tag) Tag {
	t.Holds = true
	t.Min, t.Max = 0, 400
	return t
}

// A value that is refused is not the one before: where that would hold on, a bad reading ends it,
// beside the refusal, from when the new one came. A message without a value, or of an unknown
// time, ends nothing.
func TestRefusedValueEndsTheOneBefore(t *testing.T) {
	const sec = int64(time.Second)
	now := time.Date(2026, 3, 29, 8, 0, 0, 0, time.UTC).UnixNano()
	bare := holding(number("t"))
	stamped := holding(Tag{Name: "t", Topic: "t", Value: "/v", Time: "/t", Scale: 1, Quality: &Quality{At: "/q", Code: OPCUA, AbsentIsGood: true}})
	at := now - 5*sec
	body := func(rest string) string { return fmt.Sprintf(`{"t":%d%s}`, at/sec, rest) }
	for _, tt := range []struct {
		name    string
		tag     Tag
		payload string
		reason  Reason
		at      int64 // 0: nothing ends
	}{
		{"beyond the range", bare, "401", OutOfRange, now},
		{"NaN", bare, "NaN", NotFinite, now},
		{"text", bare, "---", NotANumber, now},
		{"empty", bare, "", Empty, 0},
		{"stamped, beyond the range", stamped, body(`,"v":401`), OutOfRange, at},
		{"stamped text", stamped, body(`,"v":"---"`), WrongType, at},
		{"stamped, of an unknown quality", stamped, body(`,"v":60,"q":"?"`), UnknownQuality, at},
		{"without a value", stamped, body(``), ValueMissing, 0},
		{"text without a stamp", stamped, `{"v":"---"}`, WrongType, 0},
		{"text in the future", stamped, fmt.Sprintf(`{"t":%d,"v":"---"}`, now/sec+3600), WrongType, 0},
		{"no JSON", stamped, "{", Truncated, 0},
	} {
		for _, holds := range []bool{true, false} {
			tag := tt.tag
			tag.Holds = holds
			d, err := NewDecoder([]Tag{tag}, 0)
			if err != nil {
				t.Fatal(err)
			}
			out, _ := d.Decode(tag.Topic, []byte(tt.payload), now, false, nil)
			if len(out) != 1 || out[0].Refusal == nil || out[0].Refusal.Reason != tt.reason {
				t.Fatalf("%s: %+v", tt.name, out)
			}
			checkVoid(t, fmt.Sprintf("%s, holds %v", tt.name, holds), &out[0], holds && tt.at != 0, tt.at)
		}
	}
}

func checkVoid(t *testing.T, name string, o *Outcome, void bool, at int64) {
	t.Helper()
	if o.Void != void || o.kept() != void || void && (o.At != at || o.Mark != quality.Refused || !math.IsNaN(o.Value)) {
		t.Errorf("%s: %+v; want void %v, from %d on", name, o, void, at)
	}
}

// So is one that the broker had kept and that has no stamp, of which nobody knows when it was sent.
func TestKeptMessageEndsNothing(t *testing.T) {
	tag := holding(number("t"))
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := d.Decode(tag.Topic, []byte("401"), time.Now().UnixNano(), true, nil)
	checkVoid(t, "kept", &out[0], false, 0)
}

// Of a list, what ends is what came before the sample that is refused.
func TestRefusedSampleEndsTheOneBefore(t *testing.T) {
	now := time.Date(2026, 3, 29, 8, 0, 0, 0, time.UTC).UnixNano()
	tag := holding(Tag{Name: "t", Topic: "t", Scale: 1, Time: "/first", TimeFormat: TimeMillis, Samples: &Samples{At: "/l", Step: time.Second}})
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	first := now - int64(10*time.Second)
	out, _ := d.Decode(tag.Topic, fmt.Appendf(nil, `{"first":%d,"l":[60,401,402,61]}`, first/1e6), now, false, nil)
	if len(out) != 4 || out[0].Refusal != nil || out[3].Refusal != nil {
		t.Fatalf("%+v", out)
	}
	for i := 1; i <= 2; i++ {
		checkVoid(t, fmt.Sprint("sample ", i), &out[i], true, first+int64(i)*int64(time.Second))
	}
}

// flowSays is a Sparkplug payload in which the metric "flow" has a field.
func flowSays(field []byte) []byte {
	m := protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), "flow")
	return protowire.AppendBytes(protowire.AppendTag(nil, 2, protowire.BytesType), append(m, field...))
}

func doubleOf(x float64) []byte {
	return protowire.AppendFixed64(protowire.AppendTag(nil, 13, protowire.Fixed64Type), math.Float64bits(x))
}

func varintOf(num protowire.Number, v uint64) []byte {
	return protowire.AppendVarint(protowire.AppendTag(nil, num, protowire.VarintType), v)
}

// A Sparkplug metric reports on change.
func TestRefusedMetricEndsTheOneBefore(t *testing.T) {
	for _, tt := range []struct {
		name    string
		payload []byte
		void    bool
	}{
		{"beyond the range", flowSays(doubleOf(-1)), true},
		{"NaN", flowSays(doubleOf(math.NaN())), true},
		{"text", flowSays(protowire.AppendString(protowire.AppendTag(nil, 15, protowire.BytesType), "2.5")), true},
		{"no value", flowSays(nil), false},
		{"an hour ahead", flowSays(append(varintOf(3, uint64(millis+3600_000)), doubleOf(math.NaN())...)), false},
		{"transient", flowSays(append(varintOf(6, 1), doubleOf(1)...)), false},
	} {
		tag := metric("flow")
		tag.Holds = true
		d, err := NewDecoder([]Tag{tag}, 0)
		if err != nil {
			t.Fatal(err)
		}
		d.Decode(works.Topic(sparkplug.NBirth), unhex(t, birthHex), millis*1e6, false, nil)
		out, _ := d.Decode(works.Topic(sparkplug.NData), tt.payload, millis*1e6, false, nil)
		if len(out) != 1 || out[0].Refusal == nil {
			t.Fatalf("%s: %+v", tt.name, out)
		}
		checkVoid(t, tt.name, &out[0], tt.void, out[0].At)
		if tt.void && out[0].At < millis*1e6-int64(time.Minute) {
			t.Errorf("%s: from %d on", tt.name, out[0].At)
		}
	}
}

// The session passes it on and counts it as refused alone.
func TestVoidIsPassedOn(t *testing.T) {
	tag := holding(number("t"))
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := d.Decode(tag.Topic, []byte("401"), time.Now().UnixNano(), false, nil)
	b, counts := newInbox(10, time.Second), newTally(1)
	first := counts.count(0, out)
	if stored := b.put(t.Context(), nil, out); !stored || len(first) != 1 {
		t.Errorf("stored %v, told %v", stored, first)
	}
	got, _ := b.take(nil)
	if len(got) != 1 || got[0].Mark != quality.Refused {
		t.Errorf("passed on %+v", got)
	}
	if s := counts.copy(); s.Tags[0].Accepted != 0 || s.Tags[0].Refused[OutOfRange] != 1 {
		t.Errorf("%+v", s.Tags[0])
	}
}
