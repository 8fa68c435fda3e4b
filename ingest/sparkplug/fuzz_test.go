package sparkplug

import (
	"encoding/hex"
	"math"
	"testing"

	"google.golang.org/protobuf/reflect/protoreflect"

	"heatreeve/ingest/quality"
)

func seeds(f *testing.F) [][]byte {
	var all [][]byte
	for _, text := range []string{birthHex, dataHex} {
		b, err := hex.DecodeString(text)
		if err != nil {
			f.Fatal(err)
		}
		all = append(all, b)
	}
	return append(all, nbirth(5, 0, 1).b, dbirth(1, 2).b, ndeath(5).b, at(5).seq(2).with(aliased(1, 1).integer(0xFFFFFFD8).rated(500)).b,
		at(5).with(named("flow").float(2).varint(metricHistorical, 1)).with(named("level").long(1<<40).varint(metricNull, 1)).b)
}

// FuzzPayload claims: whatever is read is what the general decoder of
// google.golang.org/protobuf reads from the same bytes.
func FuzzPayload(f *testing.F) {
	for _, b := range seeds(f) {
		f.Add(b)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		var p Payload
		err := p.Open(b)
		var all []Metric
		for ok := err == nil; ok; {
			var m Metric
			if ok, err = p.Next(&m); ok && err == nil {
				all = append(all, m)
			}
			ok = ok && err == nil
		}
		if err != nil {
			return
		}
		want, err := generic(b)
		if err != nil {
			return // it looks into what is passed over here
		}
		if p.Stamped != has(want, "timestamp") || p.Timestamp != number(want, "timestamp") || p.Numbered != has(want, "seq") || p.Seq != number(want, "seq") {
			t.Errorf("%x: %+v, want %v", b, p, want)
		}
		list := want.Get(field1(want, "metrics")).List()
		if list.Len() != len(all) {
			t.Fatalf("%x: %d metrics, want %d", b, len(all), list.Len())
		}
		for i := range all {
			sameMetric(t, &all[i], list.Get(i).Message())
		}
	})
}

func field1(m protoreflect.Message, name protoreflect.Name) protoreflect.FieldDescriptor {
	return m.Descriptor().Fields().ByName(name)
}

func has(m protoreflect.Message, name protoreflect.Name) bool { return m.Has(field1(m, name)) }

func number(m protoreflect.Message, name protoreflect.Name) uint64 {
	return m.Get(field1(m, name)).Uint()
}

func sameMetric(t *testing.T, m *Metric, want protoreflect.Message) {
	yes := func(name protoreflect.Name) bool { return want.Get(field1(want, name)).Bool() }
	if string(m.Name) != string(want.Get(field1(want, "name")).Bytes()) || m.Aliased != has(want, "alias") || m.Alias != number(want, "alias") ||
		m.Stamped != has(want, "timestamp") || m.Timestamp != number(want, "timestamp") || m.Datatype != datatypeOf(number(want, "datatype")) ||
		m.Historical != yes("is_historical") || m.Transient != yes("is_transient") || m.Null != yes("is_null") {
		t.Errorf("%+v, want %v", m, want)
	}
	switch m.field {
	case fieldInt:
		if m.bits != number(want, "int_value") {
			t.Errorf("%+v, want %v", m, want)
		}
	case fieldLong:
		if m.bits != number(want, "long_value") {
			t.Errorf("%+v, want %v", m, want)
		}
	case fieldDouble:
		if m.bits != math.Float64bits(want.Get(field1(want, "double_value")).Float()) {
			t.Errorf("%+v, want %v", m, want)
		}
	case fieldFloat:
		x, y := float64(math.Float32frombits(uint32(m.bits))), want.Get(field1(want, "float_value")).Float()
		if x != y && !(math.IsNaN(x) && math.IsNaN(y)) {
			t.Errorf("%+v, want %v", m, want)
		}
	}
}

// FuzzSpace claims, of any messages in any order: what can be used is finite unless it is
// bad, and stamped within bounds; the end of a metric is told once; what is kept
// stays bounded.
func FuzzSpace(f *testing.F) {
	for i, b := range seeds(f) {
		f.Add(b, nbirth(5, 0, 1).b, []byte{byte(i), 0, 6, 5, 2, 1, 4})
	}
	f.Add(nbirth(5, 0, 1).b, ndeath(5).b, []byte{0, 10, 2, 11, 0})
	kinds := []Kind{NBirth, NData, NDeath, DBirth, DData, DDeath, NCommand, DCommand}
	f.Fuzz(func(t *testing.T, a, b []byte, script []byte) {
		p := newPlant(t, Options{Devices: 2, Metrics: 8, Earliest: second, Random: func() float64 { return 0 }})
		gone := map[int]bool{}
		for _, step := range script[:min(len(script), 50)] {
			p.now += second
			payload, source, k := a, nodeN, kinds[step%8]
			if step&8 != 0 {
				payload = b
			}
			if k.ofDevice() {
				source = Source{Group: "G", Node: "N", Device: string('A' + rune(step>>6))}
				if step&16 != 0 {
					source = deviceD
				}
			}
			var out []Reading
			if step&32 != 0 {
				out = p.Lost(p.now, nil)
			}
			out, _ = p.Take(Topic{Kind: k, Source: source}, payload, p.now, out)
			for _, r := range out {
				checkReading(t, p, r)
				if r.Wrong == Right && !r.Historical && r.ID < nodeAlive {
					if over := r.Mark == quality.Offline; over && gone[r.ID] {
						t.Errorf("the end of metric %d is told twice", r.ID)
					}
					gone[r.ID] = r.Mark == quality.Offline
				}
			}
		}
		if n := p.nodes[nodeN]; len(n.aliases) > 8 || len(n.devices) > 2 || len(p.metrics) > temperature+1 || len(p.nodes) > 1 {
			t.Errorf("kept %d aliases, %d devices, %d metrics", len(n.aliases), len(n.devices), len(p.metrics))
		}
	})
}

func checkReading(t *testing.T, p *plant, r Reading) {
	if r.Wrong != Right {
		return
	}
	if bad := r.Mark.Quality() == quality.Bad; !bad && (math.IsNaN(r.Value) || math.IsInf(r.Value, 0)) {
		t.Errorf("%+v is not finite", r)
	}
	if r.At < second || r.At > p.now+p.o.Ahead+1000 {
		t.Errorf("%+v is out of bounds at %d", r, p.now)
	}
	if r.ID >= nodeAlive && r.Value != 0 && r.Value != 1 {
		t.Errorf("%+v is neither alive nor gone", r)
	}
}
