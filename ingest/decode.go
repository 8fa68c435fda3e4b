package ingest

import (
	"bytes"
	"cmp"
	"errors"
	"fmt"
	"io"
	"maps"
	"math"
	"slices"
	"time"

	"github.com/go-json-experiment/json/jsontext"

	"heatreeve/ingest/quality"
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
	// Void is set beside a refusal by which the value before ends: Reading is then a bad one,
	// [quality.Refused], that is kept as an accepted one is.
	Void bool
}

// kept tells whether the reading is passed on.
func (o *Outcome) kept() bool { return o.Refusal == nil || o.Void }

// voids are the refusals of a value that is not the one before, whatever else it is. A message
// that has none may have left out what did not change.
var voids = [reasons]bool{WrongType: true, NotANumber: true, NotFinite: true, UnknownQuality: true, UnitMismatch: true, OutOfRange: true}

// Decoder turns payloads into readings. It has no clock and keeps nothing from
// one message to the next but its working memory and what Sparkplug births have told,
// so it serves one goroutine at a time. An accepted reading allocates nothing.
type Decoder struct {
	tags   []Tag
	topics map[string]*topic
	ahead  time.Duration

	source   bytes.Buffer
	json     jsontext.Decoder
	found    []found
	elements []found // of all lists of samples, a stretch each

	plug *plug // nil without a tag that reads a metric
}

// topic is what the messages of one topic are searched for.
type topic struct {
	name  string
	qos   byte
	tags  []*wanted
	root  *node
	slots int // in the tree below root
	lists []*list
	json  bool // a tag has a pointer
}

// wanted is where what a tag wants stands, by slots; -1: not asked for. Of a tag with
// samples, value, time and quality are slots of an element; unit and start are of the
// message, as all are of other tags.
type wanted struct {
	tag                               int
	value, time, quality, unit, start int
	list                              *list
	numbers                           map[float64]quality.Mark // of the quality's words
	spelled                           []byte                   // the unit as last accepted, as it stands in the message
}

// found is what a pointer led to; the zero kind: nothing. raw is set for
// scalars and points into the payload.
type found struct {
	kind jsontext.Kind
	raw  []byte
}

// arrived is a message as it came.
type arrived struct {
	payload  []byte
	arrival  int64
	retained bool
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
		if tag.Metric != nil {
			faults = append(faults, d.plugIn(i, tag))
			continue
		}
		d.add(i, tag)
	}
	slots := 0
	for _, t := range d.sorted() {
		slots = max(slots, t.slots)
		if err := t.root.check(""); err != nil {
			faults = append(faults, fmt.Errorf("topic %q: %w", t.name, err))
		}
	}
	if err := errors.Join(faults...); err != nil {
		return nil, err
	}
	d.plug.start(ahead, nil)
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
	w := &wanted{tag: i, quality: -1, start: -1, unit: t.slot(tag.UnitAt), numbers: tag.Quality.numbers()}
	if tag.Samples != nil {
		t.want(w, tag)
	} else {
		w.value, w.time = t.slot(tag.Value), t.slot(tag.Time)
		if tag.Quality != nil {
			w.quality = t.slot(tag.Quality.At)
		}
	}
	t.tags = append(t.tags, w)
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
	return t.root.at(path).number(&t.slots)
}

// Decode appends to out one outcome for each tag that reads from the topic, and of a tag
// with samples one for each sample, and reports whether there is any tag. arrival is in
// Unix nanoseconds; retained says that the broker had kept the message for newcomers. The
// payload is not changed, and not kept beyond the call.
func (d *Decoder) Decode(topic string, payload []byte, arrival int64, retained bool, out []Outcome) ([]Outcome, bool) {
	t := d.topics[topic]
	if t == nil {
		return d.plug.decode(topic, payload, arrival, retained, out)
	}
	m := arrived{payload, arrival, retained}
	whole := d.open(t, payload)
	for _, w := range t.tags {
		switch tag := &d.tags[w.tag]; {
		case tag.concerns(w, whole):
			o := tag.refused(Reading{Tag: w.tag}, whole, &m)
			if w.time < 0 { // another stamp cannot be read
				d.void(&o, w, nil, &m)
			}
			out = append(out, o)
		case w.list != nil:
			out = d.samples(out, w, &m)
		default:
			out = append(out, d.outcome(w, d.found, &m))
		}
	}
	return out, true
}

