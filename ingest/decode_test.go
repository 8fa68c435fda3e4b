package ingest

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"
	"time"
)

// arrival of the test messages: 2026-03-29T00:59:30Z, half a minute before
// summer time begins in Europe.
var arrival = time.Date(2026, 3, 29, 0, 59, 30, 0, time.UTC).UnixNano()

// celsius is a temperature tag with value and time, as most are.
func celsius() Tag {
	return Tag{Name: "TT-1", Topic: "plant/TT-1", Value: "/v", Time: "/t", Scale: 1, Offset: 273.15,
		Min: 223.15, Max: 523.15, QoS: 1}
}

// bare is a flow tag whose payload is the number alone, in m³/h.
func bare() Tag {
	return Tag{Name: "FT-1", Topic: "plant/FT-1", Scale: 1. / 3600, Min: math.Inf(-1), Max: math.Inf(1), QoS: 1}
}

func decodeOne(t testing.TB, tag Tag, payload string, retained bool) Outcome {
	t.Helper()
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, known := d.Decode(tag.Topic, []byte(payload), arrival, retained, nil)
	if !known || len(out) != 1 {
		t.Fatalf("Decode(%q) = %v, %v; want one outcome", payload, out, known)
	}
	return out[0]
}

func TestValues(t *testing.T) {
	pointer := func(value string) Tag {
		tag := bare()
		tag.Scale, tag.Value = 1, value
		return tag
	}
	plain := pointer("")
	for _, tt := range []struct {
		tag     Tag
		payload string
		want    float64
	}{
		{plain, "12.4", 12.4}, {plain, " -3 \r\n", -3}, {plain, "1e3", 1000}, {plain, "+05.20", 5.2},
		{plain, ".5", 0.5}, {plain, "5.", 5}, {plain, "-0", 0}, {plain, "1e-999", 0},
		{plain, "3.4028234663852886e38", math.MaxFloat32},
		{pointer("/v"), `{"v":12.4}`, 12.4},
		{pointer("/v"), ` { "w" : [1,{"v":2}] , "v" : -1.5E+1 } `, -15},
		{pointer("/v"), `{"\u0076":7}`, 7},
		{pointer("/1/v"), `[{"v":1},{"v":2},{"v":3}]`, 2},
		{pointer("/a/b/c"), `{"a":{"x":0,"b":{"c":9,"d":1}}}`, 9},
		{pointer("/°C"), `{"°C":21.5}`, 21.5},
	} {
		o := decodeOne(t, tt.tag, tt.payload, false)
		if o.Refusal != nil || o.Value != tt.want || o.At != arrival || o.Stamped {
			t.Errorf("%q at %q: %+v, %v; want %v at arrival", tt.payload, tt.tag.Value, o.Reading, o.Refusal, tt.want)
		}
	}
}

// The document and its pointers are the example of RFC 6901, section 5; its
// pointers to the whole and to the list lead to no number.
func TestPointersOfRFC6901(t *testing.T) {
	const document = `{"foo": ["bar", "baz"], "": 0, "a/b": 1, "c%d": 2, "e^f": 3, "g|h": 4, "i\\j": 5, "k\"l": 6, " ": 7, "m~n": 8}`
	for pointer, want := range map[string]float64{
		"/": 0, "/a~1b": 1, "/c%d": 2, "/e^f": 3, "/g|h": 4, `/i\j`: 5, `/k"l`: 6, "/ ": 7, "/m~0n": 8,
	} {
		tag := bare()
		tag.Scale, tag.Value = 1, pointer
		if o := decodeOne(t, tag, document, false); o.Refusal != nil || o.Value != want {
			t.Errorf("pointer %q: %v, %v; want %v", pointer, o.Value, o.Refusal, want)
		}
	}
	for pointer, want := range map[string]Reason{
		"/foo": WrongType, "/foo/0": WrongType, "/foo/2": ValueMissing, "/foo/-": ValueMissing, "/foo/00": ValueMissing,
	} {
		tag := bare()
		tag.Value = pointer
		if o := decodeOne(t, tag, document, false); o.Refusal == nil || o.Refusal.Reason != want {
			t.Errorf("pointer %q: %v; want %v", pointer, o.Refusal, want)
		}
	}
}

