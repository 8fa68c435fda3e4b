package site

import (
	"math"
	"strings"
	"time"
	"unicode"

	"heatreeve/thermo/unit"
)

// measured are the dimensions that a load can use, those of counters at the end.
var measured = []unit.Dimension{unit.Temperature, unit.Pressure, unit.MassFlow, unit.VolumeFlow, unit.MolarFlow, unit.Ratio, unit.Power,
	unit.Mass, unit.Volume, unit.Amount, unit.Energy, unit.Count}

// readTags reads every tag, and gives a tag at fault its place too, so that loads
// that name it are not reported as well.
func (r *reader) readTags(o object) {
	v, ok := o.need("tags", "at least one tag, such as TT-1: {topic: plant/TT-1, unit: °C, accuracy: IEC 60751 A}")
	if !ok {
		return
	}
	es := v.entries()
	if len(es) == 0 && v.node.Kind != 0 {
		v.emptyMapping("at least one tag")
	}
	r.tags = make(map[string]int, len(es))
	sources := make(map[origin]string, len(es))
	for _, e := range es {
		if e.key.label(e.name) {
			e.key.noQuantity(e.name)
		}
		t := r.tag(e)
		r.tags[e.name] = len(r.site.Tags)
		r.site.Tags = append(r.site.Tags, t)
		source := t.from()
		if other, twice := sources[source]; twice && source.topic != "" {
			e.fault("reads %s as tag %q", t.same(), other)
			continue
		}
		sources[source] = e.name
	}
	r.intoLists(es)
	r.appendLiveness(sources)
}

// origin is where a number comes from: a broker, a topic, and a place in the payload.
type origin struct {
	broker       int
	topic, value string
}

// place is where in the messages of its topic a tag has its value.
func (t *Tag) place() string {
	if t.Samples == nil {
		return t.Value
	}
	return t.Samples.At + " " + t.Value
}

// noQuantity refuses a tag's name that a load would read as a constant.
func (v value) noQuantity(name string) {
	if q, err := unit.Parse(name); err == nil {
		v.fault("the name %q reads as the quantity %v; choose another", name, q)
	}
}

func (r *reader) tag(e entry) Tag {
	o := e.object("tags.*")
	t := Tag{Name: e.name, MaxAge: time.Minute, Min: math.Inf(-1), Max: math.Inf(1), QoS: 1}
	if _, ok := o.get("sparkplug"); ok {
		t.Metric = o.metric()
	} else if v, ok := o.need("topic", "the MQTT topic of the tag, or sparkplug and metric in its stead", "sparkplug"); ok {
		t.Topic = topic(v)
	}
	o.needs("metric", "sparkplug")
	t.Broker = r.chosenBroker(o)
	u, ok := o.need("unit", "the unit of the numbers in the payload, such as °C, m3/h, barg")
	known := ok && r.tagUnit(u, &t)
	if v, ok := o.get("counts"); ok {
		known = r.counter(o, v, &t, known) && known
	} else if known {
		known = u.needNoCounter(&t)
	}
	if v, ok := o.need("accuracy", accuracyForms); ok && known {
		t.Accuracy = r.accuracy(v, t.unitOfError(), t.Offset)
		if t.Counter != nil && t.Accuracy.Abs > 0 {
			v.fault("is not in proportion to what is counted, as that of a counter is; want such as 0.5 %% of reading, and its step as resolution")
		}
	}
	if v, ok := o.get("range"); ok && known && t.Counter == nil {
		if lo, hi, ok := r.span(v, t.Unit); ok {
			t.Min, t.Max = lo, hi
		}
	}
	o.setDuration("max_age", &t.MaxAge, time.Second, 7*day, "1 s to 7 d")
	if t.MaxAge < r.site.Timing.Grid {
		e.fault("max_age %v is shorter than the grid of %v", t.MaxAge, r.site.Timing.Grid)
	}
	if t.Metric == nil {
		o.payload(&t)
	}
	o.signal(&t, known)
	if known {
		o.steps(&t)
		o.checkCounter(&t, r.site.Timing.Grid)
	}
	r.reports(o, &t)
	if known {
		r.screen(o, &t)
	}
	return t
}

// unitOfError is the unit in which the accuracy of a tag is read: of a counter, that of its
// rate.
func (t *Tag) unitOfError() unit.Unit {
	u := t.Unit
	u.Dimension = t.rate()
	return u
}

// tagUnit reads the unit and how it leads to SI.
func (r *reader) tagUnit(v value, t *Tag) bool {
	s, ok := v.text()
	if !ok {
		return false
	}
	u, err := unit.LookupAs(s, measured...)
	if raw, other := unit.LookupAs(s, unit.Current, unit.Resistance); err != nil && other == nil {
		v.fault("%v is of a raw signal; the unit is that of the quantity, and signal says what it comes by, such as 4-20 mA or Pt100", raw)
		return false
	}
	if err != nil {
		v.fault("%v", err)
		return false
	}
	t.Unit, t.Numbers, t.Scale, t.Offset = u, u, u.Factor, u.Offset
	if u.Gauge {
		t.Offset, r.gauge = r.site.Barometer, true
	}
	t.Min, t.Max = 0, largest[u.Dimension]
	if _, isFlow := largestFlow[u.Dimension]; isFlow || u.Dimension == unit.Power {
		t.Min = -t.Max // a little below zero while there is none
	}
	return true
}

