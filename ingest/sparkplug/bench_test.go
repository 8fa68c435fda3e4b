package sparkplug

import (
	"encoding/json"
	"fmt"
	"strings"
	"testing"
)

const inMessage = 20

// steady is a node that has told its births, and one of its messages of data: twenty
// metrics by alias, each with its own stamp.
func steady(t testing.TB) (s *Space, topic Topic, payload []byte) {
	t.Helper()
	s = NewSpace(Options{Ahead: 1 << 62, Want: func(_ Source, name []byte) int {
		var id int
		if _, err := fmt.Sscanf(string(name), "m%d", &id); err != nil {
			return -1
		}
		return id
	}})
	s.Follow(nodeN)
	birth, data := at(sec(0)).seq(0).with(bdSeq(0)), at(sec(1))
	for i := range uint64(inMessage) {
		birth.with(named(fmt.Sprint("m", i)).alias(i).kind(Double).double(1))
		data.with(aliased(i, 1).double(20.25 + float64(i)))
	}
	if out, err := s.Take(Topic{Kind: NBirth, Source: nodeN}, birth.b, start*1e6, nil); err != nil || len(out) != inMessage {
		t.Fatal(out, err)
	}
	return s, Topic{Kind: NData, Source: nodeN}, data.b // without a number, so that it can be taken again and again
}

func perMetric(b *testing.B) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/inMessage, "ns/metric")
}

func BenchmarkData(b *testing.B) {
	s, topic, payload := steady(b)
	var out []Reading
	b.ReportAllocs()
	for b.Loop() {
		var err error
		if out, err = s.Take(topic, payload, start*1e6, out[:0]); err != nil || len(out) != inMessage {
			b.Fatal(err)
		}
	}
	perMetric(b)
}

// BenchmarkGeneralDecoder decodes the same message by google.golang.org/protobuf, and
// does nothing with it.
func BenchmarkGeneralDecoder(b *testing.B) {
	_, _, payload := steady(b)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := generic(payload); err != nil {
			b.Fatal(err)
		}
	}
	perMetric(b)
}

// BenchmarkJSON decodes the same values by encoding/json, into a slice of structs.
func BenchmarkJSON(b *testing.B) {
	var text strings.Builder
	for i := range inMessage {
		fmt.Fprintf(&text, `,{"alias":%d,"timestamp":%d,"value":%g}`, i, sec(1), 20.25+float64(i))
	}
	payload := []byte(fmt.Sprintf(`{"timestamp":%d,"metrics":[%s]}`, sec(1), text.String()[1:]))
	b.ReportAllocs()
	for b.Loop() {
		var m struct {
			Timestamp uint64
			Metrics   []struct {
				Alias, Timestamp uint64
				Value            float64
			}
		}
		if err := json.Unmarshal(payload, &m); err != nil || len(m.Metrics) != inMessage {
			b.Fatal(err)
		}
	}
	perMetric(b)
}
