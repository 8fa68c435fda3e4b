package page

import (
	"fmt"
	"net/http"
	"net/url"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

const (
	// mostStreams bounds the event streams at one time.
	mostStreams = 128
	// streamStall is how long a reader may take nothing of an event.
	streamStall = 10 * time.Second
	// streamSilence is how long a stream says nothing where the beat stands still.
	streamSilence = 15 * time.Second
	// streamKind is the media type of server-sent events.
	streamKind = "text/event-stream"
)

// stream sends the present figures as server-sent events, all of them first, and then at each
// beat those that have changed; see eventsOf. Before them comes one named plan, which tells
// the site file and the program apart from others: a page of another plan is to be loaded anew.
func (p *Page) stream(w http.ResponseWriter, r *http.Request) {
	u, err := p.unitsOf(r.URL.Query())
	if err != nil {
		answer.Refuse(w, http.StatusBadRequest, err.Error())
		return
	}
	if r.Method == http.MethodHead { // to whom nothing is written, which would tell when they have gone
		w.Header().Set("Content-Type", streamKind)
		return
	}
	if p.streams.Add(1) > mostStreams {
		p.streams.Add(-1)
		answer.Refuse(w, http.StatusServiceUnavailable, fmt.Sprintf("%d pages follow the figures already, which are all that may; load the page again to see the present ones", mostStreams))
		return
	}
	defer p.streams.Add(-1)
	key := u.Key()
	p.feed.join(key)
	defer p.feed.leave(key)
	h := w.Header()
	h.Set("Content-Type", streamKind)
	h.Set("Cache-Control", "no-store")
	send := sender(w)
	if !send(fmt.Appendf(nil, "retry: 2000\nevent: plan\ndata: %s\n\n", p.plan())) {
		return
	}
	silence := time.NewTicker(streamSilence)
	defer silence.Stop()
	for number := uint64(0); ; {
		events, at, next := p.since(key, u, number)
		if number = at; len(events) > 0 && !send(events) {
			return
		}
		select {
		case <-next:
		case <-silence.C:
			if !send([]byte(":\n\n")) {
				return
			}
		case <-r.Context().Done():
			return
		case <-p.Ended:
			return
		}
	}
}

// unitsOf reads the units of a stream, which has no other parameters.
func (p *Page) unitsOf(v url.Values) (shown.Units, error) {
	for name, texts := range v {
		switch {
		case !slices.Contains(shown.Kinds(), name):
			return p.usual, answer.Wrongf("%s is no parameter; known: %s", name, strings.Join(shown.Kinds(), ", "))
		case len(texts) != 1:
			return p.usual, answer.Wrongf("%s is given %d times", name, len(texts))
		}
	}
	return shown.Choose(v, p.usual)
}

// sender writes events as they come, each of which must be taken within streamStall.
func sender(w http.ResponseWriter) func([]byte) bool {
	control := http.NewResponseController(w)
	return func(events []byte) bool {
		_ = control.SetWriteDeadline(time.Now().Add(streamStall)) // where it cannot be set, there is no bound
		if _, err := w.Write(events); err != nil {
			return false
		}
		return control.Flush() == nil
	}
}