func TestUnits(t *testing.T) {
	if o := decodeOne(t, bare(), "7.2", false); !(math.Abs(o.Value-0.002) <= 1e-18) {
		t.Errorf("7.2 m³/h = %v m³/s, want 0.002", o.Value)
	}
	if o := decodeOne(t, celsius(), `{"v":60,"t":1774745970}`, false); o.Value != 333.15 {
		t.Errorf("60 °C = %v K, want 333.15", o.Value)
	}
}

func TestStamps(t *testing.T) {
	second := time.Date(2026, 3, 29, 0, 59, 0, 0, time.UTC)
	for _, tt := range []struct {
		format, stamp string
		after         time.Duration // second
	}{
		{TimeAny, "1774745940", 0},
		{TimeAny, "1774745940.5", 500 * time.Millisecond},
		{TimeAny, "1774745940.123456789", 123456789},
		{TimeAny, "1774745940.1234567899", 123456789},
		{TimeAny, "1774745940123", 123 * time.Millisecond},
		{TimeAny, "1774745940123.25", 123250 * time.Microsecond},
		{TimeAny, "1774745940123456", 123456 * time.Microsecond},
		{TimeAny, "1774745940123456.789", 123456789},
		{TimeAny, "1.77474594e9", 0},
		{TimeAny, "1.774745940123e12", 123 * time.Millisecond},
		{TimeSeconds, "1774745941", time.Second},
		{TimeMillis, "1774745941000", time.Second},
		{TimeMicros, "1774745941000000", time.Second},
		{TimeAny, `"2026-03-29T00:59:00Z"`, 0},
		{TimeRFC3339, `"2026-03-29T00:59:00.25Z"`, 250 * time.Millisecond},
		{TimeRFC3339, `"2026-03-29T01:59:00+01:00"`, 0},
		{TimeRFC3339, `"2026-03-28T19:29:00-05:30"`, 0},
		{TimeRFC3339, `"2026-03-29t00:59:00z"`, 0},
		{TimeRFC3339, `"2026-03-29 00:59:00.123456789Z"`, 123456789},
		{TimeAny, "1774746000", time.Minute}, // 30 s ahead of the arrival: just allowed
		{TimeAny, "946684800", time.Unix(946684800, 0).Sub(second)},
	} {
		tag := celsius()
		tag.TimeFormat = tt.format
		o := decodeOne(t, tag, `{"t":`+tt.stamp+`,"v":60}`, false)
		if want := second.Add(tt.after).UnixNano(); o.Refusal != nil || o.At != want || !o.Stamped {
			t.Errorf("%s as %q: %d, %v; want %d", tt.stamp, tt.format, o.At, o.Refusal, want)
		}
	}
}

func TestRetained(t *testing.T) {
	o := decodeOne(t, celsius(), `{"t":1774745940,"v":60}`, true)
	if o.Refusal != nil {
		t.Errorf("retained with a stamp: %v; want accepted", o.Refusal)
	}
	o = decodeOne(t, bare(), "36", true)
	if o.Refusal == nil || o.Refusal.Reason != Retained || o.Value != 0.01 {
		t.Errorf("retained without a stamp: %v, %v; want the value 0.01 and %v", o.Value, o.Refusal, Retained)
	}
}

func TestRefusalText(t *testing.T) {
	o := decodeOne(t, bare(), "12,4", false)
	want := `tag "FT-1": payload "12,4" is not a number; the decimal separator must be a point`
	if got := o.Refusal.Error(); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	long := decodeOne(t, bare(), strings.Repeat("a", 95)+"°C", false).Refusal
	if !long.Cut || long.Payload != strings.Repeat("a", 95) {
		t.Errorf("long payload kept as %q, cut %v; want 95 letters, cut before the broken character", long.Payload, long.Cut)
	}
}

