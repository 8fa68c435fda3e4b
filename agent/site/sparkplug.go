package site

import (
	"slices"
	"strings"
	"unicode/utf8"
)

// sparkplugForms tells how a source is written.
const sparkplugForms = "want group/node, or group/node/device, the ids as in the topics below spBv1.0"

// besideMetric are the keys that have no place beside a metric, which carries its own value
// and time, and of which births and deaths tell whether its source is alive.
var besideMetric = []string{"topic", "value", "time", "time_unit", "quality", "unit_at", "samples", "step", "alive"}

// metric reads which metric of which source a tag reads.
func (o object) metric() *Metric {
	for _, key := range besideMetric {
		if v, ok := o.get(key); ok {
			v.fault("stands beside sparkplug, whose metrics carry their value, time and quality, and whose births and deaths tell what is alive; leave it out")
		}
	}
	m := &Metric{}
	if v, ok := o.get("sparkplug"); ok {
		m.source(v)
	}
	if v, ok := o.need("metric", "the name of the metric, as in the birth of its source"); ok {
		s, ok := v.text()
		switch {
		case !ok:
		case len(s) > longestMetric || strings.ContainsFunc(s, unprintable):
			v.fault("want the name of a metric of at most %d bytes of printable characters", longestMetric)
		case s == "bdSeq" || strings.HasPrefix(s, "Node Control/"):
			v.fault("metric %q is of the protocol, and no quantity", s)
		default:
			m.Name = s
		}
	}
	return m
}

const longestMetric = 1024

// source reads "group/node" or "group/node/device": Sparkplug 3.0, chapter 4.
func (m *Metric) source(v value) {
	s, ok := v.text()
	if !ok {
		return
	}
	ids := strings.Split(s, "/")
	switch {
	case len(ids) < 2 || len(ids) > 3:
		v.fault("%q is not of two or three ids; %s", clip(s), sparkplugForms)
	case strings.ContainsAny(s, "+#") || strings.ContainsFunc(s, unprintable) || !utf8.ValidString(s) || len(s) > 65000:
		v.fault("%q has + or #, or a character that cannot be printed; %s", clip(s), sparkplugForms)
	case ids[0] == "" || ids[1] == "" || ids[len(ids)-1] == "":
		v.fault("%q has an empty id; %s", clip(s), sparkplugForms)
	case ids[0] == "STATE":
		v.fault("%q: a group has not the name STATE, which is for hosts", clip(s))
	default:
		m.Group, m.Node = ids[0], ids[1]
		if len(ids) == 3 {
			m.Device = ids[2]
		}
	}
}

// from is where the tag's number comes from; without a topic where the file is at fault.
func (t *Tag) from() origin {
	if t.Metric == nil {
		return origin{t.Broker, t.Topic, t.place()}
	}
	if t.Metric.Group == "" || t.Metric.Name == "" && t.Liveness == nil {
		return origin{}
	}
	return origin{t.Broker, "spBv1.0 " + t.Metric.Source(), t.Metric.Name}
}

// same says what two tags of one origin read.
func (t *Tag) same() string {
	if t.Metric != nil {
		return "the same metric of the same source"
	}
	return "the same value of the same topic"
}

// within tells whether a filter of all below a level covers what the tag reads.
func (t *Tag) within(filter string) bool {
	if t.Metric == nil {
		return below(t.Topic, filter)
	}
	for _, kind := range []string{"NBIRTH/", "NDEATH/", "NDATA/", "DBIRTH/", "DDEATH/", "DDATA/"} {
		if below("spBv1.0/"+t.Metric.Group+"/"+kind+t.Metric.Node, filter) {
			return true
		}
	}
	return false
}

// aliveBySparkplug has the births and deaths of the source of t tell whether it is alive,
// and returns their index among what does. They become a tag under the name of the source.
func (r *reader) aliveBySparkplug(v value, t *Tag) int {
	source := *t.Metric
	source.Name = ""
	for i, other := range r.told {
		if other.Metric != nil && *other.Metric == source && other.Broker == t.Broker {
			return i
		}
	}
	l := told{Tag: Tag{Broker: t.Broker, Metric: &source, Scale: 1, Max: 1, QoS: 1, MaxAge: untilTold, Liveness: new(Liveness)}, at: v.under("sparkplug")}
	if source.Group == "" {
		return 0
	}
	l.name(r.site.AllBrokers()[l.Broker].Name)
	r.told = append(r.told, l)
	return len(r.told) - 1
}

// hostID reads the id of a Sparkplug host application: Sparkplug 3.0, chapter 4.
func hostID(v value) string {
	s, ok := v.text()
	switch {
	case !ok:
	case strings.ContainsAny(s, "+#/") || strings.ContainsFunc(s, unprintable) || len(s) > 256:
		v.fault("%q is no id of a host; want at most 256 bytes of printable characters without + # and /", clip(s))
	default:
		return s
	}
	return ""
}

// checkHost holds a Sparkplug host to what goes with one: its state is the will of the
// connection, and its session is a clean one.
func (r *reader) checkHost(i int, b Broker, at value) {
	plugged := slices.ContainsFunc(r.site.Tags, func(t Tag) bool { return t.Broker == i && t.Metric != nil })
	kept := slices.IndexFunc(r.site.Tags, func(t Tag) bool { return t.Broker == i && t.Topic != "" })
	if b.HostID != "" && kept >= 0 && plugged {
		at.under("host_id").fault("makes the session a clean one, as Sparkplug wants it, and what the broker keeps for tag %q while the agent is away would be lost; declare the broker once more under brokers, with another client_id, for the tags with a topic", r.site.Tags[kept].Name)
	}
	if b.HostID != "" && b.Availability != "" {
		at.under("availability").fault("stands beside host_id, whose state is shown already; a connection has one will")
	}
	for _, key := range []string{"commands", "host_id"} {
		if v := at.under(key); v.path != at.path && !plugged {
			v.fault("is for Sparkplug, and no tag reads a metric by this broker; leave it out")
		}
	}
}
