package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"maps"
	"slices"
	"time"

	"github.com/go-json-experiment/json/jsontext"
)

// DefaultAhead is how far a stamp may lie in the future unless told otherwise;
// it covers the drift of a clock that is set by network time now and then.
const DefaultAhead = 30 * time.Second

// Outcome is what one message gave one tag: a reading, or a refusal.
type Outcome struct {
	// Reading holds the tag's index in any case. Value is meant only without
	// a refusal, or with that for [Retained], where it is the old value.
	Reading
	Refusal *Refusal // nil: accepted
}

// Decoder turns payloads into readings. It has no clock and keeps nothing from
// one message to the next but its working memory, so it serves one goroutine at
// a time. An accepted reading allocates nothing.
type Decoder struct {
	tags   []Tag
	topics map[string]*topic
	ahead  time.Duration

	source bytes.Buffer
	json   jsontext.Decoder
	found  []found
}

// topic is what the messages of one topic are searched for.
type topic struct {
	name  string
	qos   byte
	tags  []wanted
	root  *node
	slots int  // in the tree below root
	json  bool // a tag has a pointer
}

// wanted is where one tag's value and time stand; -1: not asked for.
type wanted struct{ tag, value, time int }

// found is what a pointer led to; the zero kind: nothing. raw is set for
// scalars and points into the payload.
type found struct {
	kind jsontext.Kind
	raw  []byte
}

// NewDecoder prepares for the tags. Stamps more than ahead beyond the arrival
// are refused; 0 or less stands for [DefaultAhead]. The error names every tag
// at fault.
func NewDecoder(tags []Tag, ahead time.Duration) (*Decoder, error) {
	if ahead <= 0 {
		ahead = DefaultAhead
	}
	d := &Decoder{tags: slices.Clone(tags), topics: make(map[string]*topic), ahead: ahead}
	var faults []error
	for i, tag := range tags {
		if err := tag.check(); err != nil {
			faults = append(faults, err)
			continue
		}
		d.add(i, tag)
	}
	if err := errors.Join(faults...); err != nil {
		return nil, err
	}
	slots := 0
	for _, t := range d.topics {
		slots = max(slots, t.slots)
	}
	d.found = make([]found, slots)
	return d, nil
}

func (d *Decoder) add(i int, tag Tag) {
	t := d.topics[tag.Topic]
	if t == nil {
		t = &topic{name: tag.Topic, root: newNode()}
		d.topics[tag.Topic] = t
	}
	t.qos = max(t.qos, tag.QoS)
	t.tags = append(t.tags, wanted{tag: i, value: t.slot(tag.Value), time: t.slot(tag.Time)})
}

// sorted returns the topics by name.
func (d *Decoder) sorted() []*topic {
	names := slices.Sorted(maps.Keys(d.topics))
	all := make([]*topic, len(names))
	for i, name := range names {
		all[i] = d.topics[name]
	}
	return all
}

// slot returns the slot for a pointer, shared by all tags that use it.
func (t *topic) slot(pointer string) int {
	path, err := splitPointer(pointer)
	if err != nil || len(path) == 0 {
		return -1
	}
	t.json = true
	n := t.root.at(path)
	if n.slot < 0 {
		n.slot = t.slots
		t.slots++
	}
	return n.slot
}

// Decode appends to out one outcome for each tag that reads from the topic and
// reports whether there is any. arrival is in Unix nanoseconds; retained says
// that the broker had kept the message for newcomers. The payload is not
// changed, and not kept beyond the call.
func (d *Decoder) Decode(topic string, payload []byte, arrival int64, retained bool, out []Outcome) ([]Outcome, bool) {
	t := d.topics[topic]
	if t == nil {
		return out, false
	}
	whole := d.open(t, payload)
	for _, w := range t.tags {
		o := Outcome{Reading: Reading{Tag: w.tag}}
		f := whole
		if !d.tags[w.tag].concerns(w, f) {
			f = d.read(&o.Reading, w, payload, arrival, retained)
		}
		if f != nil {
			text, cut := excerpt(payload)
			o.Refusal = &Refusal{Tag: d.tags[w.tag].Name, Reason: f.reason, Payload: text, Cut: cut, At: arrival, Detail: f.detail}
		}
		out = append(out, o)
	}
	return out, true
}

// open checks the message as a whole and notes what the pointers find.
func (d *Decoder) open(t *topic, payload []byte) *fault {
	if len(payload) > MaxPayload {
		return faultf(TooLarge, "has more than %d bytes; publish each group of instruments on a topic of its own", MaxPayload)
	}
	if len(bytes.Trim(payload, blanks)) == 0 {
		return faultf(Empty, "is empty; publish the value, or nothing")
	}
	if !t.json {
		return nil
	}
	clear(d.found)
	d.source = *bytes.NewBuffer(payload)
	d.json.Reset(&d.source)
	if err := d.walk(t.root, payload); err != nil {
		return d.syntax(err, payload)
	}
	end := d.json.InputOffset()
	if rest := bytes.Trim(payload[end:], blanks); len(rest) > 0 {
		return faultf(NotJSON, "goes on after its JSON value ends at byte %d; publish one value a message", end)
	}
	return nil
}

