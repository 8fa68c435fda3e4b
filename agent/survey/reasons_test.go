package survey

import (
	"math"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protowire"
)

// measured is a Sparkplug B metric of type Double with a text as a property, by the field
// numbers of the standard: name 1, datatype 4, properties 9 (keys 1, values 2: type 1,
// string 8), double 13.
func measured(name string, x float64, key, text string) []byte {
	text = string(protowire.AppendString(protowire.AppendTag([]byte{1 << 3, 12}, 8, protowire.BytesType), text))
	set := protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), key)
	set = protowire.AppendString(protowire.AppendTag(set, 2, protowire.BytesType), text)
	b := protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), name)
	b = append(b, 4<<3, 10)
	b = protowire.AppendBytes(protowire.AppendTag(b, 9, protowire.BytesType), set)
	return protowire.AppendFixed64(protowire.AppendTag(b, 13, protowire.Fixed64Type), math.Float64bits(x))
}

// born is a survey of one device's birth.
func born(metrics ...[]byte) *Survey {
	payload := protowire.AppendVarint([]byte{1 << 3}, uint64(epoch/1e6))
	for _, m := range metrics {
		payload = protowire.AppendBytes(protowire.AppendTag(payload, 2, protowire.BytesType), m)
	}
	s := New(0)
	s.Hear(Message{Topic: "spBv1.0/works/DBIRTH/gw/loop", Payload: payload, At: epoch})
	return s
}

// The unit of a metric is read where a property of it names one, and not guessed.
func TestUnitOfAMetric(t *testing.T) {
	got := signals(born(measured("TT-9", 181.4, "engUnit", "°F"), measured("Flow", 6.8, "Units", "l/s"), measured("PT-9", 61, "engUnit", "PSIG"), measured("TT-8", 12.4, "engUnit", "mA"), measured("TT-7", 60, "note", "°F")))
	for tag, want := range map[string]struct {
		unit, quantity, why string
		sure                bool
	}{
		"TT-9": {"°F", "temperature", `its property "engUnit" says "°F"`, true},
		"Flow": {"L/s", "volume flow", `its property "Units" says "l/s"`, true},
		"PT-9": {"psig", "pressure", `its property "engUnit" says "PSIG", taken for psig`, false},
		"TT-8": {"", "temperature", `its property "engUnit" says "mA", which is no unit of what a load uses`, false},
		"TT-7": {"°C", "temperature", "TT begins the tag of a temperature", false},
	} {
		if g := got[tag].Guess; g.Unit != want.unit || g.Quantity != want.quantity || g.Sure != want.sure || !strings.HasPrefix(g.Why, want.why) {
			t.Errorf("%s: %+v, want %+v", tag, g, want)
		}
	}
}

// A unit of pressure that leaves its zero open is said to be taken as absolute.
func TestPressureThatMayBeGauge(t *testing.T) {
	for name, want := range map[string]bool{"pressure_bar": true, "pressure_kpa": true, "pressure_bara": false, "pressure_barg": false, "pressure_psi": true, "pressure_psia": false, "temp_degC": false} {
		g := heard(map[string][]string{"hall/" + name: {"5.2"}}).Topics()[0].Signals[0].Guess
		if got := strings.Contains(g.Why, "taken as absolute: if it is gauge, write "+g.Unit+"g"); got != want || g.Unit == "" {
			t.Errorf("%s: %+v, want told %t", name, g, want)
		}
	}
	if g := signals(born(measured("PT-1", 61, "engUnit", "psi")))["PT-1"].Guess; !strings.HasSuffix(g.Why, "taken as absolute: if it is gauge, write psig") {
		t.Errorf("%+v", g)
	}
}

// What fits °C above the boil may be °F too, and the reason says so.
func TestTemperatureThatMayBeFahrenheit(t *testing.T) {
	for x, want := range map[string]bool{"181": true, "81": false} {
		if g := heard(map[string][]string{"hall/TT-1": {x}}).Topics()[0].Signals[0].Guess; g.Unit != "°C" || g.Sure || strings.Contains(g.Why, "°F as well") != want {
			t.Errorf("%s: %+v, want °F told %t", x, g, want)
		}
	}
}

// A draft's max_age lets stamps lie behind as they do, and tells of what nothing live came of.
func TestDraftOfLateAndKept(t *testing.T) {
	s := heard(map[string][]string{"w/TT-1": stamped(`{"v": %g, "ts": %d}`, 12e9, 80, 81, 82), "w/TT-2": stamped(`{"v": %g, "ts": %d}`, 3600e9, 80, 81, 82)})
	s.Hear(Message{Topic: "w/TT-3", Payload: []byte("24"), Retained: true, At: epoch})
	all := signals(s)
	for tag, want := range map[string]string{"TT-1": "max_age: 30 s}", "TT-2": "max_age: 10 s}", "TT-3": "accuracy: ___}"} {
		sig := all[tag]
		if got := sig.keys(); !strings.HasSuffix(got, want) {
			t.Errorf("%s: %s, want %s", tag, got, want)
		}
		if got := strings.Contains(remark(&sig), "the broker had kept"); got != (tag == "TT-3") {
			t.Errorf("%s: %s", tag, remark(&sig))
		}
	}
}
