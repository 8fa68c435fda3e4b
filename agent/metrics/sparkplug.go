package metrics

import "heatreeve/agent/view"

func (o *sink) sparkplug(p *view.Sparkplug) {
	for _, k := range []struct {
		kind string
		n    uint64
	}{
		{"birth", p.Births}, {"death", p.Deaths}, {"late-death", p.LateDeaths}, {"before-birth", p.Unborn},
		{"malformed", p.Malformed}, {"retained", p.Retained}, {"crowded", p.Crowded},
	} {
		o.counter(plugged, float64(k.n), k.kind)
	}
	o.counter(gaps, float64(p.Gaps))
	o.counter(missed, float64(p.Missed))
	o.counter(reordered, float64(p.Reordered))
	o.counter(noAlias, float64(p.UnknownAlias))
	o.counter(requests, float64(p.Requests))
}
