package ingest

import (
	"errors"
	"fmt"
	"time"

	"github.com/go-json-experiment/json/jsontext"
)

// MaxSamples is how many samples of a tag one message may carry; a longer list is refused
// whole, as [TooMany]. The figure is our own: a quarter of an hour at one a second.
const MaxSamples = 1000

// Samples says where a message has its list of readings, in any order of their stamps.
type Samples struct {
	// At is the JSON Pointer of the list; "": the message itself is it.
	At string
	// Step is set where each element is but a value and the message stamps the first of
	// them, at the tag's Time: the interval from one to the next. Value is then "", or a
	// pointer into each element all the same.
	Step time.Duration
}

// longestStep keeps the stamps of a whole list far within an int64 of nanoseconds.
const longestStep = 24 * time.Hour

func (t *Tag) checkSamples() error {
	s := t.Samples
	switch {
	case s == nil:
		return nil
	case t.Liveness != nil:
		return errors.New("samples of a sign of life: one message is one sign")
	case s.Step < 0 || s.Step > longestStep:
		return fmt.Errorf("samples %v apart; allowed are more than 0 up to %v, or 0 where each has its stamp", s.Step, longestStep)
	case t.Time == "":
		return errors.New("samples without a time pointer: all of them would have the time of arrival")
	case t.Value == "" && s.Step == 0:
		return errors.New("samples without a value pointer: an element that is a bare number carries no stamp, so give the step between them")
	case t.Value == "" && t.Quality != nil:
		return errors.New("quality of samples that are bare numbers: they carry none")
	}
	return nil
}

// list is a list of samples in the messages of a topic, with what is wanted of each
// element.
type list struct {
	at    string
	root  *node
	slots int // in the tree below root
	stretch
}

// stretch is what the message at hand has of a list.
type stretch struct {
	kind jsontext.Kind
	from int // in the decoder's elements
	n    int // how many there are; those beyond MaxSamples are not kept
}

// want notes where the samples of a tag stand. Tags whose lists are the same share one.
func (t *topic) want(w *wanted, tag Tag) {
	path, _ := splitPointer(tag.Samples.At)
	t.json = true
	n := t.root.at(path)
	if n.list == nil {
		n.list = &list{at: tag.Samples.At, root: newNode()}
		t.lists = append(t.lists, n.list)
	}
	l := n.list
	w.list, w.value, w.time = l, l.slot(tag.Value), -1
	if tag.Samples.Step > 0 {
		w.start = t.slot(tag.Time)
	} else {
		w.time = l.slot(tag.Time)
	}
	if tag.Quality != nil {
		w.quality = l.slot(tag.Quality.At)
	}
}

// most is how many readings one message of the topic may give. A sample of its own takes
// two bytes at least, a digit and a comma.
func (t *topic) most() int {
	n, longest := 0, 0
	share := make(map[[2]any]int) // tags that read the same value of the same list
	for _, w := range t.tags {
		if w.list == nil {
			n++
			continue
		}
		n += MaxSamples
		of := [2]any{w.list, w.value}
		share[of]++
		longest = max(longest, share[of]*MaxPayload/2)
	}
	return min(n, len(t.tags)+longest)
}

// slot returns the slot for a pointer into each element.
func (l *list) slot(pointer string) int {
	path, _ := splitPointer(pointer)
	return l.root.at(path).number(&l.slots)
}

// gather reads a list and notes what is wanted of its elements.
func (d *Decoder) gather(l *list, payload []byte) error {
	if _, err := d.json.ReadToken(); err != nil {
		return err
	}
	l.from = len(d.elements)
	for ; d.json.PeekKind() != ']'; l.n++ {
		if l.n >= MaxSamples {
			if err := d.json.SkipValue(); err != nil {
				return err
			}
			continue
		}
		for range l.slots {
			d.elements = append(d.elements, found{})
		}
		if err := d.walk(l.root, payload, d.elements[len(d.elements)-l.slots:]); err != nil {
			return err
		}
	}
	_, err := d.json.ReadToken()
	return err
}

// samples appends the outcomes of a tag's samples. Where several are refused for the same
// reason, one text tells of them all.
func (d *Decoder) samples(out []Outcome, w *wanted, m *arrived) []Outcome {
	tag, l := &d.tags[w.tag], w.list
	first, f := d.first(tag, w, m)
	if f != nil {
		return append(out, tag.refused(Reading{Tag: w.tag}, f, m))
	}
	var told [reasons]*Refusal
	for i := range l.n {
		r := Reading{Tag: w.tag}
		f := d.read(&r, w, d.elements[l.from+i*l.slots:][:l.slots], m)
		if w.start >= 0 {
			r.At, r.Stamped = first+int64(i)*int64(tag.Samples.Step), true
			if f == nil {
				f = d.timely(r.At, m.arrival)
			}
		}
		switch {
		case f == nil:
			out = append(out, Outcome{Reading: r})
			continue
		case told[f.reason] != nil:
			out = append(out, Outcome{Reading: r, Refusal: told[f.reason]})
		default:
			out = append(out, tag.refused(r, f, m))
			told[f.reason] = out[len(out)-1].Refusal
		}
		d.void(&out[len(out)-1], w, d.elements[l.from+i*l.slots:][:l.slots], m)
	}
	return out
}

// first finds what is wrong with a list as a whole, and the stamp of its first sample
// where the message has one for all.
func (d *Decoder) first(tag *Tag, w *wanted, m *arrived) (int64, *fault) {
	switch l := w.list; {
	case l.kind == 0:
		return 0, faultf(ValueMissing, "has no list at %q; check the tag's pointer to its samples", l.at)
	case l.kind == 'n':
		return 0, faultf(WrongType, "has null at %q where a list of samples should be", l.at)
	case l.kind != '[':
		return 0, faultf(WrongType, "has %s at %q where a list of samples should be", kindName(l.kind), l.at)
	case l.n == 0:
		return 0, faultf(Empty, "has an empty list at %q; publish samples, or nothing", l.at)
	case l.n > MaxSamples:
		return 0, faultf(TooMany, "has %d samples at %q; at most %d are read, so publish more often", l.n, l.at, MaxSamples)
	case w.start < 0:
		return 0, nil
	}
	at, f := tag.instant(&d.found[w.start])
	if f == nil {
		f = d.timely(at, m.arrival)
	}
	return at, f
}

// ofSample says in a refusal that a pointer leads into a sample.
func (t *Tag) ofSample() string {
	if t.Samples == nil {
		return ""
	}
	return " of a sample"
}
