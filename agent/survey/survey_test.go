package survey

import (
	"encoding/hex"
	"errors"
	"fmt"
	"math"
	"os"
	"regexp"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/site"
	"heatreeve/thermo/unit"
)

const epoch = int64(1_790_000_000_000_000_000)

// heard is a survey of messages that came a second apart, each topic's in its order.
func heard(payloads map[string][]string) *Survey {
	s := New(0)
	for topic, all := range payloads {
		for i, p := range all {
			s.Hear(Message{Topic: topic, Payload: []byte(p), At: epoch + int64(i)*1e9})
		}
	}
	return s
}

// signals are those of a survey by tag.
func signals(s *Survey) map[string]Signal {
	all := map[string]Signal{}
	for _, t := range s.Topics() {
		for _, sig := range t.Signals {
			all[sig.Tag] = sig
		}
	}
	return all
}

func stamped(format string, lag int64, values ...float64) []string {
	var all []string
	for i, v := range values {
		all = append(all, fmt.Sprintf(format, v, (epoch+int64(i)*1e9-lag)/1e6))
	}
	return all
}

func TestValueTimeQualityAndUnitOfOneMessage(t *testing.T) {
	s := heard(map[string][]string{"a/TT-1": stamped(`{"v": %g, "ts": %d, "q": 192, "u": "degC"}`, 250e6, 80.5, 80.25, 81)})
	got := signals(s)["TT-1"]
	if got.Value != "/v" || got.Time != "/ts" || got.Quality != "/q" || got.Unit != "/u" || got.Says != "degC" {
		t.Errorf("pointers %q %q %q %q, unit %q", got.Value, got.Time, got.Quality, got.Unit, got.Says)
	}
	if got.Min != 80.25 || got.Max != 81 || got.Last != 81 || got.Decimals != 2 || got.Count != 3 {
		t.Errorf("numbers %+v", got)
	}
	if g := got.Guess; g.Unit != "°C" || !g.Sure || g.Quantity != "temperature" {
		t.Errorf("guess %+v", g)
	}
	if c := got.Clock; c == nil || math.Abs(c.Behind-0.25) > 1e-9 || c.Jitter != 0 {
		t.Errorf("clock %+v, want 0.25 s behind without jitter", c)
	}
}

func TestOneMessageOfManyTags(t *testing.T) {
	s := heard(map[string][]string{"plc": stamped(`{"boiler": {"supply_temp_degC": %g, "flow_m3h": 12.5, "seq": 7}, "time": %d}`, 0, 80, 81, 82)})
	all := signals(s)
	for tag, want := range map[string][3]string{"supply_temp_degC": {"/boiler/supply_temp_degC", "/time", "°C"}, "flow_m3h": {"/boiler/flow_m3h", "/time", "m3/h"}} {
		got := all[tag]
		if got.Value != want[0] || got.Time != want[1] || got.Guess.Unit != want[2] {
			t.Errorf("%s: value %q, time %q, unit %q; want %v", tag, got.Value, got.Time, got.Guess.Unit, want)
		}
	}
	if len(all) != 2 {
		t.Errorf("signals %v, want two: a sequence number measures nothing", all)
	}
}

func TestListOfStampedSamples(t *testing.T) {
	s := heard(map[string][]string{"a/PT-7": {fmt.Sprintf(`{"unit": "barg", "data": [{"t": %d, "value": 3.1}, {"t": %d, "value": 3.2}]}`, epoch/1e6-2000, epoch/1e6-1000)}})
	got := signals(s)["PT-7"]
	if got.Samples != "/data" || got.Value != "/value" || got.Time != "/t" || got.Count != 2 {
		t.Errorf("samples %q, value %q, time %q, count %d", got.Samples, got.Value, got.Time, got.Count)
	}
	if got.Unit != "/unit" || got.Guess.Unit != "barg" || !got.Guess.Sure { // beside the list, for all of it
		t.Errorf("unit at %q, %+v; want barg, as the payload says", got.Unit, got.Guess)
	}
}

