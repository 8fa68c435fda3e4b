package metrics

import (
	"slices"
	"strings"

	"github.com/prometheus/client_golang/prometheus"
	dto "github.com/prometheus/client_model/go"
)

// family is one metric: what all its series share.
type family struct {
	*prometheus.Desc
	name, help string
	labels     []string
	order      []int // of the labels, by their names
	index      int   // in families
}

// families are all that there are, each told by [desc] once.
var families []*family

// mostLabels is how many labels a series has at most.
const mostLabels = 2

func desc(name, help string, labels ...string) *family {
	if len(labels) > mostLabels {
		panic("metrics: too many labels for " + name)
	}
	name = "heatreeve_" + name
	f := &family{Desc: prometheus.NewDesc(name, help, labels, nil), name: name, help: help, labels: labels, index: len(families)}
	for i := range labels {
		f.order = append(f.order, i)
	}
	slices.SortFunc(f.order, func(i, j int) int { return strings.Compare(labels[i], labels[j]) })
	families = append(families, f)
	return f
}

// sample is one series with room for what its message points to, so that many of them are
// made at one time.
type sample struct {
	metric dto.Metric
	value  float64
	pairs  [mostLabels]*dto.LabelPair
}

type (
	gaugeSample struct {
		sample
		gauge dto.Gauge
	}
	counterSample struct {
		sample
		counter dto.Counter
	}
)

// atOnce is how many samples are made at a time.
const atOnce = 64

// sink takes the series of one scrape.
type sink struct {
	gathered []*dto.MetricFamily // by the index of the family; nil without a series
	gauges   []gaugeSample       // not used yet
	counters []counterSample
	pairs    map[label]*dto.LabelPair
}

type label struct{ name, value string }

func newSink() *sink {
	return &sink{gathered: make([]*dto.MetricFamily, len(families)), pairs: make(map[label]*dto.LabelPair)}
}

func (o *sink) gauge(f *family, v float64, labels ...string) {
	if len(o.gauges) == 0 {
		o.gauges = make([]gaugeSample, atOnce)
	}
	s := &o.gauges[0]
	o.gauges = o.gauges[1:]
	s.value, s.gauge.Value, s.metric.Gauge = v, &s.value, &s.gauge
	o.add(f, dto.MetricType_GAUGE, &s.sample, labels)
}

func (o *sink) counter(f *family, v float64, labels ...string) {
	if len(o.counters) == 0 {
		o.counters = make([]counterSample, atOnce)
	}
	s := &o.counters[0]
	o.counters = o.counters[1:]
	s.value, s.counter.Value, s.metric.Counter = v, &s.value, &s.counter
	o.add(f, dto.MetricType_COUNTER, &s.sample, labels)
}

func (o *sink) add(f *family, kind dto.MetricType, s *sample, values []string) {
	n := 0
	for _, i := range f.order {
		if values[i] != "" { // a label that is empty is none
			s.pairs[n] = o.pair(label{f.labels[i], values[i]})
			n++
		}
	}
	s.metric.Label = s.pairs[:n]
	all := o.gathered[f.index]
	if all == nil {
		all = &dto.MetricFamily{Name: &f.name, Help: &f.help, Type: kind.Enum()}
		o.gathered[f.index] = all
	}
	all.Metric = append(all.Metric, &s.metric)
}

// pair returns the message of a label, which all series that bear it share.
func (o *sink) pair(l label) *dto.LabelPair {
	p := o.pairs[l]
	if p == nil {
		p = &dto.LabelPair{Name: &l.name, Value: &l.value}
		o.pairs[l] = p
	}
	return p
}
