package site

import (
	"math"
	"slices"
	"strings"
)

// AllBrokers are the main broker and those beside it; [Tag.Broker] is an index into them.
func (s *Site) AllBrokers() []Broker {
	return append([]Broker{s.Broker}, s.Brokers...)
}

// brokers reads the main one and those beside it.
func (r *reader) brokers(o object) {
	r.brokerAt = []value{o.value}
	if v, ok := o.need("broker", "such as broker: {url: mqtt://127.0.0.1:1883}"); ok {
		r.site.Broker = r.broker(v, "")
		r.brokerAt[0] = v
	}
	v, ok := o.get("brokers")
	if !ok {
		return
	}
	es := v.entries()
	if len(es) == 0 {
		v.emptyMapping("at least one broker beside the main one, or leave it out")
	}
	for _, e := range es {
		e.key.label(e.name)
		b := r.broker(e.value, e.name)
		for _, other := range r.site.AllBrokers() {
			if other.URL == b.URL && other.ClientID == b.ClientID && b.URL != "" {
				e.fault("is the same broker as %s, under the same client_id: two sessions would throw each other out", other.Called())
			}
		}
		r.site.Brokers = append(r.site.Brokers, b)
		r.brokerAt = append(r.brokerAt, e.value)
	}
}

// Called is what the file calls the broker.
func (b Broker) Called() string {
	if b.Name == "" {
		return "broker"
	}
	return join("brokers", b.Name)
}

// chosenBroker reads which broker is meant; the main one where the key is not there.
func (r *reader) chosenBroker(o object) int {
	v, ok := o.get("broker")
	if !ok {
		return 0
	}
	s, ok := v.text()
	if !ok {
		return 0
	}
	names := make([]string, len(r.site.Brokers))
	for i, b := range r.site.Brokers {
		names[i] = b.Name
	}
	i := slices.Index(names, s)
	switch {
	case i >= 0:
		return i + 1
	case len(names) == 0:
		v.fault("broker %q is not declared: the file has no brokers beside the main one", clip(s))
	default:
		v.fault("broker %q is not declared%s; declared: %s", clip(s), nearOf(s, names), list(names))
	}
	return 0
}

// filters reads subscriptions in place of single topics. One kind of wildcard is enough:
// all that is below a level.
func filters(v value) []string {
	var all []string
	for _, item := range v.items() {
		s, ok := item.text()
		stem := strings.TrimSuffix(strings.TrimSuffix(s, "#"), "/")
		switch {
		case !ok:
		case s != "#" && !strings.HasSuffix(s, "/#") || strings.ContainsAny(stem, "+#") || strings.HasPrefix(s, "$"):
			item.fault("%q is no filter for all topics below a level; want one such as creamery/#, with # at the end alone", clip(s))
		default:
			for _, other := range all {
				if below(s, other) || below(other, s) {
					item.fault("%q and %q overlap: a message would come twice", clip(other), clip(s))
				}
			}
			all = append(all, s)
		}
	}
	return all
}

// below tells whether a filter of all below a level covers a topic, or another such filter.
func below(topic, filter string) bool {
	stem := strings.TrimSuffix(filter, "#")
	return strings.HasPrefix(topic, stem) || topic+"/" == stem
}

// checkTopics holds the topics of the brokers against those of the tags.
func (r *reader) checkTopics() {
	for i, b := range r.site.AllBrokers() {
		if i >= len(r.brokerAt) || b.URL == "" {
			continue
		}
		at := r.brokerAt[i]
		for _, f := range b.Subscribe {
			if !slices.ContainsFunc(r.site.Tags, func(t Tag) bool { return t.Broker == i && t.within(f) }) {
				at.under("subscribe").fault("%q covers no topic of a tag", clip(f))
			}
		}
		r.checkHost(i, b, at)
		for _, t := range r.site.Tags {
			if b.Availability != "" && t.Broker == i && t.Topic == b.Availability {
				at.under("availability").fault("%q is the topic of tag %q; what the agent says itself is no reading", clip(t.Topic), t.Name)
			}
		}
	}
}

// under is the value of a key of v, or v where it has none.
func (v value) under(key string) value {
	for i := 0; i+1 < len(v.node.Content); i += 2 {
		if v.node.Content[i].Value == key {
			return value{v.scope, v.node.Content[i+1], join(v.path, key)}
		}
	}
	return v
}

// setVersion reads a version of TLS, which YAML takes for a number.
func (o object) setVersion(key string, to *string) {
	v, ok := o.get(key)
	if !ok {
		return
	}
	switch s := v.node.Value; s {
	case "1.2", "1.3":
		*to = s
	case "":
		v.fault("want the least version of TLS, 1.2 or 1.3, found %s", v.kind())
	default:
		v.fault("want the least version of TLS, 1.2 or 1.3, found %s", clip(s))
	}
}

// setCount reads a whole number.
func (o object) setCount(key string, to *int, lo, hi int) {
	v, ok := o.get(key)
	if !ok {
		return
	}
	x, ok := v.bare()
	switch {
	case !ok:
	case x != math.Trunc(x):
		v.fault("%g is no whole number", x)
	case x < float64(lo) || x > float64(hi):
		v.fault("%.0f is out of range; allowed: %d to %d", x, lo, hi)
	default:
		*to = int(x)
	}
}