// A message that is nothing but a list is one of samples, and the draft says so.
func TestListThatIsTheWholeMessage(t *testing.T) {
	s := heard(map[string][]string{"a/TT-7": {fmt.Sprintf(`[{"t": %d, "value": 61}, {"t": %d, "value": 62}]`, epoch/1e6-2000, epoch/1e6-1000)}})
	got := signals(s)["TT-7"]
	if got.Samples != "whole" || got.Value != "/value" || got.Time != "/t" || got.Count != 2 {
		t.Errorf("samples %q, value %q, time %q, count %d", got.Samples, got.Value, got.Time, got.Count)
	}
	if keys := got.keys(); !strings.Contains(keys, "samples: whole, value: /value, time: /t,") {
		t.Errorf("keys %s", keys)
	}
}

// Levels that tell the side keep the signals of one circuit no more apart than words do.
func TestLoadOfLevelsThatTellTheSide(t *testing.T) {
	found, _ := Loads(heard(map[string][]string{"hall/loop/supply/temperature": {"80"}, "hall/loop/return/temperature": {"60"}, "hall/loop/flow": {"9"}, "hall/loop/outlet/pressure": {"9"}}).Topics())
	if len(found) != 1 || found[0].Name != "loop" || found[0].Flow != "flow" || found[0].Inlet != "supply-temperature" || found[0].Outlet != "return-temperature" || found[0].Pressure != "pressure" {
		t.Errorf("%+v, want one load", found)
	}
}

// The level above tells the side where the name does not; one word for both tells nothing.
func TestSidesByLevels(t *testing.T) {
	for _, tt := range []struct{ one, other, inlet, why string }{
		{"w/return/TT-101", "w/supply/TT-102", "TT-102", "by the words"},
		{"w/supply_temp1", "w/supply_temp2", "supply_temp1", "taken in the order of their names"},
		{"w/TT-101", "w/TT-102", "TT-101", "taken in the order of their names"},
	} {
		found, _ := Loads(heard(map[string][]string{tt.one: {"60"}, tt.other: {"80"}, "w/FT-101": {"9"}, "w/flow": {"9"}}).Topics())
		if len(found) != 1 || found[0].Inlet != tt.inlet || !strings.HasPrefix(found[0].Why, tt.why) {
			t.Errorf("%s and %s: %+v; want inlet %s, %s", tt.one, tt.other, found, tt.inlet, tt.why)
		}
	}
}

// Names with units in brackets pair up like those without, and name tags without them.
func TestLoadOfNamesWithUnitsInBrackets(t *testing.T) {
	found, _ := Loads(heard(map[string][]string{"heat meter/7/supply temperature [°C]": {"80"}, "heat meter/7/return temperature [°C]": {"60"}, "heat meter/7/volume flow [m³/h]": {"9"}}).Topics())
	if len(found) != 1 || found[0].Flow != "volume_flow" || found[0].Inlet != "supply_temperature" || found[0].Outlet != "return_temperature" {
		t.Errorf("%+v, want one load", found)
	}
}

func TestShapes(t *testing.T) {
	for _, tt := range []struct {
		payloads []string
		want     Shape
	}{
		{[]string{"21.5"}, Bare}, {[]string{" 007.50\r\n"}, Bare}, {[]string{""}, Nothing}, {[]string{"online"}, Words},
		{[]string{`{"v": 1}`}, JSON}, {[]string{`[1, 2]`}, JSON}, {[]string{`{"v": 1`}, Words}, {[]string{"\x00\x01"}, Bytes},
		{[]string{"1", "online"}, Mixed}, {[]string{strings.Repeat("9", 70000)}, TooLong},
	} {
		got := heard(map[string][]string{"a": tt.payloads}).Topics()
		if len(got) != 1 || got[0].Shape != tt.want {
			t.Errorf("%.20q: %+v, want %s", tt.payloads, got, tt.want)
		}
	}
}

