package ingest

import (
	"encoding/hex"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	mochi "github.com/mochi-mqtt/server/v2"
	"google.golang.org/protobuf/encoding/protowire"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
)

// Encoded by hand from the standard's field numbers (Sparkplug 3.0, chapter 6): a birth
// at 1700000000000 ms with seq 0, bdSeq 0, Node Control/Rebirth and the Double "flow",
// alias 1, of 2.5; data with seq 1 and alias 1 of 3.25, taken at 1700000005000; and a
// death of bdSeq 0.
const (
	birthHex = "0880d095ffbc3112120a0562645365711880d095ffbc312004580012210a144e6f646520436f6e74726f6c2f526562697274681880d095ffbc31200b7000121a0a04666c6f7710011880d095ffbc31200a6900000000000004401800"
	dataHex  = "0889f795ffbc31121210011888f795ffbc31690000000000000a401801"
	deathHex = "0880d095ffbc3112120a0562645365711880d095ffbc3120045800"
)

func unhex(t testing.TB, text string) []byte {
	t.Helper()
	b, err := hex.DecodeString(text)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

var works = sparkplug.Source{Group: "works", Node: "gw1"}

func metric(name string) Tag {
	return Tag{
		Name: "FT-" + name, Metric: &Metric{Source: works, Name: name}, Scale: 2, Offset: 1, Min: 0, Max: 1000, QoS: 1,
	}
}

func worksAlive() Tag {
	return Tag{Name: "works/gw1", Metric: &Metric{Source: works}, Liveness: &Liveness{}, Scale: 1, Max: 1, QoS: 1}
}

// named writes a metric with a double into a payload with a number.
func named(name string, ms uint64, x float64) []byte {
	m := protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), name)
	m = protowire.AppendVarint(protowire.AppendTag(m, 3, protowire.VarintType), ms)
	m = protowire.AppendFixed64(protowire.AppendTag(m, 13, protowire.Fixed64Type), math.Float64bits(x))
	return protowire.AppendBytes(protowire.AppendTag(nil, 2, protowire.BytesType), m)
}

const millis = int64(1_700_000_000_000)

func TestDecodeMetrics(t *testing.T) {
	d, err := NewDecoder([]Tag{metric("flow"), worksAlive(), bare()}, 0)
	if err != nil {
		t.Fatal(err)
	}
	take := func(k sparkplug.Kind, payload []byte, at int64) []Outcome {
		t.Helper()
		out, known := d.Decode(works.Topic(k), payload, at*1e6, false, nil)
		if !known {
			t.Fatalf("%v is of no tag", k)
		}
		return out
	}
	out := take(sparkplug.NBirth, unhex(t, birthHex), millis+100)
	if len(out) != 2 || out[0].Tag != 1 || out[0].Value != 1 || out[1].Tag != 0 || out[1].Value != 6 || out[1].At != millis*1e6 || !out[1].Stamped {
		t.Errorf("birth: %+v; want alive, and 2·2.5 + 1 at its stamp", out)
	}
	out = take(sparkplug.NData, unhex(t, dataHex), millis+5100)
	if len(out) != 1 || out[0].Refusal != nil || out[0].Value != 7.5 || out[0].At != (millis+5000)*1e6 {
		t.Errorf("data: %+v; want 2·3.25 + 1", out)
	}
	out = take(sparkplug.NData, named("flow", uint64(millis+6000), 600), millis+6000)
	if len(out) != 1 || out[0].Refusal == nil || out[0].Refusal.Reason != OutOfRange {
		t.Errorf("beyond the range: %+v", out)
	}
	out = take(sparkplug.NData, named("flow", 5000, 6), millis+6000)
	if len(out) != 1 || out[0].Refusal == nil || out[0].Refusal.Reason != UnsetClock || !strings.Contains(out[0].Refusal.Error(), `metric "flow" (Double) stamped before 2000`) {
		t.Errorf("a clock that is not set: %v", out[0].Refusal)
	}
	out = take(sparkplug.NDeath, unhex(t, deathHex), millis+7000)
	if len(out) != 2 || out[0].Mark != quality.Offline || out[0].At != (millis+7000)*1e6 || out[0].Stamped || out[1].Value != 0 {
		t.Errorf("death: %+v; want the end at its arrival", out)
	}
	if out := take(sparkplug.NData, []byte("21.5"), millis); len(out) != 0 {
		t.Errorf("what is no payload gave %+v", out)
	}
	if got := d.plug.stats(); got.Malformed != 1 || !strings.Contains(got.Last, `topic "spBv1.0/works/NDATA/gw1": payload "21.5" is no Sparkplug B`) {
		t.Errorf("%+v", got)
	}
	if out, known := d.Decode(works.Topic(sparkplug.NBirth), unhex(t, birthHex), millis*1e6, true, nil); !known || len(out) != 0 || d.plug.stats().Retained != 1 {
		t.Errorf("a birth that the broker had kept gave %+v", out)
	}
	for _, topic := range []string{"spBv1.0/works/NDATA/gw2", "spBv1.0/other/NDATA/gw1", "spBv1.0/STATE/x", "spBv1.0/"} {
		if _, known := d.Decode(topic, nil, 0, false, nil); known {
			t.Errorf("%q is taken for a topic of a tag", topic)
		}
	}
}