// read fills in value and time of one tag.
func (d *Decoder) read(r *Reading, w wanted, payload []byte, arrival int64, retained bool) *fault {
	tag := &d.tags[w.tag]
	x, f := d.value(tag, w, payload)
	if f != nil {
		return f
	}
	r.Value = tag.Scale*x + tag.Offset
	if !finite(r.Value) {
		return faultf(NotFinite, "holds %v, which is not finite in SI units", x)
	}
	if r.At, f = d.instant(tag, w, arrival, retained); f != nil {
		return f
	}
	r.Stamped = w.time >= 0
	if r.Value < tag.Min || r.Value > tag.Max {
		return faultf(OutOfRange, "holds %v, in SI units %.6g, outside the instrument's range %.6g to %.6g; check the instrument, its unit and its range", x, r.Value, tag.Min, tag.Max)
	}
	return nil
}

func (d *Decoder) value(tag *Tag, w wanted, payload []byte) (float64, *fault) {
	if tag.Liveness != nil {
		return d.liveness(tag, w, payload)
	}
	if w.value < 0 {
		return bareNumber(payload)
	}
	switch v := d.found[w.value]; v.kind {
	case '0':
		return parse(v.raw)
	case 0:
		return 0, faultf(ValueMissing, "has nothing at %q; check the tag's value pointer", tag.Value)
	case 'n':
		return 0, faultf(NullValue, "has null at %q: the publisher has no value", tag.Value)
	default:
		return 0, faultf(WrongType, "has %s at %q where a number should be; publish a number without quotes", kindName(v.kind), tag.Value)
	}
}

func (d *Decoder) instant(tag *Tag, w wanted, arrival int64, retained bool) (int64, *fault) {
	if w.time < 0 {
		if retained && (tag.Liveness == nil || !tag.Liveness.Kept) {
			return 0, faultf(Retained, "was kept by the broker and carries no time, so its age is unknown; publish with a time stamp, or without retain")
		}
		return arrival, nil
	}
	s := d.found[w.time]
	if s.kind == 0 {
		return 0, faultf(TimeMissing, "has no time stamp at %q; check the tag's time pointer", tag.Time)
	}
	at, f := stamp(tag.TimeFormat, s.kind, s.raw)
	switch {
	case f != nil:
		return 0, f
	case at < clockSet:
		return 0, faultf(UnsetClock, "is stamped %s: set the publisher's clock", inWords(at))
	case at > arrival && at-arrival > int64(d.ahead):
		return 0, faultf(Ahead, "is stamped %s, %v after its arrival (allowed %v); set the clocks by network time", inWords(at), time.Duration(at-arrival), d.ahead)
	}
	return at, nil
}

func inWords(at int64) string { return time.Unix(0, at).UTC().Format(time.RFC3339Nano) }

func kindName(k jsontext.Kind) string {
	switch k {
	case '"':
		return "text"
	case '{':
		return "an object"
	case '[':
		return "a list"
	}
	return fmt.Sprint(k) // true, false
}

// walk reads one JSON value and notes what is wanted of it. It checks all of
// it: syntax, UTF-8, and that no object has a name twice.
func (d *Decoder) walk(n *node, payload []byte) error {
	kind := d.json.PeekKind()
	if n.slot >= 0 {
		d.found[n.slot] = found{kind: kind}
	}
	if len(n.under) > 0 && (kind == '{' || kind == '[') {
		return d.enter(n, kind, payload)
	}
	value, err := d.json.ReadValue()
	if err == nil && n.slot >= 0 {
		end := d.json.InputOffset()
		d.found[n.slot].raw = payload[end-int64(len(value)) : end]
	}
	return err
}

// enter reads an object or list, member by member.
func (d *Decoder) enter(n *node, kind jsontext.Kind, payload []byte) error {
	if _, err := d.json.ReadToken(); err != nil {
		return err
	}
	for i := 0; ; i++ {
		if k := d.json.PeekKind(); k == '}' || k == ']' {
			_, err := d.json.ReadToken()
			return err
		}
		next, err := d.next(n, kind, i)
		if err != nil {
			return err
		}
		if next == nil {
			err = d.json.SkipValue()
		} else {
			err = d.walk(next, payload)
		}
		if err != nil {
			return err
		}
	}
}

// next returns the node for the member that follows, nil when it is not wanted.
func (d *Decoder) next(n *node, kind jsontext.Kind, i int) (*node, error) {
	if kind == '[' {
		return n.element(i), nil
	}
	name, err := d.json.ReadValue()
	if err != nil {
		return nil, err
	}
	return n.member(name), nil
}

// syntax sorts the errors of the JSON scanner.
func (d *Decoder) syntax(err error, payload []byte) *fault {
	var at *jsontext.SyntacticError
	switch {
	case errors.Is(err, io.ErrUnexpectedEOF):
		return faultf(Truncated, "is JSON that ends too early; check the publisher's message size limit")
	case errors.Is(err, jsontext.ErrDuplicateName):
		return faultf(NotJSON, "has a name twice in one object, so it is not clear which value holds")
	case !errors.As(err, &at) || at.ByteOffset < 0 || at.ByteOffset > int64(len(payload)):
		return faultf(NotJSON, "is not JSON; check the tag's topic and value pointer")
	case spellsNotFinite(word(payload, int(at.ByteOffset))):
		return faultf(NotFinite, "holds a value that is not a finite number; publish nothing while there is no value")
	}
	return faultf(NotJSON, "is not JSON from byte %d on; check the publisher, and the tag's topic", at.ByteOffset)
}

// word returns the text around an offset, between the separators of JSON.
func word(payload []byte, at int) []byte {
	const separators = ":,[]{}" + blanks
	from := bytes.LastIndexAny(payload[:at], separators) + 1
	rest := payload[from:]
	if end := bytes.IndexAny(rest, separators); end >= 0 {
		rest = rest[:end]
	}
	return rest
}