func TestGuesses(t *testing.T) {
	for _, tt := range []struct {
		topic    string
		payloads []string
		unit     string
		quantity string
		sure     bool
		counts   bool
	}{
		{"a/TT-201", []string{"80.1", "80.3"}, "°C", "temperature", false, false},
		{"a/TI_12", []string{"353.2", "354"}, "K", "temperature", false, false},
		{"a/FT-201", []string{"12.5"}, "", "volume flow", false, false},
		{"a/FQ-201", []string{"1250", "1250"}, "", "volume", false, true},
		{"a/PT-1", []string{"3.2"}, "", "pressure", false, false},
		{"a/PDT-1", []string{"0.2"}, "", "", false, false},
		{"hall/boiler/supplyTemperature", []string{"82"}, "°C", "temperature", false, false},
		{"hall/meter/energy_kwh", []string{"100", "100"}, "kWh", "energy", true, true},
		{"hall/meter/flow_kg_h", []string{"100"}, "kg/h", "mass flow", true, false},
		{"a/TI2101.PV", []string{"80.1", "80.3"}, "°C", "temperature", false, false},
		{"a/FIC_7_PV", []string{"8"}, "", "volume flow", false, false},
		{"a/TIC101.SP", []string{"80"}, "", "", false, false},
		{"a/TE/77", []string{"353.2", "354"}, "K", "temperature", false, false},
		{"hall/AB/77", []string{"3"}, "", "", false, false},
		{"m/supply temperature [°F]", []string{"180"}, "°F", "temperature", true, false},
		{"m/volume flow [m³/h]", []string{"9.1"}, "m3/h", "volume flow", true, false},
		{"m/hall (2)", []string{"9.1"}, "", "", false, false},
		{"hall/lamp", []string{"1", "0"}, "", "", false, false},
		{"hall/x", []string{`{"value": 3, "unit": "bananas"}`}, "", "", false, false},
		{"hall/counter", []string{"1", "2", "3", "4", "5", "6", "7"}, "", "", false, true},
	} {
		topics := heard(map[string][]string{tt.topic: tt.payloads}).Topics()
		if len(topics) != 1 || len(topics[0].Signals) != 1 {
			t.Errorf("%s: %+v, want one signal", tt.topic, topics)
			continue
		}
		g := topics[0].Signals[0].Guess
		if g.Unit != tt.unit || g.Quantity != tt.quantity || g.Sure != tt.sure || g.Counts != tt.counts {
			t.Errorf("%s: %+v, want %+v", tt.topic, g, tt)
		}
		if (g.Unit != "" || g.Quantity != "") && g.Why == "" {
			t.Errorf("%s: no reason given", tt.topic)
		}
	}
}

// What the broker had kept tells nothing of rate and clock.
func TestRetainedIsApart(t *testing.T) {
	s := New(0)
	old := fmt.Sprintf(`{"v": 1, "ts": %d}`, epoch/1e6-3600_000)
	s.Hear(Message{Topic: "a", Payload: []byte(old), Retained: true, At: epoch})
	got := s.Topics()[0]
	if got.Retained != 1 || got.Every != 0 || got.Signals[0].Clock != nil {
		t.Errorf("%+v, clock %+v; want one retained, no rate, no clock", got, got.Signals[0].Clock)
	}
}

func TestClockOfAnotherZone(t *testing.T) {
	s := heard(map[string][]string{"a/TT-1": stamped(`{"v": %g, "ts": %d}`, 3600e9, 1, 2, 3)})
	c := signals(s)["TT-1"].Clock
	if c == nil || !strings.Contains(Lag(c), "another time zone") {
		t.Errorf("clock %+v; want an hour behind, as of another time zone", c)
	}
}

func TestTagNamesAreApart(t *testing.T) {
	all := signals(heard(map[string][]string{"n/a/temp": {"1"}, "n/b/temp": {"2"}, "n/b/12": {"3"}, "n/b/TT-1": {"4"}}))
	for _, want := range []string{"a-temp", "b-temp", "tag-12", "TT-1"} {
		if _, ok := all[want]; !ok {
			t.Errorf("no tag %q among %d", want, len(all))
		}
	}
}

// Memory is bounded whatever a broker sends.
func TestBounds(t *testing.T) {
	s := New(10)
	s.room = 2500
	var many strings.Builder
	for i := range 2000 {
		fmt.Fprintf(&many, `"k%d": %d,`, i, i)
	}
	payload := []byte("{" + many.String() + `"last": 1}`)
	for i := range 100 {
		s.Hear(Message{Topic: fmt.Sprint("t", i), Payload: payload, At: epoch})
	}
	p := s.Progress()
	if p.Topics != 10 || p.Beyond != 90 || p.Messages != 100 {
		t.Errorf("progress %+v, want 10 topics and 90 messages beyond", p)
	}
	for _, got := range s.Topics() {
		most := map[string]int{"t0": MostSeries, "t1": MostSeries, "t2": 500}[got.Name]
		if len(got.Signals) != most || !got.Crowded {
			t.Errorf("%s: %d signals, crowded %t; want %d", got.Name, len(got.Signals), got.Crowded, most)
		}
	}
	s.Hear(Message{Topic: "$SYS/load", Payload: []byte("1"), At: epoch})
	if s.Progress().Messages != 100 {
		t.Error("the broker's own topics are counted")
	}
}