func TestWrongMetrics(t *testing.T) {
	for name, tt := range map[string]struct {
		change func(*Tag)
		want   string
	}{
		"topic":      {func(t *Tag) { t.Topic = "a" }, "a topic"},
		"pointer":    {func(t *Tag) { t.Value = "/v" }, "a topic, or places"},
		"source":     {func(t *Tag) { t.Metric = &Metric{Name: "a"} }, "no group/node"},
		"wildcard":   {func(t *Tag) { t.Metric = &Metric{Source: sparkplug.Source{Group: "+", Node: "n"}, Name: "a"} }, "no group/node"},
		"no name":    {func(t *Tag) { t.Metric = &Metric{Source: works} }, "has no name"},
		"both":       {func(t *Tag) { t.Liveness = &Liveness{} }, "has no name"},
		"same again": {func(*Tag) {}, `read the same metric "flow" of "works/gw1"`},
	} {
		tag := metric("flow")
		tt.change(&tag)
		if _, err := NewDecoder([]Tag{metric("flow"), tag}, 0); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%s: %v; want %q", name, err, tt.want)
		}
	}
}

// publishPlain publishes as an edge node does, with QoS 0 and not retained.
func publishPlain(t *testing.T, server *mochi.Server, k sparkplug.Kind, payload []byte) {
	t.Helper()
	if err := server.Publish(works.Topic(k), payload, false, 0); err != nil {
		t.Fatal(err)
	}
}

// now is a clock that stands in the time of the payloads by hand.
func now() time.Time { return time.UnixMilli(millis + 6000) }

func TestSparkplugSession(t *testing.T) {
	server, url := inProcess(t)
	s, log, _ := start(t, []Tag{metric("flow"), worksAlive(), number("a")}, Options{URL: url, Now: now})
	ready(t, s)
	publishPlain(t, server, sparkplug.NData, unhex(t, dataHex)) // before the birth
	publishPlain(t, server, sparkplug.NBirth, unhex(t, birthHex))
	publishPlain(t, server, sparkplug.NData, unhex(t, dataHex))
	publishPlain(t, server, sparkplug.NData, []byte("{"))
	if err := server.Publish(works.Topic(sparkplug.NDeath), unhex(t, deathHex), false, 1); err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, r := range collect(t, s, 5) {
		got = append(got, fmt.Sprintf("%d %v %v %d", r.Tag, r.Value, r.Mark, r.At/1e6-millis))
	}
	if want := []string{"1 1 good 5001", "0 6 good 0", "0 7.5 good 5000", "0 NaN offline 6000", "1 0 good 6000"}; !slices.Equal(got, want) {
		t.Errorf("readings %q; want %q", got, want)
	}
	st := s.Stats()
	want := sparkplug.Counts{Births: 1, Deaths: 1, Unborn: 1, UnknownAlias: 1, Malformed: 1}
	if st.Sparkplug.Counts != want || st.UnknownTopic != 0 || log.count("that is to be Sparkplug B") != 1 {
		t.Errorf("%+v, %d on unknown topics; want %+v", st.Sparkplug, st.UnknownTopic, want)
	}
	if s.Waiting() != 1 {
		t.Errorf("%d messages wait; want the death, which has QoS 1", s.Waiting())
	}
}

