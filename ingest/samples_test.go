package ingest

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"heatreeve/ingest/quality"
)

// want is what a sample must have become.
type want struct {
	value  float64 // °C; NaN: none
	at     int64   // ns after 2026-03-29T00:59:00Z
	mark   quality.Mark
	reason Reason // 0, which is Empty, for none
}

func decodeAll(t *testing.T, tag Tag, payload string) []Outcome {
	t.Helper()
	d, err := NewDecoder([]Tag{tag}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := d.Decode(tag.Topic, []byte(payload), arrival, false, nil)
	again, _ := d.Decode(tag.Topic, []byte(payload), arrival, false, nil)
	if len(out) != len(again) {
		t.Fatalf("the same payload gave %d outcomes, and then %d", len(out), len(again))
	}
	return again
}

func compareSamples(t *testing.T, name string, out []Outcome, all []want) {
	t.Helper()
	if len(out) != len(all) {
		t.Fatalf("%s: %d outcomes, want %d: %+v", name, len(out), len(all), out)
	}
	minute := time.Date(2026, 3, 29, 0, 59, 0, 0, time.UTC).UnixNano()
	for i, w := range all {
		o := out[i]
		if w.reason != 0 {
			if o.Refusal == nil || o.Refusal.Reason != w.reason {
				t.Errorf("%s: sample %d: %+v, %v; want %v", name, i, o.Reading, o.Refusal, w.reason)
			}
			continue
		}
		same := o.Value == w.value+273.15 || math.IsNaN(o.Value) && math.IsNaN(w.value)
		if o.Refusal != nil || !same || o.At != minute+w.at || !o.Stamped || o.Mark != w.mark {
			t.Errorf("%s: sample %d: %+v, %v; want %+v", name, i, o.Reading, o.Refusal, w)
		}
	}
}

func TestSamples(t *testing.T) {
	const sec = int64(time.Second)
	none := math.NaN()
	pairs := sampled() // each sample is a list of stamp and value
	pairs.Samples.At, pairs.Value, pairs.Time = "", "/1", "/0"
	rated := sampled()
	rated.Quality = &Quality{At: "/q/code", Code: OPCUA, AbsentIsGood: true}
	nested := stepped()
	nested.Samples.At, nested.Value, nested.Time, nested.Samples.Step = "/a/0/b", "/x", "/a/1", 250*time.Millisecond
	for _, tt := range []struct {
		name    string
		tag     Tag
		payload string
		want    []want
	}{
		{"in order", sampled(), `{"s":[{"v":60,"t":1774745940},{"v":61,"t":1774745941}]}`, []want{{value: 60}, {value: 61, at: sec}}},
		{"out of order", sampled(), `{"s":[{"t":1774745941,"v":61},{"v":60,"t":1774745940}]}`, []want{{value: 61, at: sec}, {value: 60}}},
		{"with others", sampled(), `{"a":[[1]],"s":[{"v":60,"t":1774745940,"w":[{"v":1}]}],"z":{"s":[]}}`, []want{{value: 60}}},
		{"some refused", sampled(), `{"s":[{"v":60,"t":1774745940},{"v":"x","t":1774745941},{"v":999,"t":1774745941},7,null,{"v":62,"t":1774745942}]}`,
			[]want{{value: 60}, {reason: WrongType}, {reason: OutOfRange}, {reason: ValueMissing}, {reason: ValueMissing}, {value: 62, at: 2 * sec}}},
		{"an object where a member is not wanted again", sampled(), `{"s":[{"v":60,"t":1774745940},{"t":1774745941}]}`, []want{{value: 60}, {reason: ValueMissing}}},
		{"pairs", pairs, `[[1774745940,60],[1774745941.5,61]]`, []want{{value: 60}, {value: 61, at: sec * 3 / 2}}},
		{"with quality", rated, `{"s":[{"v":60,"t":1774745940},{"v":61,"t":1774745941,"q":{"code":1083179008}},{"v":62,"t":1774745942,"q":{"code":2147483648}},{"v":null,"t":1774745943},{"v":64,"t":1774745944,"q":{"code":"X"}}]}`,
			[]want{{value: 60}, {value: 61, at: sec, mark: quality.LastUsable}, {value: 62, at: 2 * sec, mark: quality.Rejected}, {value: none, at: 3 * sec, mark: quality.NoValue}, {reason: UnknownQuality}}},
		{"numbers", stepped(), `{"t":1774745940,"s":[60,61,null,"x",62]}`,
			[]want{{value: 60}, {value: 61, at: sec}, {value: none, at: 2 * sec, mark: quality.NoValue}, {reason: WrongType}, {value: 62, at: 4 * sec}}},
		{"start behind the list", stepped(), `{"s":[60,61],"t":1774745940}`, []want{{value: 60}, {value: 61, at: sec}}},
		{"numbers that run into the future", stepped(), `{"s":[60,61,62],"t":1774745999}`, []want{{value: 60, at: 59 * sec}, {value: 61, at: 60 * sec}, {reason: Ahead}}},
		{"deep", nested, `{"a":[{"b":[{"x":60},{"x":61}]},1774745940]}`, []want{{value: 60}, {value: 61, at: sec / 4}}},
	} {
		compareSamples(t, tt.name, decodeAll(t, tt.tag, tt.payload), tt.want)
	}
}

// One message with several lists and plain values, for tags that share some of them, each
// with quality and unit.
func TestManyTagsWithSamples(t *testing.T) {
	single, warm, cold, other := inUnit(), sampled(), sampled(), sampled()
	single.Value, single.Time = "/now/v", "/now/t"
	warm.Name, warm.Value = "warm", "/w"
	cold.Name, cold.Value, cold.Quality = "cold", "/c", &Quality{At: "/q", Code: NE107, AbsentIsGood: true}
	other.Name, other.Samples, other.UnitAt, other.Unit = "other", &Samples{At: "/o"}, "/u", single.Unit
	d, err := NewDecoder([]Tag{single, warm, cold, other}, 0)
	if err != nil {
		t.Fatal(err)
	}
	const payload = `{"o":[{"v":1,"t":1774745940}],"now":{"v":2,"t":1774745940},"s":[{"w":3,"c":4,"t":1774745940},{"w":5,"c":6,"q":"M","t":1774745940},{"c":7,"q":"F","t":1774745940}],"u":%q}`
	for unit, refused := range map[string]bool{"degC": false, "°C": false, "Celsius": false, "°F": true} {
		out, _ := d.Decode(single.Topic, fmt.Appendf(nil, payload, unit), arrival, false, nil)
		one, many := []want{{value: 2}}, []want{{value: 1}}
		if refused {
			one, many = []want{{reason: UnitMismatch}}, []want{{reason: UnitMismatch}}
		}
		if len(out) != 8 {
			t.Fatalf("%d outcomes, want 8", len(out))
		}
		compareSamples(t, "single in "+unit, out[:1], one)
		compareSamples(t, "warm", out[1:4], []want{{value: 3}, {value: 5}, {reason: ValueMissing}})
		compareSamples(t, "cold", out[4:7], []want{{value: 4}, {value: 6, mark: quality.Maintenance}, {value: 7, mark: quality.Failed}})
		compareSamples(t, "other in "+unit, out[7:], many)
	}
}

// A list as long as one may be is read whole, and refusals of the same kind share a text.
func TestLongList(t *testing.T) {
	out := decodeAll(t, stepped(), `{"t":1774744900,"s":[`+strings.Repeat("60,", MaxSamples-1)+`61]}`)
	if len(out) != MaxSamples || out[MaxSamples-1].Refusal != nil || out[MaxSamples-1].Value != 61+273.15 {
		t.Fatalf("%d outcomes, the last %+v", len(out), out[len(out)-1])
	}
	out = decodeAll(t, stepped(), `{"t":1774744900,"s":[`+strings.Repeat("[],", MaxSamples-1)+`61]}`)
	if len(out) != MaxSamples || out[0].Refusal == nil || out[0].Refusal != out[MaxSamples-2].Refusal || out[MaxSamples-1].Refusal != nil {
		t.Errorf("%d outcomes of samples that are lists; first %v", len(out), out[0].Refusal)
	}
}

func TestWrongSamples(t *testing.T) {
	inside := celsius()
	inside.Value = "/s/0/v"
	if _, err := NewDecoder([]Tag{sampled(), inside}, 0); err == nil || !strings.Contains(err.Error(), `"/s"`) {
		t.Errorf("a pointer into the list of another tag: %v", err)
	}
	for name, spoil := range map[string]func(*Tag){
		"no stamp":                 func(t *Tag) { t.Time = "" },
		"no value":                 func(t *Tag) { t.Value = "" },
		"step back":                func(t *Tag) { t.Samples.Step = -1 },
		"step of years":            func(t *Tag) { t.Samples.Step = 1000 * time.Hour },
		"no pointer":               func(t *Tag) { t.Samples.At = "s" },
		"heartbeat":                func(t *Tag) { t.Liveness = &Liveness{} },
		"quality of bare numbers":  func(t *Tag) { t.Value, t.Samples.Step, t.Quality = "", 1, &Quality{At: "/q", Code: NE107} },
		"quality without pointer":  func(t *Tag) { t.Quality = &Quality{Code: NE107} },
		"quality without code":     func(t *Tag) { t.Quality = &Quality{At: "/q"} },
		"quality of no code":       func(t *Tag) { t.Quality = &Quality{At: "/q", Code: 9} },
		"quality with two codes":   func(t *Tag) { t.Quality = &Quality{At: "/q", Code: NE107, Words: map[string]quality.Mark{"x": 0}} },
		"unit of nothing":          func(t *Tag) { t.UnitAt = "/u" },
		"quality of a bare number": func(t *Tag) { t.Samples, t.Value, t.Time, t.Quality = nil, "", "", &Quality{At: "/q", Code: NE107} },
	} {
		tag := sampled()
		spoil(&tag)
		if _, err := NewDecoder([]Tag{tag}, 0); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
}

// A message with samples is acknowledged when all of them are stored.
func TestSamplesAreAcknowledgedWhole(t *testing.T) {
	server, url := inProcess(t)
	s, _, _ := start(t, []Tag{sampled()}, Options{URL: url, Now: func() time.Time { return time.Unix(0, arrival) }})
	ready(t, s)
	payload := []byte(`{"s":[{"v":61,"t":1774745941},{"v":60,"t":1774745940},{"v":"x","t":1774745940}]}`)
	if err := server.Publish(sampled().Topic, payload, false, 1); err != nil {
		t.Fatal(err)
	}
	batch := collect(t, s, 2)
	if len(batch) != 2 || s.Waiting() != 1 {
		t.Fatalf("%d readings, %d messages waiting; want 2 and 1", len(batch), s.Waiting())
	}
	s.Ack(batch[:1])
	if s.Waiting() != 1 {
		t.Error("acknowledged with one of two samples stored")
	}
	s.Ack(batch[1:])
	if s.Waiting() != 0 {
		t.Error("not acknowledged with all samples stored")
	}
	if st := s.Stats().Tags[0]; st.Accepted != 2 || st.Refused[WrongType] != 1 {
		t.Errorf("%d accepted, refused %v", st.Accepted, st.Refused)
	}
}

// A buffer must have room for the longest message, which has so many bytes at most.
func TestBufferHoldsTheLongestMessage(t *testing.T) {
	var many, same []Tag
	for i := range 200 {
		tag := sampled()
		tag.Name = fmt.Sprint(i)
		same = append(same, tag)
		tag.Value = fmt.Sprintf("/%d", i)
		many = append(many, tag)
	}
	for _, tt := range []struct {
		tags   []Tag
		buffer int
		ok     bool
	}{
		{many[:1], MaxSamples - 1, false}, {many[:1], MaxSamples, true}, {many, 32_000, false}, {many, MaxPayload/2 + 200, true}, {many, 0, true}, {same, 0, false},
	} {
		_, err := New(tt.tags, Options{URL: "mqtt://127.0.0.1", ClientID: "x", Buffer: tt.buffer})
		if (err == nil) != tt.ok {
			t.Errorf("%d tags in a buffer of %d: %v", len(tt.tags), tt.buffer, err)
		}
	}
}