func TestManyTagsOneTopic(t *testing.T) {
	var tags []Tag
	for i, name := range []string{"supply", "return", "flow", "absent"} {
		tag := celsius()
		tag.Name, tag.Value = name, fmt.Sprintf("/points/%d/%s", i, name)
		tags = append(tags, tag)
	}
	number := celsius() // on the same topic, but it expects a bare number
	number.Name, number.Value, number.Time = "bare", "", ""
	tags = append(tags, number)
	d, err := NewDecoder(tags, 0)
	if err != nil {
		t.Fatal(err)
	}
	payload := []byte(`{"t":1774745940,"points":[{"supply":80},{"return":"x"},{"flow":1000},{"other":1}]}`)
	before := string(payload)
	out, known := d.Decode("plant/TT-1", payload, arrival, false, nil)
	if !known || len(out) != len(tags) {
		t.Fatalf("got %d outcomes, want %d", len(out), len(tags))
	}
	if out[0].Refusal != nil || out[0].Value != 353.15 {
		t.Errorf("supply: %+v, %v; want 353.15 K", out[0].Reading, out[0].Refusal)
	}
	for i, want := range map[int]Reason{1: WrongType, 2: OutOfRange, 3: ValueMissing, 4: WrongType} {
		if out[i].Tag != i || out[i].Refusal == nil || out[i].Refusal.Reason != want {
			t.Errorf("%s: %+v, %v; want %v", tags[i].Name, out[i].Reading, out[i].Refusal, want)
		}
	}
	if string(payload) != before {
		t.Error("the payload was changed")
	}
	if out, known := d.Decode("plant/other", payload, arrival, false, nil); known || len(out) != 0 {
		t.Errorf("unknown topic: %v, %v; want none", out, known)
	}
}

func TestWrongTags(t *testing.T) {
	wrong := []func(*Tag){
		func(t *Tag) { t.Name = "" },
		func(t *Tag) { t.Topic = "" },
		func(t *Tag) { t.Topic = "plant/+/v" },
		func(t *Tag) { t.Topic = "plant/\xff" },
		func(t *Tag) { t.Topic = "$share/a/plant" },
		func(t *Tag) { t.Topic = strings.Repeat("x", maxTopic+1) },
		func(t *Tag) { t.Value = "v" },
		func(t *Tag) { t.Value = "/~2" },
		func(t *Tag) { t.Time = "t" },
		func(t *Tag) { t.Value = "" },
		func(t *Tag) { t.TimeFormat = "minutes" },
		func(t *Tag) { t.Scale = 0 },
		func(t *Tag) { t.Offset = math.NaN() },
		func(t *Tag) { t.Min, t.Max = 1, 1 },
		func(t *Tag) { t.Max = math.NaN() },
		func(t *Tag) { t.QoS = 2 },
	}
	var all []Tag
	for i, spoil := range wrong {
		tag := celsius()
		spoil(&tag)
		all = append(all, tag)
		if _, err := NewDecoder([]Tag{tag}, 0); err == nil {
			t.Errorf("wrong tag %d was accepted: %+v", i, tag)
		}
	}
	_, err := NewDecoder(all, 0)
	var joined interface{ Unwrap() []error }
	if !errors.As(err, &joined) || len(joined.Unwrap()) != len(wrong) {
		t.Errorf("got %v; want %d faults at once", err, len(wrong))
	}
}

func TestReasons(t *testing.T) {
	seen := map[string]bool{}
	for _, r := range Reasons() {
		if name := r.String(); name == "" || seen[name] || strings.Trim(name, "abcdefghijklmnopqrstuvwxyz-") != "" {
			t.Errorf("reason %d: name %q is empty, taken or no label", r, name)
		}
		seen[r.String()] = true
	}
	if got := Reason(200).String(); got != "Reason(200)" {
		t.Errorf("unknown reason is %q", got)
	}
}

func TestAcceptedReadingsAllocateNothing(t *testing.T) {
	for name, c := range payloads() {
		d, err := NewDecoder(c.tags, 0)
		if err != nil {
			t.Fatal(err)
		}
		var out []Outcome
		n := testing.AllocsPerRun(100, func() { out, _ = d.Decode(c.tags[0].Topic, c.payload, arrival, false, out[:0]) })
		if n != 0 {
			t.Errorf("%s: %v allocations a message, want 0", name, n)
		}
		for _, o := range out {
			if o.Refusal != nil {
				t.Errorf("%s: %v", name, o.Refusal)
			}
		}
	}
}
