package site

import (
	"strings"
	"time"
)

// Publish is whether, and where, the agent publishes its results. The zero value: it
// does not.
type Publish struct {
	Topic  string // what the topics of all results begin with; "" for none
	Broker int    // index into [Site.AllBrokers]
	Every  time.Duration
}

// publish reads the optional block.
func (r *reader) publish(o object) {
	v, ok := o.get("publish")
	if !ok {
		return
	}
	b := v.object("publish")
	p := &r.site.Publish
	p.Every = 10 * time.Second
	b.setDuration("every", &p.Every, time.Second, time.Hour, "1 s to 1 h")
	p.Broker = r.chosenBroker(b)
	at, ok := b.need("topic", "what the topics of all results begin with, such as creamery/heat")
	if !ok {
		return
	}
	const room = 256 // bytes of a load's name, each of which may take three
	switch s := topic(at); {
	case s == "":
	case strings.HasSuffix(s, "/"):
		at.fault("%q ends with a slash; each load's name comes behind one", clip(s))
	case len(s) > 65535-room:
		at.fault("the topic is %d bytes long; with a load's name behind it MQTT allows %d", len(s), 65535-room)
	default:
		p.Topic = s
		r.checkPublished(at)
	}
}

// checkPublished sees to it that results are not read as readings, and that none stands where
// the agent tells that it is there.
func (r *reader) checkPublished(at value) {
	p := r.site.Publish
	for _, t := range r.site.Tags {
		if t.Broker == p.Broker && strings.HasPrefix(t.Topic, p.Topic+"/") {
			at.fault("tag %q reads %q, which is below it; what the agent publishes is no reading", t.Name, clip(t.Topic))
			return
		}
	}
	if own := r.site.AllBrokers()[p.Broker].Availability; strings.HasPrefix(own, p.Topic+"/") {
		at.fault("the availability of the agent, %q, is below it, where a load of that name would be", clip(own))
	}
}
