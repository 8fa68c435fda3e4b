package site

import (
	"time"
	_ "time/tzdata" // a small box may carry no time zones of its own

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// reader builds a Site. What it has read of the tags and fluids, right or wrong,
// it remembers, so that one fault does not draw others after it.
type reader struct {
	site     *Site
	file     string
	tags     map[string]int // declared names to the index in site.Tags
	told     []told         // topics that tell whether sources are alive
	besides  []beside
	brokerAt []value                 // where each of the brokers stands in the file
	fluids   map[string]thermo.Fluid // nil where the declaration is at fault
	gauge    bool                    // the file has a gauge pressure
	tellers  map[int]value           // by load, where its design names an exchanger
}

func (r *reader) read(v value) {
	o := v.object("")
	if t, ok := o.need("site", "the plant's name, such as site: Brackwater Creamery"); ok {
		r.site.Name, _ = name(t)
	}
	if t, ok := o.need("timezone", "an IANA name such as Europe/Dublin"); ok {
		r.site.Zone = zone(t)
	}
	r.barometer(o)
	r.brokers(o)
	r.timing(o)
	r.history(o)
	r.readFluids(o)
	r.readTags(o)
	r.readBesides()
	r.readLoads(o)
	r.readExchangers(o)
	r.readTellers()
	r.checkTopics()
	r.publish(o)
	r.shownIn(o)
	if r.gauge {
		o.need("barometer", "the air pressure at the plant, such as 101.3 kPa: the file has gauge pressures")
	}
}

// name reads a text that serves as a label.
func name(v value) (string, bool) {
	s, ok := v.text()
	return s, ok && v.label(s)
}

func zone(v value) *time.Location {
	s, ok := v.text()
	if !ok {
		return nil
	}
	z, err := time.LoadLocation(s)
	if err != nil || s == "Local" {
		v.fault("time zone %q is not known; want an IANA name such as Europe/Dublin or UTC", clip(s))
		return nil
	}
	return z
}

// barometer reads the site's air pressure. The limits leave room for any
// inhabited place: 50 kPa is about 5 500 m above the sea.
func (r *reader) barometer(o object) {
	v, ok := o.get("barometer")
	if !ok {
		return
	}
	q, ok := v.quantity(unit.Pressure)
	switch {
	case !ok:
	case q.Unit.Gauge:
		v.fault("%v is a gauge pressure; the barometer is absolute, such as 100.9 kPa", q)
	case q.SI() < 50e3 || q.SI() > 110e3:
		v.fault("%v is no pressure of the air; allowed: 50 kPa to 110 kPa, at the plant and not reduced to sea level", q)
	default:
		r.site.Barometer = q.SI()
	}
}
