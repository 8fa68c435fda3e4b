package ingest

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/signal"
	"heatreeve/thermo/unit"
)

// badKind is a kind of malformed or hostile payload, or one that says that its value is
// not good; make gives one of it. It is refused, under want, or where mark is set it is
// accepted with that.
type badKind struct {
	name string
	tag  func() Tag
	want Reason
	mark quality.Mark
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

// saying is celsius with a quality at /q.
func saying(code QualityCode) func() Tag {
	return func() Tag {
		tag := celsius()
		tag.Quality = &Quality{At: "/q", Code: code}
		if code == OwnWords {
			tag.Quality.Words = map[string]quality.Mark{"ok": quality.None, "held": quality.Doubted, "1": quality.None, "0": quality.Rejected, "false": quality.Rejected}
		}
		return tag
	}
}

// withQuality is a payload for it.
func withQuality(q string) func(*rand.Rand) string {
	return text(`{"v":60,"t":1774745940,"q":` + q + `}`)
}

// inUnit is celsius with the unit of the message at /u.
func inUnit() Tag {
	tag := celsius()
	u, err := unit.LookupAs("°C", unit.Temperature)
	if err != nil {
		panic(err)
	}
	tag.UnitAt, tag.Unit = "/u", u
	return tag
}

func withUnit(u string) func(*rand.Rand) string { return text(`{"v":60,"t":1774745940,"u":` + u + `}`) }

// looped is a temperature of 0 to 200 °C by a current, and platinum one by a Pt100.
func looped() Tag {
	tag := celsius()
	tag.Signal = signal.Current{Lo: 273.15, Hi: 473.15}
	return tag
}

func platinum() Tag {
	tag := celsius()
	tag.Signal = signal.Resistance{R0: 100}
	return tag
}

// sampled is celsius with a list of samples at /s, and stepped one of bare numbers, a
// second apart.
func sampled() Tag {
	tag := celsius()
	tag.Samples = &Samples{At: "/s"}
	return tag
}

func stepped() Tag {
	tag := sampled()
	tag.Value, tag.Samples.Step = "", time.Second
	return tag
}

var badKinds = []badKind{
	{"no bytes", bare, Empty, 0, text("")},
	{"blanks", celsius, Empty, 0, text(" \r\n\t")},
	{"too long number", bare, TooLarge, 0, func(r *rand.Rand) string { return strings.Repeat("1", MaxPayload+1+r.IntN(100)) }},
	{"too long object", celsius, TooLarge, 0, text(`{"x":"` + strings.Repeat("x", MaxPayload) + `","v":60,"t":1774745940}`)},
	{"decimal comma", bare, NotANumber, 0, func(r *rand.Rand) string { return fmt.Sprintf("%d,%d", r.IntN(99), r.IntN(9)) }},
	{"with unit", bare, NotANumber, 0, func(r *rand.Rand) string { return fmt.Sprintf("%d m3/h", r.IntN(99)) }},
	{"word", bare, NotANumber, 0, text("offline")},
	{"hexadecimal", bare, NotANumber, 0, text("0x1F")},
	{"digit groups", bare, NotANumber, 0, text("1_000")},
	{"two points", bare, NotANumber, 0, text("1.2.3")},
	{"sign alone", bare, NotANumber, 0, text("-")},
	{"exponent alone", bare, NotANumber, 0, text("1e+")},
	{"binary", bare, NotANumber, 0, func(r *rand.Rand) string {
		b := []byte{0, 0xff, 0x41, byte(r.Uint32()), byte(r.Uint32())}
		return string(b)
	}},
	{"NaN", bare, NotFinite, 0, text("NaN")},
	{"minus infinity", bare, NotFinite, 0, text("-Infinity")},
	{"inf", bare, NotFinite, 0, text("inf")},
	{"old library's NaN", bare, NotFinite, 0, text("1.#QNAN")},
	{"beyond float64", bare, NotFinite, 0, text("1e999")},
	{"beyond float64 in JSON", celsius, NotFinite, 0, text(`{"v":-1e999,"t":1774745940}`)},
	{"NaN in JSON", celsius, NotFinite, 0, text(`{"v":NaN,"t":1774745940}`)},
	{"infinity in JSON", celsius, NotFinite, 0, text(`{"v": -Infinity ,"t":1774745940}`)},
	{"bare text", bare, WrongType, 0, text(`"12.4"`)},
	{"bare true", bare, WrongType, 0, text("true")},
	{"object instead of number", bare, WrongType, 0, text(`{"v":60}`)},
	{"text value", celsius, WrongType, 0, text(`{"v":"60","t":1774745940}`)},
	{"true value", celsius, WrongType, 0, text(`{"v":true,"t":1774745940}`)},
	{"list value", celsius, WrongType, 0, text(`{"v":[60],"t":1774745940}`)},
	{"object value", celsius, WrongType, 0, text(`{"v":{"x":60},"t":1774745940}`)},
	{"no value", celsius, ValueMissing, 0, text(`{"V":60,"t":1774745940}`)},
	{"number instead of object", celsius, ValueMissing, 0, text("60")},
	{"list instead of object", celsius, ValueMissing, 0, text(`[60, 1774745940]`)},
	{"not JSON", celsius, NotJSON, 0, text("v=60")},
	{"two values", celsius, NotJSON, 0, text(`{"v":60,"t":1774745940}{"v":61}`)},
	{"name twice", celsius, NotJSON, 0, text(`{"v":60,"t":1774745940,"v":61}`)},
	{"decimal comma in JSON", celsius, NotJSON, 0, text(`{"v":60,5,"t":1774745940}`)},
	{"not UTF-8", celsius, NotJSON, 0, text("{\"v\":60,\"t\":1774745940,\"n\":\"\xff\"}")},
	{"byte order mark", celsius, NotJSON, 0, text("\ufeff{\"v\":60,\"t\":1774745940}")},
	{"too deep", celsius, NotJSON, 0, text(strings.Repeat("[", 20000))},
	{"comment", celsius, NotJSON, 0, text(`{"v":60,/*s*/"t":1774745940}`)},
	{"truncated", celsius, Truncated, 0, func(r *rand.Rand) string {
		whole := `{"t":1774745940,"v":60.25}`
		return whole[:1+r.IntN(len(whole)-1)]
	}},
	{"no stamp", celsius, TimeMissing, 0, text(`{"v":60}`)},
	{"null stamp", celsius, TimeMissing, 0, atTime("null")},
	{"false stamp", celsius, TimeWrong, 0, atTime("false")},
	{"number as text", celsius, TimeWrong, 0, atTime(`"1774745940"`)},
	{"day first", celsius, TimeWrong, 0, atTime(`"29.03.2026 00:59:00"`)},
	{"no zone", celsius, TimeWrong, 0, atTime(`"2026-03-29T00:59:00"`)},
	{"no such day", celsius, TimeWrong, 0, atTime(`"2026-02-29T00:59:00Z"`)},
	{"leap second", celsius, TimeWrong, 0, atTime(`"2016-12-31T23:59:60Z"`)},
	{"year 9999", celsius, TimeWrong, 0, atTime(`"9999-12-31T23:59:59Z"`)},
	{"long stamp", celsius, TimeWrong, 0, atTime(`"2026-03-29T00:59:00.` + strings.Repeat("0", 99) + `Z"`)},
	{"nanoseconds", celsius, TimeWrong, 0, atTime("1774745940000000000")},
	{"endless stamp", celsius, TimeWrong, 0, atTime("1e999")},
	{"number where RFC 3339 is asked for", timed(TimeRFC3339), TimeWrong, 0, atTime("1774745940")},
	{"text where seconds are asked for", timed(TimeSeconds), TimeWrong, 0, atTime(`"2026-03-29T00:59:00Z"`)},
	{"microseconds where seconds are asked for", timed(TimeSeconds), TimeWrong, 0, atTime("1774745940123456")},
	{"far future in seconds", timed(TimeSeconds), Ahead, 0, atTime("9000000000")},
	{"seconds where milliseconds are asked for", timed(TimeMillis), UnsetClock, 0, atTime("1774745940")},
	{"list as a stamp", celsius, TimeWrong, 0, atTime("[1774745940]")},
	{"1970", celsius, UnsetClock, 0, func(r *rand.Rand) string { return atTime(fmt.Sprint(r.IntN(1e6)))(r) }},
	{"before 1970", celsius, UnsetClock, 0, atTime("-1")},
	{"1970 as text", celsius, UnsetClock, 0, atTime(`"1970-01-01T00:00:12Z"`)},
	{"last second of 1999", celsius, UnsetClock, 0, atTime(`946684799.999999999`)},
	{"future", celsius, Ahead, 0, func(r *rand.Rand) string { return atTime(fmt.Sprint(1774746001 + r.IntN(1e6)))(r) }},
	{"future by 1 ns", celsius, Ahead, 0, atTime("1774746000.000000001")},
	{"future as text", celsius, Ahead, 0, atTime(`"2027-01-01T00:00:00Z"`)},
	{"below range", celsius, OutOfRange, 0, text(`{"v":-51,"t":1774745940}`)},
	{"above range", celsius, OutOfRange, 0, func(r *rand.Rand) string { return fmt.Sprintf(`{"v":%d,"t":1774745940}`, 251+r.IntN(9999)) }},
	{"bare null", bare, 0, quality.NoValue, text(" null\n")},
	{"null value", celsius, 0, quality.NoValue, text(`{"v":null,"t":1774745940}`)},
	{"null value without a stamp", celsius, TimeMissing, 0, text(`{"v":null}`)},
	{"null in capitals", celsius, NotJSON, 0, text(`{"v":NULL,"t":1774745940}`)},

	{"status code bad", saying(OPCUA), 0, quality.Rejected, withQuality("2147483648")},
	{"status code of a broken sensor", saying(OPCUA), 0, quality.Failed, withQuality("2156658688")}, // 0x808C0000
	{"status code of a lost link", saying(OPCUA), 0, quality.Offline, withQuality(`"0x80310000"`)},
	{"status code uncertain, with limit bits", saying(OPCUA), 0, quality.LastUsable, withQuality("1083180288")}, // 0x40900500
	{"status code good, at its high limit", saying(OPCUA), 0, quality.Limited, withQuality("1536")},             // 0x0600
	{"status code of severity 3", saying(OPCUA), UnknownQuality, 0, withQuality("3221225472")},
	{"status code beyond 32 bits", saying(OPCUA), UnknownQuality, 0, withQuality("4294967296")},
	{"negative status code", saying(OPCUA), UnknownQuality, 0, withQuality("-2147483648")},
	{"status code with a fraction", saying(OPCUA), UnknownQuality, 0, withQuality("0.5")},
	{"status code with an exponent", saying(OPCUA), UnknownQuality, 0, withQuality("0e1")},
	{"status code in bad hexadecimal", saying(OPCUA), UnknownQuality, 0, withQuality(`"0x80_05_0000"`)},
	{"status name", saying(OPCUA), 0, quality.OutOfService, withQuality(`"BadOutOfService"`)},
	{"status name with an escape", saying(OPCUA), 0, quality.Failed, withQuality(`"\u0042adSensorFailure"`)},
	{"status name not known here", saying(OPCUA), 0, quality.Doubted, withQuality(`"UncertainDependentValueChanged"`)},
	{"word that begins like a status", saying(OPCUA), UnknownQuality, 0, withQuality(`"Goodness"`)},
	{"status name in another case", saying(OPCUA), UnknownQuality, 0, withQuality(`"BAD"`)},
	{"empty status", saying(OPCUA), UnknownQuality, 0, withQuality(`""`)},
	{"status as an object", saying(OPCUA), UnknownQuality, 0, withQuality(`{"Code":0}`)},
	{"status as a list", saying(OPCUA), UnknownQuality, 0, withQuality(`[0]`)},
	{"status as a switch", saying(OPCUA), UnknownQuality, 0, withQuality(`true`)},
	{"no status", saying(OPCUA), UnknownQuality, 0, text(`{"v":60,"t":1774745940}`)},
	{"null status", saying(OPCUA), UnknownQuality, 0, withQuality("null")},
	{"bad status of a text", saying(OPCUA), 0, quality.Failed, text(`{"v":"---","t":1774745940,"q":"BadSensorFailure"}`)},
	{"bad status of no value", saying(OPCUA), 0, quality.Failed, text(`{"t":1774745940,"q":"BadSensorFailure"}`)},
	{"bad status beyond the range", saying(OPCUA), 0, quality.Failed, text(`{"v":1e9,"t":1774745940,"q":"BadDeviceFailure"}`)},
	{"bad status beyond float64", saying(OPCUA), 0, quality.Failed, text(`{"v":1e999,"t":1774745940,"q":"BadDeviceFailure"}`)},
	{"bad status without a stamp", saying(OPCUA), TimeMissing, 0, text(`{"v":60,"q":"Bad"}`)},
	{"bad status in the future", saying(OPCUA), Ahead, 0, text(`{"v":60,"t":1874745940,"q":"Bad"}`)},
	{"uncertain status of null", saying(OPCUA), 0, quality.NoValue, text(`{"v":null,"t":1774745940,"q":"Uncertain"}`)},
	{"uncertain status beyond the range", saying(OPCUA), OutOfRange, 0, text(`{"v":1e9,"t":1774745940,"q":"Uncertain"}`)},
	{"good status of a text", saying(OPCUA), WrongType, 0, text(`{"v":"---","t":1774745940,"q":0}`)},
	{"letter F", saying(NE107), 0, quality.Failed, withQuality(`"F"`)},
	{"letter C", saying(NE107), 0, quality.FunctionCheck, withQuality(`"c"`)},
	{"letter S", saying(NE107), 0, quality.OffSpec, withQuality(`"S"`)},
	{"letter M", saying(NE107), 0, quality.Maintenance, withQuality(`"M"`)},
	{"device health by name", saying(NE107), 0, quality.OffSpec, withQuality(`"OFF_SPEC"`)},
	{"letter X", saying(NE107), UnknownQuality, 0, withQuality(`"X"`)},
	{"letter as a number", saying(NE107), UnknownQuality, 0, withQuality(`70`)},
	{"gateway's 0", saying(Sparkplug), 0, quality.Rejected, withQuality("0")},
	{"gateway's 500", saying(Sparkplug), 0, quality.StaleAtSource, withQuality("500")},
	{"gateway's 64", saying(Sparkplug), UnknownQuality, 0, withQuality("64")},
	{"gateway's number with a point", saying(Sparkplug), UnknownQuality, 0, withQuality("192.0")},
	{"own word", saying(OwnWords), 0, quality.Doubted, withQuality(`"held"`)},
	{"own number, written otherwise", saying(OwnWords), 0, quality.Rejected, withQuality("0.0")},
	{"own switch", saying(OwnWords), 0, quality.Rejected, withQuality("false")},
	{"number as an own word in quotes", saying(OwnWords), 0, quality.Rejected, withQuality(`"0"`)},
	{"no own word", saying(OwnWords), UnknownQuality, 0, withQuality(`"OK"`)},
	{"no own number", saying(OwnWords), UnknownQuality, 0, withQuality("2")},

	{"another unit", inUnit, UnitMismatch, 0, withUnit(`"°F"`)},
	{"absolute scale", inUnit, UnitMismatch, 0, withUnit(`"K"`)},
	{"unit of another kind", inUnit, UnitMismatch, 0, withUnit(`"bar"`)},
	{"no such unit", inUnit, UnitMismatch, 0, withUnit(`"warm"`)},
	{"unit in another case", inUnit, UnitMismatch, 0, withUnit(`"c"`)},
	{"empty unit", inUnit, UnitMismatch, 0, withUnit(`""`)},
	{"endless unit", inUnit, UnitMismatch, 0, withUnit(`"` + strings.Repeat("°C", 20000) + `"`)},
	{"no unit", inUnit, UnitMismatch, 0, text(`{"v":60,"t":1774745940}`)},
	{"null unit", inUnit, UnitMismatch, 0, withUnit("null")},
	{"number as a unit", inUnit, UnitMismatch, 0, withUnit("1")},
	{"object as a unit", inUnit, UnitMismatch, 0, withUnit(`{"°C":1}`)},
	{"null in another unit", inUnit, 0, quality.NoValue, text(`{"v":null,"t":1774745940,"u":"°F"}`)},

	{"current of a broken wire", looped, 0, quality.Failed, text(`{"v":0,"t":1774745940}`)},
	{"failure current", looped, 0, quality.Failed, text(`{"v":3.59,"t":1774745940}`)},
	{"failure current, high", looped, 0, quality.Failed, text(`{"v":21.5,"t":1774745940}`)},
	{"negative current", looped, 0, quality.Failed, text(`{"v":-4,"t":1774745940}`)},
	{"endless current", looped, NotFinite, 0, text(`{"v":1e999,"t":1774745940}`)},
	{"current as text", looped, WrongType, 0, text(`{"v":"8.8","t":1774745940}`)},
	{"no current", looped, 0, quality.NoValue, text(`{"v":null,"t":1774745940}`)},
	{"failure current of yesteryear", looped, UnsetClock, 0, text(`{"v":3.5,"t":17}`)},
	{"open thermometer", platinum, 0, quality.Failed, text(`{"v":99999,"t":1774745940}`)},
	{"shorted thermometer", platinum, 0, quality.Failed, text(`{"v":0.3,"t":1774745940}`)},
	{"resistance beyond the range", platinum, OutOfRange, 0, text(`{"v":300,"t":1774745940}`)},
	{"no list of samples", sampled, ValueMissing, 0, text(`{"v":60,"t":1774745940}`)},
	{"null list", sampled, WrongType, 0, text(`{"s":null}`)},
	{"object for a list", sampled, WrongType, 0, text(`{"s":{"v":60,"t":1774745940}}`)},
	{"number for a list", sampled, WrongType, 0, text(`{"s":60}`)},
	{"empty list", sampled, Empty, 0, text(`{"s":[]}`)},
	{"list of lists", sampled, ValueMissing, 0, text(`{"s":[[60,1774745940]]}`)},
	{"sample without a stamp", sampled, TimeMissing, 0, text(`{"s":[{"v":60}],"t":1774745940}`)},
	{"sample of text", sampled, WrongType, 0, text(`{"s":[{"v":"60","t":1774745940}]}`)},
	{"sample of null", sampled, 0, quality.NoValue, text(`{"s":[{"v":null,"t":1774745940}]}`)},
	{"sample from tomorrow", sampled, Ahead, 0, text(`{"s":[{"v":60,"t":1774832340}]}`)},
	{"list that ends too early", sampled, Truncated, 0, text(`{"s":[{"v":60,"t":1774745940},`)},
	{"list with a comma too many", sampled, NotJSON, 0, text(`{"s":[{"v":60,"t":1774745940},]}`)},
	{"list with a name twice", sampled, NotJSON, 0, text(`{"s":[{"v":60,"t":1774745940,"v":61}]}`)},
	{"list twice", sampled, NotJSON, 0, text(`{"s":[{"v":60,"t":1774745940}],"s":[]}`)},
	{"too many samples", sampled, TooMany, 0, text(`{"s":[` + strings.Repeat("0,", MaxSamples) + `0]}`)},
	{"too many samples, and broken", sampled, Truncated, 0, text(`{"s":[` + strings.Repeat("0,", MaxSamples) + `0`)},
	{"too deep a list", sampled, NotJSON, 0, text(`{"s":` + strings.Repeat("[", 20000))},
	{"step without a start", stepped, TimeMissing, 0, text(`{"s":[60]}`)},
	{"step from a wrong start", stepped, TimeWrong, 0, text(`{"s":[60],"t":"noon"}`)},
	{"step from 1970", stepped, UnsetClock, 0, text(`{"s":[60],"t":0}`)},
	{"step of nothing", stepped, 0, quality.NoValue, text(`{"s":[null],"t":1774745940}`)},
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
		if len(out) != 1 {
			t.Fatalf("%s: payload %.200q gave %+v; want one outcome", kind.name, payload, out)
		}
		o := out[0]
		if kind.mark != 0 {
			if o.Refusal != nil || o.Mark != kind.mark || kind.mark.Quality() < quality.Bad && o.Value != 333.15 || math.IsInf(o.Value, 0) {
				t.Errorf("%s: payload %.200q: %+v, %v; want the mark %v", kind.name, payload, o.Reading, o.Refusal, kind.mark)
			}
			continue
		}
		if o.Refusal == nil {
			t.Fatalf("%s: payload %.200q was not refused: %+v", kind.name, payload, o.Reading)
		}
		if o.Refusal.Reason != kind.want {
			t.Errorf("%s: payload %.200q: %v; want %v", kind.name, payload, o.Refusal.Reason, kind.want)
		}
		if text := o.Refusal.Error(); !strings.HasPrefix(text, "tag "+fmt.Sprintf("%q", kind.tag().Name)) || len(text) > 700 {
			t.Errorf("%s: message %q; want it to begin with the tag and to be short", kind.name, text)
		}
		got[o.Refusal.Reason]++
		want[kind.want]++
	}
	if got != want {
		t.Errorf("counts %v, want %v", got, want)
	}
	if len(badKinds) < 60 {
		t.Errorf("only %d kinds", len(badKinds))
	}
}