// A birth of a large gateway is longer than any message of JSON that is read.
func TestLongBirth(t *testing.T) {
	server, url := inProcess(t)
	s, _, _ := start(t, []Tag{metric("flow")}, Options{URL: url, Now: now})
	ready(t, s)
	long := append(named(strings.Repeat("x", 500_000), 1, 1), unhex(t, birthHex)...)
	publishPlain(t, server, sparkplug.NBirth, long)
	collect(t, s, 1)
	publishPlain(t, server, sparkplug.NData, make([]byte, 2<<20))
	publishPlain(t, server, sparkplug.NData, unhex(t, dataHex))
	collect(t, s, 1)
	if got := s.Stats().Sparkplug; got.Malformed != 1 || !strings.Contains(got.Last, "at most 1048576 are read") {
		t.Errorf("%+v", got)
	}
}

func TestLostConnectionEndsMetrics(t *testing.T) {
	server, url := inProcess(t)
	s, _, _ := start(t, []Tag{metric("flow"), worksAlive()}, Options{URL: url, Now: now})
	ready(t, s)
	publishPlain(t, server, sparkplug.NBirth, unhex(t, birthHex))
	publishPlain(t, server, sparkplug.NData, unhex(t, dataHex))
	collect(t, s, 3)
	c, _ := server.Clients.Get(t.Name())
	c.Stop(errors.New("cut by the test"))
	batch := collect(t, s, 2)
	if batch[0].Mark != quality.Offline || batch[0].At != now().UnixNano() || batch[1].Value != 0 {
		t.Errorf("%+v; want the end of both", batch)
	}
	ready(t, s)
	publishPlain(t, server, sparkplug.NData, append(unhex(t, dataHex), 0x18, 2)) // number 2
	if batch = collect(t, s, 2); batch[0].Value != 7.5 || batch[0].At != now().UnixNano()+1 {
		t.Errorf("%+v; the sequence went on, so the alias holds", batch)
	}
}

func TestBirthsAreAskedFor(t *testing.T) {
	server, url := inProcess(t)
	h := listen(t, server, works.Topic(sparkplug.NCommand))
	tags := []Tag{metric("flow")}
	silent, _, _ := start(t, tags, Options{URL: url, ClientID: "silent"})
	s, _, _ := start(t, tags, Options{URL: url, Rebirths: true})
	ready(t, s)
	ready(t, silent)
	eventually(t, "a request", func() bool { return len(h.all()) > 0 })
	if got := h.all(); len(got) != 1 || !strings.Contains(got[0], "Node Control/Rebirth") {
		t.Errorf("asked with %q; want one request", got)
	}
	if st := silent.Stats(); s.Stats().Sparkplug.Requests != 1 || st.Sparkplug.Requests != 0 || st.Outbox.Published != 0 {
		t.Errorf("a session that may not ask has sent %+v", st)
	}
}

func TestHostState(t *testing.T) {
	server, url := inProcess(t)
	topic := sparkplug.StateTopic("works host")
	h := listen(t, server, topic)
	s, _, stop := start(t, []Tag{metric("flow")}, Options{URL: url, Host: "works host", Now: now})
	ready(t, s)
	online, offline := fmt.Sprintf(`%s {"online":true,"timestamp":%d}`, topic, millis+6000), fmt.Sprintf(`%s {"online":false,"timestamp":%d}`, topic, millis+6000)
	eventually(t, "online", func() bool { return slices.Contains(h.all(), online) })
	h.eventually(t, online)
	c, _ := server.Clients.Get(t.Name())
	if !c.Properties.Clean || c.Properties.Will.TopicName != topic || string(c.Properties.Will.Payload) != strings.TrimPrefix(offline, topic+" ") || !c.Properties.Will.Retain || c.Properties.Will.Qos != 1 {
		t.Errorf("connected with %+v", c.Properties)
	}
	if err := server.Publish(topic, []byte(`{"online":false,"timestamp":1}`), true, 1); err != nil {
		t.Fatal(err)
	}
	h.eventually(t, online, topic+` {"online":false,"timestamp":1}`, online)
	stop()
	h.eventually(t, online, topic+` {"online":false,"timestamp":1}`, online, offline)
	if _, err := New([]Tag{metric("flow")}, Options{URL: url, ClientID: "a", Host: "h", Presence: Words("a", "b", "c")}); err == nil {
		t.Error("two wills were allowed")
	}
	if _, err := New([]Tag{metric("flow")}, Options{URL: url, ClientID: "a", Host: "a/b"}); err == nil {
		t.Error("a host id with a slash was allowed")
	}
}

