package ingest

import (
	"bytes"
	"encoding/json"
	"fmt"
	"testing"
	"time"

	"heatreeve/ingest/signal"
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
	rated, worded, named := saying(OPCUA)(), saying(OwnWords)(), inUnit()
	loop, platinum, root := celsius(), celsius(), celsius()
	loop.Signal = signal.Current{Lo: 273.15, Hi: 473.15, Slack: 0.01}
	platinum.Signal = signal.Resistance{R0: 100, Lead: 0.4}
	root.Signal, root.Min = signal.RootOfCurrent(300, 0.05, 0.01), 0
	list, pairs, steps := sampled(), sampled(), stepped()
	pairs.Value, pairs.Time = "/1", "/0"
	var objects, arrays, numbers bytes.Buffer
	for i := range 60 {
		comma := ","[:min(i, 1)]
		fmt.Fprintf(&objects, `%s{"t":%d,"v":%d.25}`, comma, 1774745880000+1000*i, 20+i)
		fmt.Fprintf(&arrays, `%s[%d,%d.25]`, comma, 1774745880000+1000*i, 20+i)
		fmt.Fprintf(&numbers, `%s%d.25`, comma, 20+i)
	}
	return map[string]sample{
		"OPC UA":      {[]Tag{rated}, []byte(`{"t":1774745940123,"v":63.48,"q":1083179008}`)},
		"OPC UA name": {[]Tag{rated}, []byte(`{"t":1774745940123,"v":63.48,"q":"UncertainEngineeringUnitsExceeded"}`)},
		"word":        {[]Tag{worded}, []byte(`{"t":1774745940123,"v":63.48,"q":"held"}`)},
		"unit":        {[]Tag{named}, []byte(`{"t":1774745940123,"v":63.48,"u":"degC"}`)},
		"null":        {[]Tag{celsius()}, []byte(`{"t":1774745940123,"v":null}`)},
		"4-20 mA":     {[]Tag{loop}, []byte(`{"t":1774745940123,"v":9.0784}`)},
		"Pt100":       {[]Tag{platinum}, []byte(`{"t":1774745940123,"v":124.53}`)},
		"Pt100 ice":   {[]Tag{platinum}, []byte(`{"t":1774745940123,"v":92.53}`)},
		"root":        {[]Tag{root}, []byte(`{"t":1774745940123,"v":12.53}`)},
		"60 samples":  {[]Tag{list}, []byte(`{"s":[` + objects.String() + `]}`)},
		"60 pairs":    {[]Tag{pairs}, []byte(`{"s":[` + arrays.String() + `]}`)},
		"60 numbers":  {[]Tag{steps}, []byte(`{"t":1774745880,"s":[` + numbers.String() + `]}`)},

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

// document is what a program that knows the payloads would have encoding/json fill in; the
// many tags go into a map.
type document struct {
	T int64    `json:"t"`
	V *float64 `json:"v"`
	Q any      `json:"q"`
	U string   `json:"u"`
}

// BenchmarkStandardLibrary does the least that encoding/json needs for the same readings.
func BenchmarkStandardLibrary(b *testing.B) {
	targets := map[string]func() any{
		"bare": func() any { return new(float64) },
		"text": func() any {
			return new(struct {
				T time.Time `json:"t"`
				V float64   `json:"v"`
			})
		},
		"50 tags": func() any {
			return new(struct {
				T int64              `json:"t"`
				V map[string]float64 `json:"v"`
			})
		},
		"60 samples": func() any {
			return new(struct {
				S []struct {
					T int64   `json:"t"`
					V float64 `json:"v"`
				} `json:"s"`
			})
		},
		"60 pairs": func() any {
			return new(struct {
				S [][2]float64 `json:"s"`
			})
		},
		"60 numbers": func() any {
			return new(struct {
				T int64     `json:"t"`
				S []float64 `json:"s"`
			})
		},
	}
	for name, c := range payloads() {
		target := targets[name]
		if target == nil {
			target = func() any { return new(document) }
		}
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if err := json.Unmarshal(c.payload, target()); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
