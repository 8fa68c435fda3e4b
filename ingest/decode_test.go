package ingest

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
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

// badKind is a kind of bad payload; make gives the i-th of it.
type badKind struct {
	name string
	tag  func() Tag
	want Reason
	make func(r *rand.Rand) string
}

func text(s string) func(*rand.Rand) string { return func(*rand.Rand) string { return s } }

func atTime(stamp string) func(*rand.Rand) string {
	return func(r *rand.Rand) string { return fmt.Sprintf(`{"v":%d,"t":%s}`, 20+r.IntN(60), stamp) }
}

func timed(format string) func() Tag {
	return func() Tag {
		tag := celsius()
		tag.TimeFormat = format
		return tag
	}
}

var badKinds = []badKind{
	{"no bytes", bare, Empty, text("")},
	{"blanks", celsius, Empty, text(" \r\n\t")},
	{"too long number", bare, TooLarge, func(r *rand.Rand) string { return strings.Repeat("1", MaxPayload+1+r.IntN(100)) }},
	{"too long object", celsius, TooLarge, text(`{"x":"` + strings.Repeat("x", MaxPayload) + `","v":60,"t":1774745940}`)},
	{"decimal comma", bare, NotANumber, func(r *rand.Rand) string { return fmt.Sprintf("%d,%d", r.IntN(99), r.IntN(9)) }},
	{"with unit", bare, NotANumber, func(r *rand.Rand) string { return fmt.Sprintf("%d m3/h", r.IntN(99)) }},
	{"word", bare, NotANumber, text("offline")},
	{"hexadecimal", bare, NotANumber, text("0x1F")},
	{"digit groups", bare, NotANumber, text("1_000")},
	{"two points", bare, NotANumber, text("1.2.3")},
	{"sign alone", bare, NotANumber, text("-")},
	{"exponent alone", bare, NotANumber, text("1e+")},
	{"binary", bare, NotANumber, func(r *rand.Rand) string {
		b := []byte{0, 0xff, 0x41, byte(r.Uint32()), byte(r.Uint32())}
		return string(b)
	}},
	{"NaN", bare, NotFinite, text("NaN")},
	{"minus infinity", bare, NotFinite, text("-Infinity")},
	{"inf", bare, NotFinite, text("inf")},
	{"old library's NaN", bare, NotFinite, text("1.#QNAN")},
	{"beyond float64", bare, NotFinite, text("1e999")},
	{"beyond float64 in JSON", celsius, NotFinite, text(`{"v":-1e999,"t":1774745940}`)},
	{"NaN in JSON", celsius, NotFinite, text(`{"v":NaN,"t":1774745940}`)},
	{"infinity in JSON", celsius, NotFinite, text(`{"v": -Infinity ,"t":1774745940}`)},
	{"bare null", bare, NullValue, text("null")},
	{"bare text", bare, WrongType, text(`"12.4"`)},
	{"bare true", bare, WrongType, text("true")},
	{"object instead of number", bare, WrongType, text(`{"v":60}`)},
	{"null value", celsius, NullValue, text(`{"v":null,"t":1774745940}`)},
	{"text value", celsius, WrongType, text(`{"v":"60","t":1774745940}`)},
	{"true value", celsius, WrongType, text(`{"v":true,"t":1774745940}`)},
	{"list value", celsius, WrongType, text(`{"v":[60],"t":1774745940}`)},
	{"object value", celsius, WrongType, text(`{"v":{"x":60},"t":1774745940}`)},
	{"no value", celsius, ValueMissing, text(`{"V":60,"t":1774745940}`)},
	{"number instead of object", celsius, ValueMissing, text("60")},
	{"list instead of object", celsius, ValueMissing, text(`[60, 1774745940]`)},
	{"not JSON", celsius, NotJSON, text("v=60")},
	{"two values", celsius, NotJSON, text(`{"v":60,"t":1774745940}{"v":61}`)},
	{"name twice", celsius, NotJSON, text(`{"v":60,"t":1774745940,"v":61}`)},
	{"decimal comma in JSON", celsius, NotJSON, text(`{"v":60,5,"t":1774745940}`)},
	{"not UTF-8", celsius, NotJSON, text("{\"v\":60,\"t\":1774745940,\"n\":\"\xff\"}")},
	{"byte order mark", celsius, NotJSON, text("\ufeff{\"v\":60,\"t\":1774745940}")},
	{"too deep", celsius, NotJSON, text(strings.Repeat("[", 20000))},
	{"comment", celsius, NotJSON, text(`{"v":60,/*s*/"t":1774745940}`)},
	{"truncated", celsius, Truncated, func(r *rand.Rand) string {
		whole := `{"t":1774745940,"v":60.25}`
		return whole[:1+r.IntN(len(whole)-1)]
	}},
	{"no stamp", celsius, TimeMissing, text(`{"v":60}`)},
	{"null stamp", celsius, TimeMissing, atTime("null")},
	{"false stamp", celsius, TimeWrong, atTime("false")},
	{"number as text", celsius, TimeWrong, atTime(`"1774745940"`)},
	{"day first", celsius, TimeWrong, atTime(`"29.03.2026 00:59:00"`)},
	{"no zone", celsius, TimeWrong, atTime(`"2026-03-29T00:59:00"`)},
	{"no such day", celsius, TimeWrong, atTime(`"2026-02-29T00:59:00Z"`)},
	{"leap second", celsius, TimeWrong, atTime(`"2016-12-31T23:59:60Z"`)},
	{"year 9999", celsius, TimeWrong, atTime(`"9999-12-31T23:59:59Z"`)},
	{"long stamp", celsius, TimeWrong, atTime(`"2026-03-29T00:59:00.` + strings.Repeat("0", 99) + `Z"`)},
	{"nanoseconds", celsius, TimeWrong, atTime("1774745940000000000")},
	{"endless stamp", celsius, TimeWrong, atTime("1e999")},
	{"number where RFC 3339 is asked for", timed(TimeRFC3339), TimeWrong, atTime("1774745940")},
	{"text where seconds are asked for", timed(TimeSeconds), TimeWrong, atTime(`"2026-03-29T00:59:00Z"`)},
	{"microseconds where seconds are asked for", timed(TimeSeconds), TimeWrong, atTime("1774745940123456")},
	{"far future in seconds", timed(TimeSeconds), Ahead, atTime("9000000000")},
	{"seconds where milliseconds are asked for", timed(TimeMillis), UnsetClock, atTime("1774745940")},
	{"list as a stamp", celsius, TimeWrong, atTime("[1774745940]")},
	{"1970", celsius, UnsetClock, func(r *rand.Rand) string { return atTime(fmt.Sprint(r.IntN(1e6)))(r) }},
	{"before 1970", celsius, UnsetClock, atTime("-1")},
	{"1970 as text", celsius, UnsetClock, atTime(`"1970-01-01T00:00:12Z"`)},
	{"last second of 1999", celsius, UnsetClock, atTime(`946684799.999999999`)},
	{"future", celsius, Ahead, func(r *rand.Rand) string { return atTime(fmt.Sprint(1774746001 + r.IntN(1e6)))(r) }},
	{"future by 1 ns", celsius, Ahead, atTime("1774746000.000000001")},
	{"future as text", celsius, Ahead, atTime(`"2027-01-01T00:00:00Z"`)},
	{"below range", celsius, OutOfRange, text(`{"v":-51,"t":1774745940}`)},
	{"above range", celsius, OutOfRange, func(r *rand.Rand) string { return fmt.Sprintf(`{"v":%d,"t":1774745940}`, 251+r.IntN(9999)) }},
}

