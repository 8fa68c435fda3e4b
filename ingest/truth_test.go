package ingest

import (
	"testing"

	"google.golang.org/protobuf/encoding/protowire"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
)

// pump is a tag in % that true and false may stand for.
func pump(value string) Tag {
	return Tag{Name: "P-1", Topic: "plant/P-1", Value: value, Scale: 0.01, Max: 1.2, QoS: 1, Truth: true}
}

// True is 1 in SI and false 0, as JSON and alone, of a tag that takes them; numbers go on being
// numbers, and what is said in words is none.
func TestTrueAndFalse(t *testing.T) {
	for _, tt := range []struct {
		value, payload string
		want           float64
		refused        Reason // where want is less than 0
	}{
		{"", "true", 1, 0},
		{"", " false\r\n", 0, 0},
		{"", "25", 0.25, 0},
		{"", "True", -1, NotANumber},
		{"", `"true"`, -1, WrongType},
		{"/on", `{"on":true}`, 1, 0},
		{"/on", `{"on":false}`, 0, 0},
		{"/on", `{"on":100}`, 1, 0},
		{"/on", `{"on":"true"}`, -1, WrongType},
		{"/on", `{"on":[true]}`, -1, WrongType},
	} {
		o := decodeOne(t, pump(tt.value), tt.payload, false)
		if o.Refusal == nil && o.Value != tt.want || o.Refusal != nil && (tt.want >= 0 || o.Refusal.Reason != tt.refused) {
			t.Errorf("%s: %+v, want %v or refusal %v", tt.payload, o, tt.want, tt.refused)
		}
	}
}

// truthful writes a Boolean metric into a payload with a sequence number.
func truthful(name string, seq, v uint64, bad bool) []byte {
	m := protowire.AppendString(protowire.AppendTag(nil, 1, protowire.BytesType), name)
	m = protowire.AppendVarint(protowire.AppendTag(m, 3, protowire.VarintType), uint64(millis+int64(seq)))
	m = protowire.AppendVarint(protowire.AppendTag(m, 4, protowire.VarintType), uint64(sparkplug.Boolean))
	if bad {
		m = append(m, 0x4a, 0x0f, 0x0a, 0x07, 'Q', 'u', 'a', 'l', 'i', 't', 'y', 0x12, 0x04, 0x08, 0x03, 0x18, 0x00)
	}
	m = protowire.AppendVarint(protowire.AppendTag(m, 14, protowire.VarintType), v)
	b := protowire.AppendBytes(protowire.AppendTag(nil, 2, protowire.BytesType), m)
	return protowire.AppendVarint(protowire.AppendTag(b, 3, protowire.VarintType), seq)
}

// A Boolean of Sparkplug B is read by such a tag, and refused by any other.
func TestBooleanMetric(t *testing.T) {
	running := pump("")
	running.Topic, running.Metric = "", &Metric{Source: works, Name: "running"}
	for _, tt := range []struct {
		tag  Tag
		v    uint64
		want float64
		ok   bool
	}{
		{running, 1, 1, true},
		{running, 0, 0, true},
		{metric("running"), 1, 0, false},
	} {
		d, err := NewDecoder([]Tag{tt.tag}, 0)
		if err != nil {
			t.Fatal(err)
		}
		d.Decode(works.Topic(sparkplug.NBirth), unhex(t, birthHex), millis*1e6, false, nil)
		out, _ := d.Decode(works.Topic(sparkplug.NData), truthful("running", 1, tt.v, false), millis*1e6, false, nil)
		if len(out) != 1 || (out[0].Refusal == nil) != tt.ok || tt.ok && out[0].Value != tt.want || !tt.ok && out[0].Refusal.Reason != WrongType {
			t.Errorf("%+v: %+v", tt, out)
		}
		out, _ = d.Decode(works.Topic(sparkplug.NData), truthful("running", 2, tt.v, true), millis*1e6, false, nil)
		if len(out) != 1 || out[0].Refusal != nil || out[0].Mark.Quality() != quality.Bad {
			t.Errorf("%+v and bad: %+v", tt, out)
		}
	}
}