func plant() map[string][]string {
	return map[string][]string{
		"creamery/hw/TT-201": stamped(`{"v": %g, "ts": %d}`, 0, 130, 129.5),
		"creamery/hw/TT-202": stamped(`{"v": %g, "ts": %d}`, 0, 90, 90.5),
		"creamery/hw/FT-201": stamped(`{"v": %g, "ts": %d}`, 0, 13.5, 13.6),
		"creamery/hw/PT-201": stamped(`{"v": %g, "ts": %d}`, 0, 6.1, 6.1),
		"hall/boiler_supply": {"80", "81"}, "hall/lamp": {"1"},
		"east/heat meter/flow_m3h": {"4", "5"}, "east/heat meter/supply temp": {"70", "71"}, "east/heat meter/return temp": {"50", "50"},
		`odd/"quoted": , {[x]}`: {`{"temp": 3, "é": 4}`},
	}
}

func TestLoadsByNames(t *testing.T) {
	found, _ := Loads(heard(plant()).Topics())
	if len(found) != 2 {
		t.Fatalf("%+v, want two loads", found)
	}
	east, hw := found[1], found[0]
	if hw.Name != "hw" || hw.Flow != "FT-201" || hw.Inlet != "TT-201" || hw.Outlet != "TT-202" || hw.Pressure != "PT-201" || !hw.ByVolume || !hw.Gives {
		t.Errorf("first load %+v", hw)
	}
	if east.Inlet != "supply_temp" || east.Witness != "" || east.Outlet != "return_temp" || !strings.Contains(east.Why, "words") {
		t.Errorf("second load %+v", east)
	}
}

// Of a draft a check finds nothing wrong but what is to be filled in, however odd topics are.
func TestDraftWantsNothingButItsBlanks(t *testing.T) {
	var text strings.Builder
	s := heard(plant())
	raw, err := hex.DecodeString(birth)
	if err != nil {
		t.Fatal(err)
	}
	s.Hear(Message{Topic: "spBv1.0/works/NBIRTH/plc", Payload: raw, At: epoch})
	s.Hear(Message{Topic: "list/TT-9", Payload: fmt.Appendf(nil, `{"d": [{"t": %d, "v": 3.1}]}`, epoch/1e6), At: epoch})
	d := Draft{Broker: site.Broker{URL: "mqtt://127.0.0.1:1883", Username: "survey", PasswordFile: "/etc/heatreeve/password: #"}, Topics: s.Topics(), At: time.Unix(0, epoch), For: 30 * time.Second}
	if err := d.Write(&text); err != nil {
		t.Fatal(err)
	}
	if os.Getenv("SHOW") != "" {
		t.Log(text.String())
	}
	_, err = site.Parse("draft.yaml", []byte(text.String()))
	var faults site.Faults
	if !errors.As(err, &faults) {
		t.Fatalf("%v, want faults", err)
	}
	for _, f := range faults {
		if f.Message != "is still to be filled in" {
			t.Errorf("%v\n%s", f, text.String())
		}
	}
	filled := strings.NewReplacer("timezone: ___", "timezone: UTC", "site: ___", "site: A", "fluid: ___", "fluid: water", "accuracy: ___", "accuracy: 1 % of reading",
		"pressure: ___", "pressure: 3 bar", "meter_at: ___", "meter_at: inlet").Replace(text.String())
	filled = regexp.MustCompile(`(  PT-[^:]*: .*)unit: ___`).ReplaceAllString(filled, "${1}unit: barg")
	filled = strings.ReplaceAll(filled, "unit: ___", "unit: m3/h")
	if _, err := site.Parse("draft.yaml", []byte(filled)); err != nil {
		t.Errorf("filled in: %v\n%s", err, filled)
	}
}