// What found no room is not passed over: the tag has no value from there.
func TestMetricsThatFindNoRoom(t *testing.T) {
	d := make(debts)
	tags := []Tag{metric("flow"), worksAlive(), number("a")}
	for _, at := range []int64{5, 3, 4} {
		d.note(tags, []Outcome{{Reading: Reading{Tag: 0, At: at, Value: 1}}, {Reading: Reading{Tag: 1, At: at, Value: float64(at - 3)}}, {Reading: Reading{Tag: 2, At: at}}})
	}
	d.note(tags, []Outcome{{Reading: Reading{Tag: 0, At: 1}, Refusal: &Refusal{}}})
	out := d.pay(nil)
	slices.SortFunc(out, func(a, b Outcome) int { return a.Tag - b.Tag })
	if len(out) != 2 || out[0].At != 3 || out[0].Mark != quality.NoValue || !math.IsNaN(out[0].Value) || out[1].Value != 1 || len(d.pay(nil)) != 0 {
		t.Errorf("owed %+v; want no value from 3 on, and alive as told last", out)
	}
}

func TestMetricsCostNoAllocation(t *testing.T) {
	d, err := NewDecoder([]Tag{metric("flow")}, 0)
	if err != nil {
		t.Fatal(err)
	}
	out, _ := d.Decode(works.Topic(sparkplug.NBirth), unhex(t, birthHex), millis*1e6, false, nil)
	topic, payload := works.Topic(sparkplug.NData), unhex(t, dataHex)
	if n := testing.AllocsPerRun(1000, func() { out, _ = d.Decode(topic, payload, (millis+6000)*1e6, false, out[:0]) }); n != 0 || len(out) != 1 {
		t.Errorf("%v allocations for %d readings", n, len(out))
	}
}