func TestBadMessages(t *testing.T) {
	const messages = 1000
	decoders := make([]*Decoder, len(badKinds)) // each serves many messages
	for i, kind := range badKinds {
		var err error
		if decoders[i], err = NewDecoder([]Tag{kind.tag()}, 0); err != nil {
			t.Fatal(err)
		}
	}
	r := rand.New(rand.NewPCG(1, 2))
	var got, want Counts
	for i := range messages {
		kind := badKinds[i%len(badKinds)]
		payload := kind.make(r)
		out, _ := decoders[i%len(badKinds)].Decode(kind.tag().Topic, []byte(payload), arrival, false, nil)
		if len(out) != 1 || out[0].Refusal == nil {
			t.Fatalf("%s: payload %.200q was not refused: %+v", kind.name, payload, out)
		}
		refusal := out[0].Refusal
		if refusal.Reason != kind.want {
			t.Errorf("%s: payload %.200q: %v; want %v", kind.name, payload, refusal.Reason, kind.want)
		}
		if text := refusal.Error(); !strings.HasPrefix(text, "tag "+fmt.Sprintf("%q", kind.tag().Name)) || len(text) > 700 {
			t.Errorf("%s: message %q; want it to begin with the tag and to be short", kind.name, text)
		}
		got[refusal.Reason]++
		want[kind.want]++
	}
	if got != want || got.Total() != messages {
		t.Errorf("counts %v, want %v", got, want)
	}
	if len(badKinds) < 20 {
		t.Errorf("only %d kinds", len(badKinds))
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
