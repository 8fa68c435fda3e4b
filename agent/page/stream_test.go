package page

import (
	"bufio"
	"context"
	"encoding/json"
	"fmt"
	"net/http"
	"net/http/httptest"
	"strconv"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/view"
	"heatreeve/agent/warn"
)

// reader follows the stream as the page's script does.
type reader struct {
	fields [][4]string
	words  map[int][2]string
	at     int64
	plan   string
	warned string
}

// take reads one event.
func (r *reader) take(t *testing.T, name, data string) {
	t.Helper()
	switch name {
	case "plan":
		r.plan = data
	case "warnings":
		r.warned = data
	case "words":
		var all [][3]any
		if err := json.Unmarshal([]byte(data), &all); err != nil {
			t.Fatal(err)
		}
		for _, x := range all {
			r.words[int(x[0].(float64))] = [2]string{x[1].(string), x[2].(string)}
		}
	case "":
		at, all, _ := strings.Cut(data, "|")
		r.at, _ = strconv.ParseInt(at, 10, 64)
		r.figures(t, all)
	default:
		t.Fatalf("event %q", name)
	}
}

func (r *reader) figures(t *testing.T, all string) {
	t.Helper()
	i := 0
	for _, record := range strings.Split(all, ",") {
		if n, ok := strings.CutPrefix(record, "*"); ok {
			k, err := strconv.Atoi(n)
			if err != nil {
				t.Fatal(err)
			}
			i += k
			continue
		}
		for k, text := range strings.Split(record, " ") {
			if text != "" {
				r.fields[i][k] = text
			}
		}
		i++
	}
}

// events splits what a stream has sent.
func (r *reader) events(t *testing.T, text string) {
	t.Helper()
	for _, event := range strings.Split(strings.TrimSuffix(text, "\n\n"), "\n\n") {
		name, data := "", ""
		for _, line := range strings.Split(event, "\n") {
			switch field, value, _ := strings.Cut(line, ": "); field {
			case "event":
				name = value
			case "data":
				data = value
			}
		}
		if event != "" {
			r.take(t, name, data)
		}
	}
}

func many(n int) []view.Load {
	all := make([]view.Load, n)
	for i := range all {
		all[i] = cooler()
		all[i].Name = fmt.Sprintf("load-%d", i)
	}
	return all
}

// Whatever changes between beats, who follows the changes has the same texts as who is told all,
// and as who comes back with the texts of an earlier beat.
func TestChangesLeadToWhatIsShown(t *testing.T) {
	p, source := mill(t, many(12)...)
	key := p.usual.Key()
	p.feed.join(key)
	follower := &reader{fields: make([][4]string, 12), words: map[int][2]string{}}
	late := &reader{fields: make([][4]string, 12), words: map[int][2]string{}}
	number := uint64(0)
	for beat := range 200 {
		s := *source.snapshot
		s.Loads = append([]view.Load(nil), s.Loads...)
		for i := range s.Loads {
			if (beat*7+i*5)%11 < 3 {
				l := &s.Loads[i]
				l.Figure.Duty = 40e3 + float64((beat*31+i*17)%900)
				l.Figure.Uncertainty = 300 + float64((beat*i)%200)
				l.Figure.Idle = (beat+i)%13 == 0
				l.Design = float64((beat / 40) % 3 * 20e3)
				l.Verdict = design.Verdicts[(beat+i)%5]
			}
		}
		s.At += int64(beat) * 1e9
		source.snapshot = &s
		p.Beat()
		events, at, _ := p.since(key, p.usual, number)
		number = at
		follower.events(t, string(events))
		fresh := &reader{fields: make([][4]string, 12), words: map[int][2]string{}}
		all, _, _ := p.since(key, p.usual, 0)
		fresh.events(t, string(all))
		readers := []*reader{follower, fresh}
		if beat%3 == 2 {
			late.events(t, string(all))
			readers = append(readers, late)
		}
		for i := range s.Loads {
			n := nowOf(&s, i, noon.UnixNano(), p.usual)
			want := [4]string{n.Duty, n.Spread, n.Expected, n.Allowed}
			for _, r := range readers {
				for k := range want {
					got := r.fields[i][k]
					if got == "-" {
						got = map[bool]string{true: "–", false: ""}[k == 0]
					}
					if got != want[k] {
						t.Fatalf("beat %d, load %d, field %d: %q is told, %q shown", beat, i, k, got, want[k])
					}
				}
				if r.words[i] != [2]string{n.Verdict, n.Note} || r.at != s.At/1e9 {
					t.Fatalf("beat %d, load %d: words %q at %d", beat, i, r.words[i], r.at)
				}
			}
		}
	}
}

// A reader who has missed beats is told all, one who has not only changes, and a beat without
// any still says that the agent lives.
func TestStreamTellsChanges(t *testing.T) {
	p, source := mill(t, many(5)...)
	key := p.usual.Key()
	p.feed.join(key)
	turn := func(change func(*view.Snapshot)) {
		s := *source.snapshot
		s.Loads = append([]view.Load(nil), s.Loads...)
		change(&s)
		source.snapshot = &s
	}
	first, n, _ := p.since(key, p.usual, 0)
	if want := "data: 1796126400|40.80 0.70 40.0 4.0,40.80 0.70 40.0 4.0"; !strings.HasPrefix(string(first), want) {
		t.Errorf("first event %q, want %q before the rest", first, want)
	}
	turn(func(s *view.Snapshot) { s.Loads[3].Figure.Duty = 41e3 })
	if got, m, _ := p.since(key, p.usual, n); string(got) != "data: 1796126400|*3,41.00\n\n" || m != n+1 {
		t.Errorf("one load has changed: %q", got)
	}
	turn(func(s *view.Snapshot) { s.At += 1e9 })
	if got, m, _ := p.since(key, p.usual, n+1); string(got) != "data: 1796126401|\n\n" || m != n+2 {
		t.Errorf("nothing has changed: %q", got)
	}
	if got, _, _ := p.since(key, p.usual, n); !strings.Contains(string(got), "41.00 0.70 40.0 4.0") {
		t.Errorf("who has missed a beat is told %q", got)
	}
	if got, m, _ := p.since(key, p.usual, n+2); got != nil || m != n+2 {
		t.Errorf("without a beat: %q", got)
	}
}