// outcome is what one tag has from the message, or from the sample whose slots are at.
func (d *Decoder) outcome(w *wanted, at []found, m *arrived) Outcome {
	r := Reading{Tag: w.tag}
	if f := d.read(&r, w, at, m); f != nil {
		o := d.tags[w.tag].refused(r, f, m)
		d.void(&o, w, at, m)
		return o
	}
	return Outcome{Reading: r}
}

// void has a refusal end the value before where the tag holds that until it hears of another,
// and where it is known when the new one came.
func (d *Decoder) void(o *Outcome, w *wanted, at []found, m *arrived) {
	tag := &d.tags[w.tag]
	if !tag.Holds || !voids[o.Refusal.Reason] {
		return
	}
	r := Reading{Tag: w.tag, At: o.At, Stamped: o.Stamped, Value: math.NaN(), Mark: quality.Refused}
	if d.stamp(&r, tag, w, at, m) == nil && d.timely(r.At, m.arrival) == nil {
		o.Reading, o.Void = r, true
	}
}

func (t *Tag) refused(r Reading, f *fault, m *arrived) Outcome {
	text, cut := excerpt(m.payload)
	return Outcome{Reading: r, Refusal: &Refusal{Tag: t.Name, Reason: f.reason, Payload: text, Cut: cut, At: m.arrival, Detail: f.detail}}
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
	d.elements = d.elements[:0]
	for _, l := range t.lists {
		l.stretch = stretch{}
	}
	d.source = *bytes.NewBuffer(payload)
	d.json.Reset(&d.source)
	if err := d.walk(t.root, payload, d.found); err != nil {
		return d.syntax(err, payload)
	}
	end := d.json.InputOffset()
	if rest := bytes.Trim(payload[end:], blanks); len(rest) > 0 {
		return faultf(NotJSON, "goes on after its JSON value ends at byte %d; publish one value a message", end)
	}
	return nil
}

// read fills in value, mark and time of one tag. A source that calls its value bad may
// put anything in its place; so much is believed.
func (d *Decoder) read(r *Reading, w *wanted, at []found, m *arrived) *fault {
	tag := &d.tags[w.tag]
	said, unknown := tag.quality(w, at)
	x, own, f := d.value(tag, w, at, m.payload)
	if f != nil && said.Quality() == quality.Bad {
		x, f = math.NaN(), nil
	}
	if f = cmp.Or(f, unknown); f != nil {
		return f
	}
	r.Mark = quality.Worse(said, own)
	if f := d.convert(r, tag, w, x); f != nil {
		return f
	}
	if f := d.stamp(r, tag, w, at, m); f != nil {
		return f
	}
	return tag.inRange(r, x)
}

// inRange holds a reading that is not bad to the instrument's range.
func (t *Tag) inRange(r *Reading, x float64) *fault {
	if r.Mark.Quality() != quality.Bad && !(r.Value >= t.Min && r.Value <= t.Max) {
		return faultf(OutOfRange, "holds %v, in SI units %.6g, outside the instrument's range %.6g to %.6g; check the instrument, its unit and its range", x, r.Value, t.Min, t.Max)
	}
	return nil
}

// convert puts x into SI. What is bad needs no unit, and no value.
func (d *Decoder) convert(r *Reading, tag *Tag, w *wanted, x float64) *fault {
	if w.unit >= 0 && r.Mark.Quality() != quality.Bad {
		if f := tag.unit(w, &d.found[w.unit]); f != nil {
			return f
		}
	}
	return tag.inSI(r, x)
}

// inSI fills in what x means.
func (t *Tag) inSI(r *Reading, x float64) *fault {
	bad := r.Mark.Quality() == quality.Bad
	if t.Signal == nil {
		r.Value = t.Scale*x + t.Offset
	} else {
		var m quality.Mark
		r.Value, m = t.Signal.Convert(x)
		r.Mark = quality.Worse(r.Mark, m)
		bad = bad || m.Quality() == quality.Bad
	}
	switch {
	case finite(r.Value):
	case bad:
		r.Value = math.NaN()
	default:
		return faultf(NotFinite, "holds %v, which is not finite in SI units", x)
	}
	return nil
}