// Hostile and broken messages by Sparkplug, each with what is counted for it. Where reason
// is given the tag is refused; else count looks at the counts of the namespace.
func TestBadSparkplug(t *testing.T) {
	varint := func(b []byte, num protowire.Number, v uint64) []byte {
		return protowire.AppendVarint(protowire.AppendTag(b, num, protowire.VarintType), v)
	}
	text := func(b []byte, num protowire.Number, v string) []byte {
		return protowire.AppendString(protowire.AppendTag(b, num, protowire.BytesType), v)
	}
	flow := func(of ...byte) []byte { return text(nil, 2, string(append(text(nil, 1, "flow"), of...))) }
	double := func(x float64) []byte {
		return protowire.AppendFixed64(protowire.AppendTag(nil, 13, protowire.Fixed64Type), math.Float64bits(x))
	}
	deep := []byte("x")
	for range 10_000 {
		deep = text(nil, 18, string(deep[:min(len(deep), 60_000)]))
	}
	malformed := func(c sparkplug.Counts) uint64 { return c.Malformed }
	for name, tt := range map[string]struct {
		kind    sparkplug.Kind
		payload []byte
		reason  Reason
		count   func(sparkplug.Counts) uint64
	}{
		"text":                        {sparkplug.NData, []byte("21.5"), 0, malformed},
		"JSON":                        {sparkplug.NData, []byte(`{"metrics":[{"name":"flow","value":2}]}`), 0, malformed},
		"cut":                         {sparkplug.NData, unhex(t, dataHex)[:15], 0, malformed},
		"cut birth":                   {sparkplug.NBirth, unhex(t, birthHex)[:60], 0, malformed},
		"cut death":                   {sparkplug.NDeath, unhex(t, deathHex)[:12], 0, malformed},
		"a length of 2 GiB":           {sparkplug.NData, []byte{0x12, 0xff, 0xff, 0xff, 0xff, 0x07}, 0, malformed},
		"a group":                     {sparkplug.NData, []byte{0x33, 0x34}, 0, malformed},
		"more than is read":           {sparkplug.NData, make([]byte, sparkplug.MaxPayload+1), 0, malformed},
		"zeros":                       {sparkplug.NData, make([]byte, 100), 0, malformed},
		"an alias nobody told":        {sparkplug.NData, text(nil, 2, string(varint(nil, 2, 77))), 0, func(c sparkplug.Counts) uint64 { return c.UnknownAlias }},
		"neither name nor alias":      {sparkplug.NData, text(nil, 2, string(double(1))), 0, func(c sparkplug.Counts) uint64 { return c.UnknownAlias }},
		"a number left out":           {sparkplug.NData, varint(flow(double(1)...), 3, 9), 0, func(c sparkplug.Counts) uint64 { return c.Gaps }},
		"a number beyond 255":         {sparkplug.NData, varint(flow(double(1)...), 3, 1<<40), 0, func(c sparkplug.Counts) uint64 { return c.Gaps }},
		"death of another session":    {sparkplug.NDeath, text(nil, 2, string(varint(text(nil, 1, "bdSeq"), 11, 5))), 0, func(c sparkplug.Counts) uint64 { return c.LateDeaths }},
		"a name of 2 KiB":             {sparkplug.NBirth, text(nil, 2, string(text(nil, 1, strings.Repeat("n", 2048)))), 0, func(c sparkplug.Counts) uint64 { return c.Crowded }},
		"a name that is no UTF-8":     {sparkplug.NBirth, text(nil, 2, string(text(nil, 1, "\xff"))), 0, func(c sparkplug.Counts) uint64 { return c.Crowded }},
		"no value":                    {sparkplug.NData, flow(), ValueMissing, nil},
		"text as a value":             {sparkplug.NData, flow(text(nil, 15, "2.5")...), WrongType, nil},
		"truth":                       {sparkplug.NData, flow(varint(nil, 14, 1)...), WrongType, nil},
		"templates in templates":      {sparkplug.NData, flow(deep...), WrongType, nil},
		"a Double as an integer":      {sparkplug.NData, flow(varint(nil, 10, 2)...), WrongType, nil},
		"NaN":                         {sparkplug.NData, flow(double(math.NaN())...), NotFinite, nil},
		"infinite":                    {sparkplug.NData, flow(double(math.Inf(-1))...), NotFinite, nil},
		"infinite in SI":              {sparkplug.NData, flow(double(1e308)...), NotFinite, nil},
		"beyond the range":            {sparkplug.NData, flow(double(-1)...), OutOfRange, nil},
		"1970":                        {sparkplug.NData, flow(append(varint(nil, 3, 12), double(1)...)...), UnsetClock, nil},
		"seconds for milliseconds":    {sparkplug.NData, flow(append(varint(nil, 3, 1_700_000_000), double(1)...)...), UnsetClock, nil},
		"an hour ahead":               {sparkplug.NData, flow(append(varint(nil, 3, uint64(millis+3600_000)), double(1)...)...), Ahead, nil},
		"beyond all time":             {sparkplug.NData, flow(append(varint(nil, 3, math.MaxUint64), double(1)...)...), TimeWrong, nil},
		"of the past, without a time": {sparkplug.NData, flow(append(varint(nil, 5, 1), double(1)...)...), TimeMissing, nil},
		"not to be stored":            {sparkplug.NData, flow(append(varint(nil, 6, 1), double(1)...)...), Transient, nil},
	} {
		d, err := NewDecoder([]Tag{metric("flow")}, 0)
		if err != nil {
			t.Fatal(err)
		}
		d.Decode(works.Topic(sparkplug.NBirth), unhex(t, birthHex), millis*1e6, false, nil)
		out, known := d.Decode(works.Topic(tt.kind), tt.payload, millis*1e6, false, nil)
		switch {
		case !known:
			t.Errorf("%s: taken for another topic", name)
		case tt.count != nil && tt.count(d.plug.stats().Counts) != 1:
			t.Errorf("%s: counts %+v, last %q", name, d.plug.stats(), d.plug.stats().Last)
		case tt.count == nil && (len(out) != 1 || out[0].Refusal == nil || out[0].Refusal.Reason != tt.reason):
			t.Errorf("%s: %+v; want %v", name, out, tt.reason)
		}
	}
}
