package agent

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"net/http"
	"net/url"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/page"
)

const (
	seriesPath = answer.Path + "series"
	// streamPath is where the page follows the figures.
	streamPath = answer.Path + "stream"
)

// errNoBeat is told before the first snapshot.
var errNoBeat = errors.New("no beat yet")

// errBusy says that the beat has not come to it.
var errBusy = errors.New("the agent")

// api are the handlers of the interface by their paths.
type api map[string]http.Handler

func newAPI(page http.Handler, r *reports, x *explains, h *health, version string) api {
	return api{
		sitePath: newPlace(x.site, version), loadsPath: newPresent(h, r.history.zone), seriesPath: newSeries(r.history),
		reportPath: r, explainPath: x, exportPath: newExports(r), warningsPath: newBoards(r, h), eventsPath: newEvents(r.history),
		streamPath: page, documentPath: http.HandlerFunc(document),
	}
}

// mount serves the paths, and says of others that there is nothing.
func (a api) mount(mux *http.ServeMux) {
	for path, h := range a {
		mux.Handle("GET "+path, h)
	}
	mux.HandleFunc("GET /api/", func(w http.ResponseWriter, r *http.Request) {
		answer.Refuse(w, http.StatusNotFound, "there is no "+r.URL.Path+"; "+answer.Path+"openapi.json tells what there is")
	})
	for _, method := range []string{"POST", "PUT", "PATCH", "DELETE"} {
		mux.HandleFunc(method+" /api/", func(w http.ResponseWriter, _ *http.Request) {
			w.Header().Set("Allow", "GET, HEAD")
			answer.Refuse(w, http.StatusMethodNotAllowed, "the interface can only be read, by GET")
		})
	}
}

// noParameters refuses what is asked of a path that takes nothing.
func noParameters(v url.Values) error {
	for name := range v {
		return answer.Wrongf("%s is no parameter; known: none", name)
	}
	return nil
}

// documentPath is where the interface is described.
const documentPath = answer.Path + "openapi.json"

// document tells what the interface is, by OpenAPI 3.1.
func document(w http.ResponseWriter, r *http.Request) {
	if err := noParameters(r.URL.Query()); err != nil {
		refuse(w, err)
		return
	}
	page.Answer(w, r, "application/json", page.OpenAPI())
}

// newSeries tells the course of loads.
func newSeries(h history) http.Handler {
	return &queries[answer.SeriesQuery, answer.Series]{
		turn: newTurn(atATime, "other courses are in the making; try again in a while"),
		read: answer.SeriesQueryOf, answer: h.series,
	}
}

// allow grants an answer more time than others have; where that cannot be set, there is no
// bound.
func allow(w http.ResponseWriter, d time.Duration) {
	_ = http.NewResponseController(w).SetWriteDeadline(time.Now().Add(d))
}

// hand answers with x as JSON. Each piece of it is to be taken within stall, and all of it
// within the time of a report, so that who takes nothing does not keep the turn.
func hand(w http.ResponseWriter, r *http.Request, x any, stall time.Duration) {
	var body bytes.Buffer
	e := json.NewEncoder(&body)
	e.SetEscapeHTML(false)
	if err := e.Encode(x); err != nil {
		refuse(w, err)
		return
	}
	control := http.NewResponseController(w)
	page.Answer(&steady{ResponseWriter: w, control: control, stall: stall, end: time.Now().Add(reportTime)}, r, "application/json", body.Bytes())
	_ = control.Flush() // what is kept back is to be taken within the turn too
}

// refuse says why there is no answer.
func refuse(w http.ResponseWriter, err error) {
	status := http.StatusInternalServerError
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		status = http.StatusBadRequest
	case errors.Is(err, answer.ErrNoRecord):
		status = http.StatusNotFound
	case errors.Is(err, errBusy), errors.Is(err, errNoBeat), errors.Is(err, context.DeadlineExceeded):
		status = http.StatusServiceUnavailable
	}
	answer.Refuse(w, status, err.Error())
}
