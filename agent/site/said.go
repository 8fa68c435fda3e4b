package site

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"go.yaml.in/yaml/v3"
)

// Quality is where and how a source says what it thinks of its values.
type Quality struct {
	At   string // JSON Pointer
	Code string // "OPC UA", "NE 107" or "Sparkplug"; "" where the words are the source's own
	// Good, Uncertain and Bad are its words, and numbers as they are written in decimals.
	Good, Uncertain, Bad []string
	AbsentIsGood         bool // a good value carries none
}

// Samples is where a message carries a list of readings.
type Samples struct {
	At   string        // JSON Pointer; "": the message itself is the list
	Step time.Duration // from one to the next, where the message stamps the first; 0: each has its stamp
}

var codes = []string{"OPC UA", "NE 107", "Sparkplug"}

// said reads what a message tells of a value beside the number and its time.
func (o object) said(t *Tag) {
	if v, ok := o.get("unit_at"); ok {
		t.UnitAt = o.pointer("unit_at")
		if t.Value == "" && t.Samples == nil {
			v.fault("stands without value; a bare number names no unit")
		}
	}
	v, ok := o.get("quality")
	if !ok {
		return
	}
	if t.Value == "" {
		v.fault("stands without value; a bare number carries no quality")
	}
	t.Quality = v.quality(t)
}

func (v value) quality(t *Tag) *Quality {
	q := new(Quality)
	o := v.object("tags.*.quality")
	if at, ok := o.need("at", "where the quality stands, such as at: /q"); ok {
		q.At = o.pointer("at")
		if q.At != "" && (q.At == t.Value || q.At == t.Time && (t.Samples == nil || t.Samples.Step == 0)) {
			at.fault("is the place of the value, or of its time")
		}
	}
	seen := make(map[string]string)
	q.Good = o.saying("good", seen)
	q.Uncertain = o.saying("uncertain", seen)
	q.Bad = o.saying("bad", seen)
	code, coded := o.get("code")
	worded := slices.ContainsFunc([]string{"good", "uncertain", "bad"}, func(key string) bool { _, ok := o.get(key); return ok })
	switch {
	case coded && worded:
		code.fault("stands beside words of the source's own; a code has its words")
	case coded:
		q.Code, _ = code.oneOf(codes...)
	case o.node.Kind != yaml.MappingNode || o.misspelt([]string{"code", "good", "uncertain", "bad"}):
	case !worded:
		o.fault("wants code: %s, or the source's own words as good, uncertain and bad", strings.Join(codes, " | "))
	case len(q.Good)+len(q.Uncertain) == 0 && len(q.Bad) > 0 && !o.absentIsGood():
		o.fault("has no word for good; a source says so somehow, or leaves the quality out: absent: good")
	}
	q.AbsentIsGood = o.absentIsGood()
	if v, ok := o.get("absent"); ok {
		v.oneOf("good")
	}
	return q
}

func (o object) absentIsGood() bool {
	v, ok := o.get("absent")
	return ok && v.node.Value == "good"
}

// saying reads one or several words; seen are those that stand for a quality already.
func (o object) saying(key string, seen map[string]string) []string {
	v, ok := o.get(key)
	if !ok {
		return nil
	}
	all := []value{v}
	if v.node.Kind == yaml.SequenceNode {
		if all = v.items(); len(all) == 0 {
			v.fault("is an empty list")
		}
	}
	var words []string
	for _, v := range all {
		word, ok := v.said()
		if !ok {
			continue
		}
		if other, twice := seen[word]; twice {
			v.fault("%q is a word for %s already", word, other)
			continue
		}
		seen[word] = key
		words = append(words, word)
	}
	return words
}

// said reads a word as it stands in JSON: text, a number, true or false.
func (v value) said() (string, bool) {
	switch v.node.ShortTag() {
	case "!!int", "!!float":
		x, ok := v.bare()
		if ok && (math.IsNaN(x) || math.IsInf(x, 0)) {
			v.fault("%v is no number that a message holds", x)
			return "", false
		}
		return strconv.FormatFloat(x, 'f', -1, 64), ok
	case "!!bool":
		var b bool
		if v.node.Decode(&b) == nil {
			return strconv.FormatBool(b), true
		}
	}
	s, ok := v.text()
	if ok && len(s) > maxLabel {
		v.fault("is %d bytes long; at most %d", len(s), maxLabel)
		return "", false
	}
	return s, ok
}

// belongs refuses a key that stands without the one that it says more of.
func (o object) belongs(key, to string) {
	v, ok := o.get(key)
	if _, there := o.get(to); ok && !there {
		v.fault("stands without %s, of which it says more", to)
	}
}

// samples reads where a message has its list of readings.
func (o object) samples(t *Tag) {
	o.belongs("step", "samples")
	v, ok := o.get("samples")
	if !ok {
		return
	}
	t.Samples = new(Samples)
	if s, ok := v.text(); ok && s != "whole" {
		t.Samples.At = o.pointer("samples")
	}
	o.setDuration("step", &t.Samples.Step, time.Millisecond, day, "1 ms to 1 d")
	if _, ok := o.get("time"); !ok {
		v.fault("stands without time; the readings of one message need stamps, such as time: /ts in each, or of the first with step")
	}
	_, stepped := o.get("step")
	if _, ok := o.get("value"); !ok && !stepped {
		v.fault("stands without value; tell where in each element it is, such as value: /v, or the step between bare numbers")
	}
	if v, ok := o.get("counts"); ok && stepped {
		v.fault("stands beside step; a count belongs to an instant that its source stamps")
	}
}

// intoLists refuses pointers of one tag into the list of samples of another on its topic.
func (r *reader) intoLists(es []entry) {
	lists := make(map[origin][]string) // by topic
	for i := range r.site.Tags {
		t := &r.site.Tags[i]
		if topic := t.origin(); t.Samples != nil && !slices.Contains(lists[topic], t.Samples.At) {
			lists[topic] = append(lists[topic], t.Samples.At)
		}
	}
	check := func(t *Tag, at value) {
		for _, list := range lists[t.origin()] {
			for _, p := range t.ofMessage() {
				if p != "" && strings.HasPrefix(p, list+"/") {
					at.fault("pointer %q leads into the list of samples %q of another tag on its topic; give this tag samples as well", p, cmp.Or(list, "whole"))
				}
			}
		}
	}
	for i, e := range es {
		check(&r.site.Tags[i], e.value)
	}
	for i := range r.told {
		check(&r.told[i].Tag, r.told[i].at)
	}
}

// origin is the topic of a tag, whatever place in its messages.
func (t *Tag) origin() origin { return origin{broker: t.Broker, topic: t.Topic} }

// ofMessage are the pointers of a tag that begin at the message as a whole.
func (t *Tag) ofMessage() []string {
	if s := t.Samples; s != nil {
		all := []string{s.At, t.UnitAt}
		if s.Step > 0 {
			all = append(all, t.Time)
		}
		return all
	}
	all := []string{t.Value, t.Time, t.UnitAt}
	if t.Quality != nil {
		all = append(all, t.Quality.At)
	}
	return all
}