// A warning that is raised, and one that is acknowledged, is told once; the page then made has
// the list that the event tells of.
func TestStreamTellsOfWarnings(t *testing.T) {
	p, source := mill(t, many(2)...)
	key := p.usual.Key()
	p.feed.join(key)
	follower := &reader{fields: make([][4]string, 2), words: map[int][2]string{}}
	number := uint64(0)
	turn := func(entries ...warn.Entry) (events string) {
		t.Helper()
		s := *source.snapshot
		s.At += 1e9
		s.Warnings.All = nil
		for _, e := range entries {
			s.Warnings.All = append(s.Warnings.All, warn.Listed{Entry: e})
		}
		source.snapshot = &s
		b, at, _ := p.since(key, p.usual, number)
		number = at
		follower.events(t, string(b))
		if page := get(p, "/").Body.String(); !strings.Contains(page, `data-warned="`+follower.warned+`"`) {
			t.Errorf("the page is of other warnings than %q: %s", follower.warned, page)
		}
		return string(b)
	}
	e := warn.Entry{Warning: design.Warning{Subject: "load-1", Kind: design.WarnShort, Begin: noon.UnixNano()}, Number: 7}
	marked := e
	marked.Mark = &warn.Mark{By: "shift"}
	for _, step := range []struct {
		entries []warn.Entry
		told    bool
	}{{nil, true}, {[]warn.Entry{e}, true}, {[]warn.Entry{e}, false}, {[]warn.Entry{marked}, true}, {nil, true}} {
		if got := turn(step.entries...); strings.Contains(got, "event: warnings\n") != step.told {
			t.Errorf("%+v: told %v in %q", step.entries, !step.told, got)
		}
	}
}

// The stream is served as it grows, ends with the agent, and is bounded in number.
func TestStreamIsServed(t *testing.T) {
	p, source := mill(t, many(2)...)
	ended := make(chan struct{})
	p.Ended = ended
	server := httptest.NewServer(p)
	defer server.Close()
	open := func() (*http.Response, *bufio.Reader) {
		req, err := http.NewRequestWithContext(t.Context(), http.MethodGet, server.URL+"/api/v1/stream", nil)
		if err != nil {
			t.Fatal(err)
		}
		resp, err := http.DefaultClient.Do(req)
		if err != nil {
			t.Fatal(err)
		}
		return resp, bufio.NewReader(resp.Body)
	}
	resp, lines := open()
	defer resp.Body.Close()
	until := func(want string) {
		t.Helper()
		for {
			line, err := lines.ReadString('\n')
			if err != nil {
				t.Fatalf("%v before %q", err, want)
			}
			if strings.Contains(line, want) {
				return
			}
		}
	}
	until("data: " + p.plan())
	until("|40.80")
	s := *source.snapshot
	s.Loads = many(2)
	s.Loads[0].Figure.Duty = 42e3
	s.Loads[0].Until, s.Loads[1].Until = s.At, s.At
	source.snapshot = &s
	p.Beat()
	until("|42.00")
	p.streams.Add(mostStreams)
	if full, _ := open(); full.StatusCode != http.StatusServiceUnavailable || full.Header.Get("Retry-After") == "" {
		t.Errorf("one too many is answered with %s", full.Status)
	}
	p.streams.Add(-mostStreams)
	close(ended)
	if _, err := lines.ReadString(0); err == nil {
		t.Error("the stream goes on after the agent")
	}
	ctx, cancel := context.WithTimeout(t.Context(), 5*time.Second)
	defer cancel()
	for p.streams.Load() != 0 {
		if ctx.Err() != nil {
			t.Fatalf("%d streams are still counted", p.streams.Load())
		}
	}
	if len(p.feed.byUnit) != 0 {
		t.Errorf("editions that nobody reads are kept: %d", len(p.feed.byUnit))
	}
}

// Who asks for the head of the stream alone is answered at once, and keeps no place.
func TestHeadOfTheStreamEnds(t *testing.T) {
	p, _ := mill(t, many(2)...)
	ended := make(chan struct{})
	p.Ended = ended
	server := httptest.NewServer(p)
	defer server.Close()
	defer close(ended)
	client := &http.Client{Transport: &http.Transport{}, Timeout: 5 * time.Second}
	defer client.CloseIdleConnections()
	for range 2 { // the second one on the connection of the first
		resp, err := client.Head(server.URL + "/api/v1/stream")
		if err != nil {
			t.Fatal(err)
		}
		resp.Body.Close()
		if kind := resp.Header.Get("Content-Type"); kind != "text/event-stream" {
			t.Errorf("content type %q", kind)
		}
	}
	if n := p.streams.Load(); n != 0 {
		t.Errorf("%d streams are kept open", n)
	}
}
