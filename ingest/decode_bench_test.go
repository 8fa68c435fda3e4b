package ingest

import (
	"bytes"
	"encoding/json"
	"fmt"
	"testing"
	"time"
)

type sample struct {
	tags    []Tag
	payload []byte
}

// payloads are the shapes that plants send, by name.
func payloads() map[string]sample {
	text := celsius()
	text.TimeFormat = TimeRFC3339
	var many []Tag
	var doc bytes.Buffer
	doc.WriteString(`{"t":1774745940123,"device":"gateway 3","v":{`)
	for i := range 50 {
		tag := celsius()
		tag.Name, tag.Value = fmt.Sprintf("TT-%d", i), fmt.Sprintf("/v/TT-%d", i)
		many = append(many, tag)
		fmt.Fprintf(&doc, `"TT-%d":%d.25,`, i, 20+i)
	}
	doc.Truncate(doc.Len() - 1)
	doc.WriteString("}}")
	return map[string]sample{
		"bare":    {[]Tag{bare()}, []byte("63.48")},
		"number":  {[]Tag{celsius()}, []byte(`{"t":1774745940123,"v":63.48,"q":"good"}`)},
		"text":    {[]Tag{text}, []byte(`{"t":"2026-03-29T00:59:00.123Z","v":63.48,"q":"good"}`)},
		"50 tags": {many, doc.Bytes()},
	}
}

func BenchmarkDecode(b *testing.B) {
	for name, c := range payloads() {
		b.Run(name, func(b *testing.B) {
			d, err := NewDecoder(c.tags, 0)
			if err != nil {
				b.Fatal(err)
			}
			var out []Outcome
			b.ReportAllocs()
			for b.Loop() {
				out, _ = d.Decode(c.tags[0].Topic, c.payload, arrival, false, out[:0])
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(len(out)), "ns/reading")
		})
	}
}

// BenchmarkStandardLibrary does the least that encoding/json needs for the same
// readings: into a struct, and for the many tags into a map.
func BenchmarkStandardLibrary(b *testing.B) {
	all := payloads()
	b.Run("number", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			var m struct {
				T int64   `json:"t"`
				V float64 `json:"v"`
			}
			if err := json.Unmarshal(all["number"].payload, &m); err != nil || m.V == 0 {
				b.Fatal(err, m)
			}
		}
	})
	b.Run("text", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			var m struct {
				T time.Time `json:"t"`
				V float64   `json:"v"`
			}
			if err := json.Unmarshal(all["text"].payload, &m); err != nil || m.V == 0 {
				b.Fatal(err, m)
			}
		}
	})
	b.Run("50 tags", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			var m struct {
				T int64              `json:"t"`
				V map[string]float64 `json:"v"`
			}
			if err := json.Unmarshal(all["50 tags"].payload, &m); err != nil || len(m.V) != 50 {
				b.Fatal(err, m)
			}
		}
	})
}