// largest is what a tag without a range may read, SI: from absolute zero, a vacuum or
// nothing up to what no instrument of a plant shows, but far below what a transmitter
// without a signal may send, such as the largest 32-bit float. A ratio is up to 102 %,
// since humidity sensors in saturated air show a little more than 100 %.
var largest = map[unit.Dimension]float64{
	unit.Temperature: 5000, unit.Pressure: 1e9, unit.Ratio: 1.02, unit.Power: 1e11,
	unit.MassFlow: 1e5, unit.VolumeFlow: 1e5, unit.MolarFlow: 1e7,
	unit.Mass: 1e15, unit.Volume: 1e12, unit.Amount: 1e16, unit.Energy: 1e21,
}

// largestFlow are the flows among them.
var largestFlow = map[unit.Dimension]float64{
	unit.MassFlow: largest[unit.MassFlow], unit.VolumeFlow: largest[unit.VolumeFlow], unit.MolarFlow: largest[unit.MolarFlow],
}

// payload reads where in a message the value and its time stand.
func (o object) payload(t *Tag) {
	t.Value = o.pointer("value")
	o.samples(t)
	at, timed := o.get("time")
	if _, ok := o.get("value"); timed && !ok && t.Samples == nil {
		at.fault("stands without value; a payload with a time is JSON, so tell where the value is, such as value: /v")
	}
	o.stamp(t)
	o.said(t)
}

// stamp reads where in a message the time stands, and how it is written.
func (o object) stamp(t *Tag) {
	t.Time = o.pointer("time")
	at, timed := o.get("time")
	if timed && t.Time != "" && t.Time == t.Value && (t.Samples == nil || t.Samples.Step == 0) {
		at.fault("is the same place as value")
	}
	v, ok := o.get("time_unit")
	if !ok {
		return
	}
	if !timed {
		v.fault("stands without time; give time as well, such as time: /ts")
	}
	t.TimeFormat, _ = v.oneOf("s", "ms", "us", "rfc3339")
}

// pointer reads a JSON Pointer as RFC 6901 writes it.
func (o object) pointer(key string) string {
	v, ok := o.get(key)
	if !ok {
		return ""
	}
	s, ok := v.text()
	if !ok {
		return ""
	}
	bare := strings.NewReplacer("~0", "", "~1", "").Replace(s)
	switch {
	case !strings.HasPrefix(s, "/"):
		v.fault("%q is no JSON Pointer; it begins with a slash, such as /v or /data/value", clip(s))
	case strings.Contains(bare, "~"):
		v.fault("%q is no JSON Pointer: write ~0 for ~ and ~1 for / within a name", clip(s))
	default:
		return s
	}
	return ""
}

// topic checks what MQTT 3.1.1 (OASIS 2014, 4.7) lets a message be published to.
func topic(v value) string {
	s, ok := v.text()
	switch {
	case !ok:
	case strings.ContainsAny(s, "+#"):
		v.fault("topic %q has a wildcard; a tag reads one topic, without + and #", clip(s))
	case strings.HasPrefix(s, "$"):
		v.fault("topic %q begins with $, which is the broker's own", clip(s))
	case len(s) > 65535:
		v.fault("the topic is %d bytes long; MQTT allows 65535", len(s))
	case strings.ContainsFunc(s, unicode.IsControl):
		v.fault("topic %q has a control character", clip(s))
	default:
		return s
	}
	return ""
}

var kelvin = unit.Unit{Symbol: "K", Dimension: unit.Temperature, Factor: 1}

// span reads a list of two quantities, low and high, in the dimension of u. A
// pressure is gauge where u is, or 0 bar might mean either, and a ratio by mass where u is.
func (r *reader) span(v value, u unit.Unit) (lo, hi float64, ok bool) {
	vs := v.items()
	if len(vs) != 2 {
		if vs != nil {
			v.fault("want two quantities, low and high, found %d", len(vs))
		}
		return 0, 0, false
	}
	var ends [2]float64
	for i, end := range vs {
		q, ok := end.quantity(u.Dimension)
		switch {
		case !ok:
			return 0, 0, false
		case q.Unit.Gauge != u.Gauge:
			end.fault("%v and the tag's unit %v are not both gauge or both absolute", q, u)
			return 0, 0, false
		case !sameBasis(q.Unit, u):
			end.fault("%v and the tag's unit %v are not of the same; want %v", q, u, u)
			return 0, 0, false
		}
		ends[i] = r.absolute(q)
	}
	if ends[0] >= ends[1] {
		v.fault("the range is empty; want the low end first")
		return 0, 0, false
	}
	return ends[0], ends[1], true
}

// absolute is the SI value with the barometer under a gauge pressure.
func (r *reader) absolute(q unit.Quantity) float64 {
	if q.Unit.Gauge {
		r.gauge = true
		return q.SI() + r.site.Barometer
	}
	return q.SI()
}

// emptyMapping adds the fault of a mapping without entries.
func (v value) emptyMapping(want string) {
	if len(v.node.Content) == 0 && v.kind() == "a mapping" {
		v.fault("is empty; want %s", want)
	}
}
