package page

import (
	"encoding/json"
	"fmt"
	"hash/fnv"
	"strconv"
	"sync"
	"time"

	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// feed makes the events of the stream, each once for all who have the same units. It has no
// goroutine of its own: whoever first asks after a beat has them made.
type feed struct {
	mu     sync.Mutex
	beaten chan struct{} // closed at the next beat
	byUnit map[string]*edition
}

// edition is the feed in one choice of units.
type edition struct {
	of      *view.Snapshot
	number  uint64 // of snapshots seen; 0 before the first
	shown   []now
	changes []byte // events that lead from the one before to this
	warned  string // tells one list of warnings from another
	readers int
}

func (f *feed) init() {
	f.beaten, f.byUnit = make(chan struct{}), make(map[string]*edition)
}

// Beat tells that there is another snapshot. It never waits for a reader.
func (p *Page) Beat() {
	f := &p.feed
	f.mu.Lock()
	defer f.mu.Unlock()
	close(f.beaten)
	f.beaten = make(chan struct{})
}

// join counts a reader of an edition, and leave no longer: an edition that nobody reads is
// dropped.
func (f *feed) join(key string) {
	f.mu.Lock()
	defer f.mu.Unlock()
	if f.byUnit[key] == nil {
		f.byUnit[key] = new(edition)
	}
	f.byUnit[key].readers++
}

func (f *feed) leave(key string) {
	f.mu.Lock()
	defer f.mu.Unlock()
	if e := f.byUnit[key]; e != nil {
		if e.readers--; e.readers == 0 {
			delete(f.byUnit, key)
		}
	}
}

// since returns the events for a reader who has had the edition of a number, the number that
// it then has, and what is closed at the next beat. One that has missed a beat is told all.
func (p *Page) since(key string, u shown.Units, number uint64) (events []byte, at uint64, next <-chan struct{}) {
	f := &p.feed
	f.mu.Lock()
	defer f.mu.Unlock()
	e := f.byUnit[key]
	if s := p.Snapshot(); s != nil && s != e.of {
		e.turn(s, p.Now().UnixNano(), u)
	}
	switch {
	case e.number == number:
		return nil, number, f.beaten
	case e.number == number+1 && number > 0:
		return e.changes, e.number, f.beaten
	}
	return appendWarned(eventsOf(nil, e.shown, e.of.At), e.warned), e.number, f.beaten
}

// turn goes on to another snapshot.
func (e *edition) turn(s *view.Snapshot, at int64, u shown.Units) {
	fresh := make([]now, len(s.Loads))
	for i := range fresh {
		fresh[i] = nowOf(s, i, at, u)
	}
	e.changes = eventsOf(e.shown, fresh, s.At)
	if warned := warnedOf(s); warned != e.warned {
		e.changes, e.warned = appendWarned(e.changes, warned), warned
	}
	e.of, e.shown = s, fresh
	e.number++
}

// warnedOf tells one list of warnings from another: by which there are, and where each stands.
func warnedOf(s *view.Snapshot) string {
	h := fnv.New64a()
	for i := range s.Warnings.All {
		l := &s.Warnings.All[i]
		fmt.Fprintf(h, "%d %s %s %d\n", l.Number, l.State(), stateOf(l, time.UTC), l.End)
	}
	return strconv.FormatUint(h.Sum64(), 36)
}

// appendWarned is the event named warnings: its data are those of [warnedOf]. A page that was
// made with others asks for its list again.
func appendWarned(b []byte, warned string) []byte {
	return fmt.Appendf(b, "event: warnings\ndata: %s\n\n", warned)
}

// eventsOf are the server-sent events (WHATWG HTML, 9.2) that lead from before, which is as
// long, to fresh. Where before is empty they tell all of fresh, also what there is none of: who
// reads them may have the texts of any earlier beat.
//
// The first has no name. Its data are the event time in Unix seconds, "|", and the loads in
// their order, parted by commas: of each the duty, its ±, what is expected and the allowance,
// parted by spaces. What has not changed is empty, and left out at the end; "*3" stands for
// three loads of which nothing has, and nothing at the end for all that are left. A figure that there is none of is "-".
//
// The second, named words, comes where words have changed: a JSON array of arrays of number,
// verdict and note.
func eventsOf(before, fresh []now, at int64) []byte {
	b := append([]byte("data: "), strconv.FormatInt(at/1e9, 10)...)
	b = append(b, '|')
	var words [][3]any
	same, first := 0, true
	for i := range fresh {
		was := &unknown
		if i < len(before) {
			was = &before[i]
		}
		if fresh[i].Verdict != was.Verdict || fresh[i].Note != was.Note {
			words = append(words, [3]any{i, fresh[i].Verdict, fresh[i].Note})
		}
		fields := changed(was, &fresh[i])
		if len(fields) == 0 {
			same++
			continue
		}
		b = appendSame(b, same, &first)
		b = appendFields(parted(b, &first), fields)
		same = 0
	}
	b = append(b, "\n\n"...)
	if len(words) == 0 {
		return b
	}
	text, _ := json.Marshal(words) // of numbers and texts
	return fmt.Appendf(b, "event: words\ndata: %s\n\n", text)
}

// unknown differs in each of its texts from whatever may be shown.
var unknown = now{Verdict: "?", Note: "?", Duty: "?", Spread: "?", Expected: "?", Allowed: "?"}

// changed are the fields of a load up to the last that has changed; those that have not are
// empty.
func changed(was, is *now) []string {
	fields := make([]string, 0, 4)
	last := 0
	for k, pair := range [...][2]string{{was.Duty, is.Duty}, {was.Spread, is.Spread}, {was.Expected, is.Expected}, {was.Allowed, is.Allowed}} {
		text := ""
		if pair[0] != pair[1] {
			last = k + 1
			if text = pair[1]; text == "" || text == shown.None {
				text = "-"
			}
		}
		fields = append(fields, text)
	}
	return fields[:last]
}

func parted(b []byte, first *bool) []byte {
	if *first {
		*first = false
		return b
	}
	return append(b, ',')
}

// appendSame tells of n loads of which nothing has changed.
func appendSame(b []byte, n int, first *bool) []byte {
	switch n {
	case 0:
		return b
	case 1:
		return parted(b, first)
	}
	b = append(parted(b, first), '*')
	return strconv.AppendInt(b, int64(n), 10)
}

func appendFields(b []byte, fields []string) []byte {
	for k, text := range fields {
		if k > 0 {
			b = append(b, ' ')
		}
		b = append(b, text...)
	}
	return b
}
