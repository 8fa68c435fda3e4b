package agent

import (
	"math"
	"slices"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
)

// hasMetrics tells whether a tag reads a Sparkplug metric.
func hasMetrics(s *site.Site) bool {
	return slices.ContainsFunc(s.Tags, func(t site.Tag) bool { return t.Metric != nil })
}

// endMetrics ends, at the start, what Sparkplug metrics held at the stop or the kill: no
// broker keeps their messages, so what has become of them meanwhile is not known, and one
// that reports on change would hold on through all of it. They have no value from where the
// accounts had come to, and hold again once they are heard.
func (a *Agent) endMetrics(r *rhythm, s loads.Snapshot) {
	var ends []ingest.Reading
	for i := range s.Tags {
		tag, newest := &a.site.Tags[i], s.Tags[i].Newest
		if tag.Metric == nil || newest == 0 {
			continue
		}
		end := ingest.Reading{Tag: i, At: max(newest, s.Through) + 1, Value: math.NaN(), Mark: quality.Offline}
		if tag.Liveness != nil {
			end.Value, end.Mark = 0, quality.None
		}
		ends = append(ends, end)
	}
	if len(ends) > 0 {
		r.books.beat(ends, r.pace.through)
	}
}