// Payloads encoded by hand from the field numbers of the standard: a birth at 1700000000000 ms
// of "flow", alias 1, 2.5; data 5 s later, 3.25 under the alias alone.
const (
	birth = "0880d095ffbc3112120a0562645365711880d095ffbc312004580012210a144e6f646520436f6e74726f6c2f526562697274681880d095ffbc31200b7000121a0a04666c6f7710011880d095ffbc31200a6900000000000004401800"
	data  = "0889f795ffbc31121210011888f795ffbc31690000000000000a401801"
)

func TestSparkplug(t *testing.T) {
	s := New(0)
	at := int64(1_700_000_000_500_000_000)
	say := func(topic, payload string, at int64) {
		raw, err := hex.DecodeString(payload)
		if err != nil {
			t.Fatal(err)
		}
		s.Hear(Message{Topic: topic, Payload: raw, At: at})
	}
	say("spBv1.0/works/NDATA/late", data, at)
	say("spBv1.0/works/NBIRTH/plc", birth, at)
	say("spBv1.0/works/NDATA/plc", data, at+5e9)
	say("spBv1.0/works/NDATA/plc", "ff", at+6e9)
	say("spBv1.0/STATE/host", "", at)
	p := s.Progress()
	if p.Unnamed != 1 || p.Malformed != 1 || p.Messages != 5 {
		t.Errorf("progress %+v, want one metric without a name and one message that cannot be read", p)
	}
	got := signals(s)["flow"]
	if got.Topic != "works/plc" || got.Metric != "flow" || got.Min != 2.5 || got.Max != 3.25 || got.Decimals != 2 || got.Count != 2 || got.Guess.Quantity != "volume flow" {
		t.Errorf("%+v", got)
	}
	if c := got.Clock; c == nil || c.Behind < 0 || c.Behind > 0.6 {
		t.Errorf("clock %+v, want half a second behind", c)
	}
	if keys := got.keys(); !strings.HasPrefix(keys, "{sparkplug: works/plc, metric: flow, ") {
		t.Errorf("keys %s", keys)
	}
}

// A topic of nothing but slashes has no name to give.
func TestTopicWithoutAName(t *testing.T) {
	topics := heard(map[string][]string{"/": {`{"v": 3, "unit": "degC"}`}, "//": {"4"}}).Topics()
	if found, doubts := Loads(topics); len(found)+len(doubts) != 0 || len(topics) != 2 {
		t.Errorf("%+v, %q of %d topics", found, doubts, len(topics))
	}
	for _, topic := range topics {
		if s := topic.Signals[0]; !strings.HasPrefix(s.Tag, "tag") {
			t.Errorf("%s: tag %q", topic.Name, s.Tag)
		}
	}
}

func FuzzHear(f *testing.F) {
	f.Add("/", []byte("0"), true)
	f.Add("a/TT-1", []byte(`{"v": 1, "data": [{"t": 1, "v": [1, [2]]}]}`), false)
	f.Add("a", []byte("1e400"), true)
	if raw, err := hex.DecodeString(birth); err == nil {
		f.Add("spBv1.0/works/NBIRTH/plc", raw, false)
	}
	f.Fuzz(func(t *testing.T, topic string, payload []byte, retained bool) {
		s := New(2)
		for i := range 3 {
			s.Hear(Message{Topic: topic, Payload: payload, Retained: retained, At: epoch + int64(i)*1e9})
		}
		d := Draft{Broker: site.Broker{URL: "mqtt://h:1883"}, Topics: s.Topics()}
		var text strings.Builder
		if err := d.Write(&text); err != nil {
			t.Fatal(err)
		}
		if n := len(payload); n < 4096 && text.Len() > 1<<20 {
			t.Errorf("a draft of %d bytes from a payload of %d", text.Len(), n)
		}
		for line := range strings.Lines(text.String()) {
			if strings.ContainsAny(strings.TrimSuffix(line, "\n"), "\x00\r\x1b") {
				t.Errorf("line %q", line)
			}
		}
	})
}

// Every spelling that names end in stands for a unit that tags can have.
func TestSuffixesAreUnits(t *testing.T) {
	for text, symbol := range suffixes {
		if _, err := unit.LookupAs(symbol, tells...); err != nil {
			t.Errorf("%q: %v", text, err)
		}
	}
}
