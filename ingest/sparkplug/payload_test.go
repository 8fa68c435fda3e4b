package sparkplug

import (
	"encoding/hex"
	"math"
	"strings"
	"testing"

	"heatreeve/ingest/quality"
)

// Encoded by hand from the standard's field numbers (Sparkplug 3.0, chapter 6).
const (
	birthHex = "0880d095ffbc3112120a0562645365711880d095ffbc312004580012210a144e6f646520436f6e74726f6c2f526562697274681880d095ffbc31200b7000121a0a04666c6f7710011880d095ffbc31200a6900000000000004401800"
	dataHex  = "0889f795ffbc31121210011888f795ffbc31690000000000000a401801"
	// A metric's field 9 with the property Quality, Int32, 0.
	badHex = "4a0f0a075175616c697479120408031800"
)

func unhex(t testing.TB, text string) []byte {
	t.Helper()
	b, err := hex.DecodeString(text)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func metrics(t *testing.T, payload []byte) (p Payload, all []Metric) {
	t.Helper()
	if err := p.Open(payload); err != nil {
		t.Fatal(err)
	}
	for {
		var m Metric
		ok, err := p.Next(&m)
		if err != nil {
			t.Fatal(err)
		}
		if !ok {
			return p, all
		}
		all = append(all, m)
	}
}

func TestBirthByHand(t *testing.T) {
	p, all := metrics(t, unhex(t, birthHex))
	if p.Timestamp != 1_700_000_000_000 || !p.Stamped || p.Seq != 0 || !p.Numbered || len(all) != 3 {
		t.Fatalf("%+v with %d metrics; want 1700000000000, 0 and 3", p, len(all))
	}
	if m := all[0]; string(m.Name) != "bdSeq" || m.Datatype != Int64 || m.field != fieldLong || m.bits != 0 || m.Aliased {
		t.Errorf("first %+v", m)
	}
	if m := all[1]; string(m.Name) != rebirth || m.Datatype != Boolean || m.field != fieldBool || m.bits != 0 {
		t.Errorf("second %+v", m)
	}
	m := all[2]
	if x, wrong := m.number(m.Datatype); string(m.Name) != "flow" || !m.Aliased || m.Alias != 1 || m.Datatype != Double || x != 2.5 || wrong != Right {
		t.Errorf("third %+v: %v, %v; want 2.5", m, x, wrong)
	}
}

func TestDataByHand(t *testing.T) {
	p, all := metrics(t, unhex(t, dataHex))
	if p.Timestamp != 1_700_000_005_001 || p.Seq != 1 || len(all) != 1 {
		t.Fatalf("%+v with %d metrics", p, len(all))
	}
	m := all[0]
	if x, wrong := m.number(Double); m.Name != nil || m.Alias != 1 || m.Timestamp != 1_700_000_005_000 || x != 3.25 || wrong != Right {
		t.Errorf("%+v: %v, %v; want 3.25", m, x, wrong)
	}
}

func TestQuality(t *testing.T) {
	var m Metric
	if err := m.read(unhex(t, badHex)); err != nil || !m.Rated || m.Quality != 0 || m.mark() != quality.Rejected {
		t.Errorf("by hand: %+v, %v; want quality 0", m, err)
	}
	for q, want := range map[uint64]quality.Mark{192: quality.None, 0: quality.Rejected, 500: quality.StaleAtSource, 64: quality.Doubted} {
		if err := m.read(named("a").rated(q).b); err != nil || m.mark() != want {
			t.Errorf("quality %d is %v, %v; want %v", q, m.mark(), err, want)
		}
	}
	if err := m.read(named("a").double(1).b); err != nil || m.mark() != quality.None {
		t.Errorf("without the property: %v, %v", m.mark(), err)
	}
	if err := m.read(named("a").varint(metricNull, 1).rated(192).b); err != nil || m.mark() != quality.NoValue {
		t.Errorf("null: %v, %v", m.mark(), err)
	}
}

// Two's complement by the width of the datatype, as chapter 6 of the standard has
// integers travel: 0xFFFFFFD8 as Int32 is −40.
func TestIntegers(t *testing.T) {
	for _, tt := range []struct {
		m    *message
		d    Datatype
		want float64
		ok   bool
	}{
		{named("a").integer(0xFFFFFFD8), Int32, -40, true},
		{named("a").integer(0xFFFFFFD8), Int16, -40, true},
		{named("a").integer(0xFFFFFFD8), Int8, -40, true},
		{named("a").integer(0xFFD8), Int16, -40, true},
		{named("a").integer(0xD8), Int8, -40, true},
		{named("a").integer(0xD8), UInt8, 216, true},
		{named("a").integer(0xD8), Int16, 216, true},
		{named("a").integer(0xFFFFFFD8), UInt32, 4294967256, true},
		{named("a").long(0xFFFFFFD8), UInt32, 4294967256, true},
		{named("a").long(0xFFFFFFFFFFFFFFD8), Int64, -40, true},
		{named("a").integer(0xFFFFFFD8), Int64, -40, true},
		{named("a").long(0xFFFFFFFFFFFFFFD8), Int32, -40, true},
		{named("a").long(0xFFFFFFD8), Int32, -40, true},
		{named("a").long(math.MaxUint64), UInt64, 18446744073709551615, true},
		{named("a").integer(0x80), Int8, -128, true},
		{named("a").integer(0x180), Int8, 0, false},
		{named("a").integer(0x100), UInt8, 0, false},
		{named("a").long(1 << 32), UInt32, 0, false},
		{named("a").long(1 << 40), Int32, 0, false},
		{named("a").integer(7), Double, 0, false},
	} {
		var m Metric
		if err := m.read(tt.m.b); err != nil {
			t.Fatal(err)
		}
		x, wrong := m.number(tt.d)
		if (wrong == Right) != tt.ok || tt.ok && x != tt.want || !tt.ok && wrong != Mismatch {
			t.Errorf("%x as %v is %v, %v; want %v", m.bits, tt.d, x, wrong, tt.want)
		}
	}
}

func TestWhatIsNoNumber(t *testing.T) {
	for name, tt := range map[string]struct {
		m    *message
		d    Datatype
		want Wrong
	}{
		"text":                {named("a").bytes(15, []byte("5")), 12, NotNumber},
		"truth as a number":   {named("a").varint(14, 1), Double, Mismatch},
		"template":            {named("a").bytes(18, named("b").b), 19, NotNumber},
		"nothing":             {named("a"), Double, Missing},
		"NaN":                 {named("a").double(math.NaN()), Double, NotFinite},
		"infinite":            {named("a").float(float32(math.Inf(1))), Float, NotFinite},
		"float as integer":    {named("a").float(1), Int32, Mismatch},
		"no datatype":         {named("a").integer(4), Unknown, NoDatatype},
		"unheard-of datatype": {named("a").integer(4), datatypeOf(77), NoDatatype},
	} {
		var m Metric
		if err := m.read(tt.m.b); err != nil {
			t.Fatal(err)
		}
		if _, wrong := m.number(tt.d); wrong != tt.want {
			t.Errorf("%s: %v, want %v", name, wrong, tt.want)
		}
	}
}

// Fields that a later version of the standard may add are passed over: protocol buffers,
// encoding, wire types 0, 1, 2 and 5.
func TestUnknownFieldsArePassedOver(t *testing.T) {
	added := func(m *message) *message {
		m.varint(200, 9).bytes(201, []byte("x"))
		m.b = append(m.b, 0xd1, 0x0c, 1, 2, 3, 4, 5, 6, 7, 8) // 202, 64 bits
		m.b = append(m.b, 0xdd, 0x0c, 1, 2, 3, 4)             // 203, 32 bits
		return m
	}
	_, all := metrics(t, added(at(5).with(added(named("a").double(1)))).seq(3).b)
	if len(all) != 1 || string(all[0].Name) != "a" || all[0].field != fieldDouble {
		t.Errorf("%+v; want one metric", all)
	}
}

func TestMalformed(t *testing.T) {
	for name, b := range map[string][]byte{
		"text":                  []byte("21.5"),
		"JSON":                  []byte(`{"timestamp":1700000000000,"metrics":[]}`),
		"cut":                   unhex(t, dataHex)[:20],
		"length beyond the end": {0x12, 0x7f, 0x0a},
		"varint without end":    {0x08, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff},
		"field 0":               {0x00, 0x01},
		"group":                 {0x33, 0x34},
		"group in a metric":     at(1).bytes(2, []byte{0x33, 0x34}).b,
		"bad property set":      at(1).with(named("a").bytes(9, []byte{0x0a, 0x20})).b,
		"group in a property":   at(1).with(named("a").bytes(9, []byte{0x33, 0x34})).b,
		"too long":              make([]byte, MaxPayload+1),
	} {
		var p Payload
		err := p.Open(b)
		for ok := true; err == nil && ok; {
			var m Metric
			ok, err = p.Next(&m)
		}
		if err == nil || !strings.Contains(err.Error(), "Sparkplug B") && name != "too long" {
			t.Errorf("%s: error %v", name, err)
		}
	}
}

func TestTopics(t *testing.T) {
	for topic, want := range map[string]Topic{
		"spBv1.0/G/NBIRTH/N":       {Kind: NBirth, Source: Source{"G", "N", ""}},
		"spBv1.0/G/DDATA/N/D 1":    {Kind: DData, Source: Source{"G", "N", "D 1"}},
		"spBv1.0/G/NCMD/N":         {Kind: NCommand, Source: Source{"G", "N", ""}},
		"spBv1.0/STATE/host":       {Kind: StateOfHost, Host: "host"},
		"spBv1.0/G/NDEATH/N":       {Kind: NDeath, Source: Source{"G", "N", ""}},
		"spBv1.0/g/DBIRTH/NDATA/x": {Kind: DBirth, Source: Source{"g", "NDATA", "x"}},
	} {
		got, ok := ParseTopic(topic)
		if !ok || got != want {
			t.Errorf("%q is %+v, %v; want %+v", topic, got, ok, want)
		}
		if want.Kind != StateOfHost && got.Source.Topic(got.Kind) != topic {
			t.Errorf("%q is written %q", topic, got.Source.Topic(got.Kind))
		}
	}
	for _, topic := range []string{"", "spBv1.0", "spBv1.0/", "spAv1.0/G/NDATA/N", "spBv1.0/G/NDATA", "spBv1.0/G/NDATA/", "spBv1.0//NDATA/N",
		"spBv1.0/G/NDATA/N/D", "spBv1.0/G/DDATA/N", "spBv1.0/G/DDATA/N/", "spBv1.0/G/DDATA/N/D/E", "spBv1.0/G/ndata/N", "spBv1.0/G/STATE/N", "spBv1.0/STATE", "spBv1.0/STATE/a/b"} {
		if got, ok := ParseTopic(topic); ok {
			t.Errorf("%q is taken for %+v", topic, got)
		}
	}
}

func TestSources(t *testing.T) {
	for _, text := range []string{"G/N", "G/N/D", "Heat works/Boiler 1/Loop"} {
		if s, err := ParseSource(text); err != nil || s.String() != text {
			t.Errorf("%q is %q, %v", text, s, err)
		}
	}
	for _, text := range []string{"", "G", "G/", "/N", "G/N/", "G/N/D/E", "G/N+", "G/#", "STATE/N", "G/\x00", "G/\xff", "G/" + strings.Repeat("n", 65535)} {
		if s, err := ParseSource(text); err == nil {
			t.Errorf("%q is taken for %+v", text, s)
		}
	}
	got := Source{"G", "N", "D"}.Filters()
	if want := "spBv1.0/G/NBIRTH/N spBv1.0/G/NDEATH/N spBv1.0/G/NDATA/N spBv1.0/G/DBIRTH/N/+ spBv1.0/G/DDEATH/N/+ spBv1.0/G/DDATA/N/+"; strings.Join(got, " ") != want {
		t.Errorf("filters %q; want %q", got, want)
	}
}

// Texts among the properties of a metric are told under their keys, in whatever order keys and
// values stand; numbers are not, and a broken set tells what stands before the break.
func TestTextsOfProperties(t *testing.T) {
	text := func(s string) []byte { return new(message).varint(1, 12).bytes(propertyText, []byte(s)).b }
	number := new(message).varint(1, uint64(Int32)).varint(propertyInt, 192).b
	set := new(message).bytes(setValues, text("°F")).bytes(setValues, number).bytes(setKeys, []byte("engUnit")).bytes(setKeys, []byte(qualityKey)).
		bytes(setKeys, []byte("documentation")).bytes(setValues, text("supply")).b
	const want = "engUnit=°F documentation=supply "
	got := ""
	tell := func(key, text []byte) { got += string(key) + "=" + string(text) + " " }
	if texts(append(set[:len(set):len(set)], 0xff), tell); got != want {
		t.Errorf("broken set: told %q, want %q", got, want)
	}
	got = ""
	s := NewSpace(Options{Nodes: 1, Want: func(Source, []byte) int { return 7 }, Told: func(id int, key, text []byte) {
		if id != 7 {
			t.Errorf("told of %d, want 7", id)
		}
		tell(key, text)
	}})
	birth := at(1000).with(named("T").kind(Double).double(3).bytes(metricProperties, set)).b
	if _, err := s.Take(Topic{Kind: DBirth, Source: Source{Group: "g", Node: "n", Device: "d"}}, birth, 2e9, nil); err != nil || got != want {
		t.Errorf("birth: told %q, %v; want %q", got, err, want)
	}
}
