package site

import (
	"fmt"
	"strings"
	"time"
)

// untilTold is how long the last word of an availability topic holds: half a century,
// which added to any instant is still one.
const untilTold = 50 * 365 * day

// told is a topic that tells whether sources are alive, with the place in the file that
// named it first.
type told struct {
	Tag
	at value
}

// reports reads how a tag's source reports.
func (r *reader) reports(o object, t *Tag) {
	if t.Metric == nil {
		o.needs("reports", "alive")
	}
	o.needs("alive", "reports")
	if v, ok := o.get("reports"); ok {
		_, t.OnChange = v.oneOf("on change")
		if age, ok := o.get("max_age"); ok && t.OnChange && t.Counter == nil {
			age.fault("stands beside reports: on change, by which a reading holds as long as its source is alive; leave it out")
		}
	}
	if v, ok := o.get("alive"); ok && t.Metric == nil {
		t.Alive = r.alive(v, t)
	}
	if t.OnChange && t.Metric != nil {
		t.Alive = r.aliveBySparkplug(o.value, t)
	}
}

// alive reads the topic that tells whether the source of t is alive, and returns its
// index among those. A topic that several tags name is told once.
func (r *reader) alive(v value, t *Tag) int {
	before := len(v.faults)
	l := told{Tag: Tag{Broker: t.Broker, Scale: 1, Max: 1, QoS: 1, MaxAge: untilTold, Liveness: new(Liveness)}, at: v}
	o := v.object("tags.*.alive")
	if v, ok := o.need("topic", "the MQTT topic by which the source shows that it is alive"); ok {
		l.Topic, l.at = topic(v), v
		if l.Topic == t.Topic && l.Topic != "" {
			v.fault("is the topic of the tag itself, which is silent while nothing changes")
		}
	}
	r.words(o, &l.Tag)
	if len(v.faults) > before {
		return 0
	}
	for i, other := range r.told {
		if other.Topic != l.Topic || other.Broker != l.Broker {
			continue
		}
		if !other.same(&l.Tag) {
			l.at.fault("%q is told otherwise in line %d; a topic shows in one way that its source is alive", clip(l.Topic), other.at.node.Line)
		}
		return i
	}
	l.name(r.site.AllBrokers()[l.Broker].Name)
	r.told = append(r.told, l)
	return len(r.told) - 1
}

// words reads by what a message says that the source is alive.
func (r *reader) words(o object, l *Tag) {
	o.needs("online", "offline")
	o.needs("offline", "online")
	_, online := o.get("online")
	_, offline := o.get("offline")
	_, within := o.get("within")
	if !online && !offline && !within {
		o.need("within", "how long a heartbeat counts, such as within: 30 s; an availability topic has online and offline, its two words", "online", "offline")
	}
	o.setDuration("within", &l.MaxAge, time.Second, day, "1 s to 1 d")
	if v, ok := o.get("within"); ok && l.MaxAge < r.site.Timing.Grid {
		v.fault("%v is shorter than the grid of %v", l.MaxAge, r.site.Timing.Grid)
	}
	if !online && !offline {
		if v, ok := o.get("value"); ok {
			v.fault("is of a word, online or offline; a heartbeat counts whatever it says")
		}
		o.stamp(l)
		return
	}
	o.setText("online", &l.Liveness.Online)
	o.setText("offline", &l.Liveness.Offline)
	said := l.Liveness
	said.Online, said.Offline = strings.TrimSpace(said.Online), strings.TrimSpace(said.Offline)
	if v, ok := o.get("offline"); ok && said.Online != "" && said.Online == said.Offline {
		v.fault("%q is the word for online too", said.Offline)
	}
	o.payload(l)
	said.Kept = !within && l.Time == ""
}

// same tells whether two say the same of one topic.
func (l *told) same(other *Tag) bool {
	return *l.Liveness == *other.Liveness && l.MaxAge == other.MaxAge && l.Value == other.Value && l.Time == other.Time && l.TimeFormat == other.TimeFormat
}

// name gives the tag of the topic, or Sparkplug source, its name, which is that of the topic
// or source, and of the broker where it is not the main one.
func (l *told) name(broker string) {
	l.Name = l.Topic
	if l.Metric != nil {
		l.Name = l.Metric.Source()
	}
	length := len(l.Name)
	if broker != "" {
		l.Name += " (" + broker + ")"
	}
	if len(l.Name) > maxLabel {
		shown := "its source"
		if l.Metric != nil {
			shown = "it"
		}
		l.at.fault("the %s is %d bytes long; %s is shown under its name, of at most %d", l.what(), length, shown, maxLabel)
		return
	}
	l.at.label(l.Name)
}

// appendLiveness puts the tags of those topics behind the declared ones; sources are the
// topics and values that these read.
func (r *reader) appendLiveness(sources map[origin]string) {
	declared := len(r.site.Tags)
	for i := range r.site.Tags {
		if t := &r.site.Tags[i]; t.OnChange {
			t.Alive += declared
		}
	}
	for _, l := range r.told {
		if _, clash := r.tags[l.Name]; clash {
			l.at.fault("%q is the name of a tag too, and the liveness of the %s is shown under it; rename the tag", l.Name, l.what())
		}
		if other, clash := sources[l.from()]; clash && l.Liveness.Online != "" {
			l.at.fault("tag %q reads a number where %s", other, l.says())
		}
		r.site.Tags = append(r.site.Tags, l.Tag)
	}
}

// what tells by what the liveness comes.
func (l *told) what() string {
	if l.Metric != nil {
		return "Sparkplug source"
	}
	return "topic"
}

func (l *told) says() string {
	return fmt.Sprintf("the words %q and %q are", l.Liveness.Online, l.Liveness.Offline)
}