// value is the number of a tag, or with its mark the lack of one.
func (d *Decoder) value(tag *Tag, w *wanted, at []found, payload []byte) (float64, quality.Mark, *fault) {
	if tag.Liveness != nil {
		x, f := d.liveness(tag, w, payload)
		return x, quality.None, f
	}
	if w.value < 0 {
		if x, ok := tag.truth(string(bytes.Trim(payload, blanks))); ok {
			return x, quality.None, nil
		}
		return bareNumber(payload)
	}
	switch v := at[w.value]; v.kind {
	case '0':
		x, f := parse(v.raw)
		return x, quality.None, f
	case 0:
		return 0, quality.None, faultf(ValueMissing, "has nothing at %q%s; check the tag's value pointer", tag.Value, tag.ofSample())
	case 'n':
		return math.NaN(), quality.NoValue, nil
	default:
		if x, ok := tag.truth(kindName(v.kind)); ok {
			return x, quality.None, nil
		}
		return 0, quality.None, faultf(WrongType, "has %s at %q%s where a number should be; publish a number without quotes", kindName(v.kind), tag.Value, tag.ofSample())
	}
}

// truth is what true or false is for the tag, in the unit of its numbers.
func (t *Tag) truth(text string) (x float64, ok bool) {
	switch {
	case !t.Truth:
	case text == "true":
		return 1 / t.Scale, true
	case text == "false":
		return 0, true
	}
	return 0, false
}

// stamp fills in the instant of a reading: that of its source, or of its arrival.
func (d *Decoder) stamp(r *Reading, tag *Tag, w *wanted, at []found, m *arrived) *fault {
	if w.start >= 0 {
		return nil // counted from the first sample
	}
	if w.time < 0 {
		if m.retained && (tag.Liveness == nil || !tag.Liveness.Kept) {
			return faultf(Retained, "was kept by the broker and carries no time, so its age is unknown; publish with a time stamp, or without retain")
		}
		r.At = m.arrival
		return nil
	}
	instant, f := tag.instant(&at[w.time])
	if f == nil {
		f = d.timely(instant, m.arrival)
	}
	r.At, r.Stamped = instant, true
	return f
}

// instant reads a stamp.
func (t *Tag) instant(s *found) (int64, *fault) {
	if s.kind == 0 {
		return 0, faultf(TimeMissing, "has no time stamp at %q%s; check the tag's time pointer", t.Time, t.ofSample())
	}
	return stamp(t.TimeFormat, s.kind, s.raw)
}

// timely refuses a stamp of no set clock, or of one that is fast.
func (d *Decoder) timely(at, arrival int64) *fault {
	switch {
	case at < clockSet:
		return faultf(UnsetClock, "is stamped %s: set the publisher's clock", inWords(at))
	case at > arrival && at-arrival > int64(d.ahead):
		return faultf(Ahead, "is stamped %s, %v after its arrival (allowed %v)%s; set the clocks by network time", inWords(at), round(time.Duration(at-arrival)), d.ahead, zoned(time.Duration(at-arrival)))
	}
	return nil
}

// round leaves out digits of a time that tell nothing.
func round(d time.Duration) time.Duration {
	if d < time.Second {
		return d
	}
	return d.Round(100 * time.Millisecond)
}

// zoned tells of a lag that is the step of a time zone, as of a clock set by another one.
func zoned(d time.Duration) string {
	const quarter = 15 * time.Minute
	if d < quarter/2 || d > 15*time.Hour || (d-d.Round(quarter)).Abs() > 30*time.Second {
		return ""
	}
	return ", as of another time zone"
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
func (d *Decoder) walk(n *node, payload []byte, into []found) error {
	kind := d.json.PeekKind()
	if n.slot >= 0 {
		into[n.slot] = found{kind: kind}
	}
	if n.list != nil {
		n.list.kind = kind
		if kind == '[' {
			return d.gather(n.list, payload)
		}
	}
	if len(n.under) > 0 && (kind == '{' || kind == '[') {
		return d.enter(n, kind, payload, into)
	}
	value, err := d.json.ReadValue()
	if err == nil && n.slot >= 0 {
		end := d.json.InputOffset()
		into[n.slot].raw = payload[end-int64(len(value)) : end]
	}
	return err
}

// enter reads an object or list, member by member.
func (d *Decoder) enter(n *node, kind jsontext.Kind, payload []byte, into []found) error {
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
			err = d.walk(next, payload, into)
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
		return faultf(NotFinite, "holds a value that is not a finite number; publish null while there is no value")
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
