package warn

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"

	"heatreeve/agent/design"
)

// mostBy and mostReason bound what an operator says, in bytes: an event has room for both.
const (
	mostBy     = 100
	mostReason = 500
)

// check looks at who marks, and why.
func (m *Mark) check() error {
	for _, x := range []struct {
		name, text string
		most       int
	}{{"by", m.By, mostBy}, {"reason", m.Reason, mostReason}} {
		switch {
		case strings.TrimSpace(x.text) == "":
			return fmt.Errorf("%s is missing", x.name)
		case len(x.text) > x.most:
			return fmt.Errorf("%s is %d bytes long; %d are kept", x.name, len(x.text), x.most)
		case !utf8.ValidString(x.text) || strings.ContainsFunc(x.text, unicode.IsControl):
			return fmt.Errorf("%s %q has what is no text in it", x.name, x.text)
		}
	}
	return nil
}

// Acknowledge acknowledges the unacknowledged warnings on a subject, of one kind or, where
// kind is empty, of all, and returns them. That there are none is an error.
func (r *Roll) Acknowledge(subject string, kind design.Kind, m Mark) (marked []Entry, err error) {
	if err := m.check(); err != nil {
		return nil, err
	}
	for i := range r.Entries {
		e := &r.Entries[i]
		if e.Subject != subject || kind != "" && e.Kind != kind {
			continue
		}
		switch e.State() {
		case Unacknowledged:
			e.Mark, e.Earlier = &m, 0
		case Returned:
			e.Seen, e.Earlier = true, 0
		default:
			continue
		}
		marked = append(marked, *e)
	}
	if len(marked) == 0 {
		return nil, fmt.Errorf("no %s is unacknowledged; there are: %s", onSubject(subject, kind), r.told())
	}
	return marked, nil
}

func onSubject(subject string, kind design.Kind) string {
	if kind == "" {
		return fmt.Sprintf("warning on %q", subject)
	}
	return fmt.Sprintf("warning of kind %q on %q", kind, subject)
}

// told lists what is on the roll.
func (r *Roll) told() string {
	var all []string
	board := r.Board(nil)
	for _, l := range board.Listed() {
		all = append(all, fmt.Sprintf("%s of %s (%s)", l.Kind, l.Subject, l.State()))
	}
	if len(all) == 0 {
		return "none at all"
	}
	return strings.Join(all, ", ")
}

// Shelve puts a shelf on the roll, in the place of one of the same subject and kind.
func (r *Roll) Shelve(s Shelf) error {
	if err := s.check(); err != nil {
		return err
	}
	switch over := s.Until - s.At; {
	case over <= 0:
		return fmt.Errorf("until %s is not after now, %s", time.Unix(0, s.Until).UTC().Format(time.RFC3339), time.Unix(0, s.At).UTC().Format(time.RFC3339))
	case over > MostShelfTime:
		return fmt.Errorf("until is %v away; a shelf is for %v at most", time.Duration(over).Round(time.Minute), time.Duration(MostShelfTime))
	}
	r.Shelves = append(slices.DeleteFunc(r.Shelves, s.same), s)
	return nil
}

func (s *Shelf) same(o Shelf) bool { return s.Subject == o.Subject && s.Kind == o.Kind }

// Unshelve takes the shelves of a subject back, of one kind or, where kind is empty, of all,
// and returns them. That there are none is an error.
func (r *Roll) Unshelve(subject string, kind design.Kind, m Mark) (ended []Shelf, err error) {
	if err := m.check(); err != nil {
		return nil, err
	}
	r.Shelves = slices.DeleteFunc(r.Shelves, func(s Shelf) bool {
		if s.Subject != subject || kind != "" && s.Kind != kind {
			return false
		}
		ended = append(ended, s)
		return true
	})
	if len(ended) == 0 {
		return nil, fmt.Errorf("no %s is shelved", onSubject(subject, kind))
	}
	return ended, nil
}

// Listed is an entry with the shelf that it lies on, or nil.
type Listed struct {
	Entry
	Shelf *Shelf
}

// Board is the roll as it is shown. Nothing in it changes.
type Board struct {
	All     []Listed // by Begin, also what is over and seen
	Shelves []Shelf  // by subject and kind
	Watched []Watched
}

// Listed are the warnings that stand, and those that returned unacknowledged.
func (b *Board) Listed() []Listed {
	return slices.DeleteFunc(slices.Clone(b.All), func(l Listed) bool { return l.State() == Normal })
}

// Board shows the roll, and of what is watched how it is.
func (r *Roll) Board(watched []Watched) Board {
	b := Board{Shelves: slices.Clone(r.Shelves), Watched: slices.Clone(watched)}
	slices.SortFunc(b.Shelves, func(x, y Shelf) int {
		return cmp.Or(cmp.Compare(x.Subject, y.Subject), cmp.Compare(x.Kind, y.Kind))
	})
	shelf := func(subject string, k design.Kind) *Shelf {
		i := slices.IndexFunc(b.Shelves, func(s Shelf) bool { return s.Subject == subject && s.Kind == k })
		if i < 0 {
			return nil
		}
		return &b.Shelves[i]
	}
	for _, e := range r.Entries {
		b.All = append(b.All, Listed{e, shelf(e.Subject, e.Kind)})
	}
	slices.SortStableFunc(b.All, func(x, y Listed) int { return cmp.Compare(x.Begin, y.Begin) })
	for i := range b.Watched {
		w := &b.Watched[i]
		if e := r.entry(w.Subject, w.Kind); e != nil {
			w.Active, w.Acknowledged = e.End == 0, e.State() == Acknowledged
		}
		w.Shelved = shelf(w.Subject, w.Kind) != nil
	}
	return b
}
