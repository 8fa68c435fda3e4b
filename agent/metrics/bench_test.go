package metrics

import (
	"fmt"
	"net/http"
	"net/http/httptest"
	"syscall"
	"testing"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/promhttp"
	dto "github.com/prometheus/client_model/go"

	"heatreeve/agent/view"
)

// BenchmarkScrape answers scrapes of 5,000 series and more, uncompressed, by turns from the collector and
// from the same series held in GaugeVecs, which nobody sets meanwhile. It counts what the process uses of
// the processor, collecting the garbage included.
func BenchmarkScrape(b *testing.B) {
	s := manyLoads(250)
	collector := NewCollector(func() *view.Snapshot { return s }, func() int64 { return instant })
	vecs, series := gaugeVecs(b, collector)
	ours, theirs := page(collector.Beside(prometheus.NewRegistry())), page(vecs)
	var oursTook, theirsTook time.Duration
	for b.Loop() {
		oursTook += cost(b, ours, series)
		theirsTook += cost(b, theirs, series)
	}
	b.ReportMetric(float64(oursTook)/float64(b.N*series), "ns/series")
	b.ReportMetric(float64(theirsTook)/float64(b.N*series), "ns/series-gaugevecs")
	b.ReportMetric(float64(series), "series")
}

func page(from prometheus.Gatherer) http.Handler {
	return promhttp.HandlerFor(from, promhttp.HandlerOpts{})
}

// cost is what some scrapes use, each.
func cost(b *testing.B, h http.Handler, series int) time.Duration {
	b.Helper()
	const scrapes = 10
	begun := processor(b)
	for range scrapes {
		w := void{header: http.Header{}}
		h.ServeHTTP(&w, httptest.NewRequest(http.MethodGet, "/metrics", nil))
		if w.bytes < 50*series {
			b.Fatalf("%d bytes for %d series", w.bytes, series)
		}
	}
	return (processor(b) - begun) / scrapes
}

// processor is what this process has used of the processor.
func processor(b *testing.B) time.Duration {
	b.Helper()
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		b.Fatal(err)
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}

// manyLoads is a snapshot of a plant of n loads with a flow, two temperatures and a pressure each.
func manyLoads(n int) *view.Snapshot {
	s := snapshot()
	load, tag := s.Loads[0], s.Tags[0]
	s.Loads, s.Tags = nil, nil
	for i := range n {
		load.Name = fmt.Sprintf("load-%d", i)
		s.Loads = append(s.Loads, load)
	}
	tag.Name = "TT-1"
	s.Tags = append(s.Tags, tag)
	return s
}

// gaugeVecs returns the series of a registry in GaugeVecs, a vector a metric.
func gaugeVecs(b *testing.B, from prometheus.Gatherer) (reg *prometheus.Registry, series int) {
	b.Helper()
	families, err := from.Gather()
	if err != nil {
		b.Fatal(err)
	}
	reg = prometheus.NewRegistry()
	for _, f := range families {
		var names []string
		for _, l := range f.Metric[0].Label {
			names = append(names, l.GetName())
		}
		vec := prometheus.NewGaugeVec(prometheus.GaugeOpts{Name: f.GetName(), Help: f.GetHelp()}, names)
		reg.MustRegister(vec)
		for _, m := range f.Metric {
			labels := prometheus.Labels{}
			for _, l := range m.Label {
				labels[l.GetName()] = l.GetValue()
			}
			vec.With(labels).Set(value(m))
			series++
		}
	}
	return reg, series
}

func value(m *dto.Metric) float64 {
	if m.Counter != nil {
		return m.Counter.GetValue()
	}
	return m.Gauge.GetValue()
}

// void is a response that goes nowhere.
type void struct {
	header http.Header
	bytes  int
}

func (v *void) Header() http.Header { return v.header }

func (v *void) WriteHeader(int) {}

func (v *void) Write(p []byte) (int, error) {
	v.bytes += len(p)
	return len(p), nil
}
