package agent

import (
	"bytes"
	"context"
	"encoding/gob"
	"errors"
	"net/http"
	"net/url"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/warn"
)

const (
	// warningsPath is where the warnings are that stand.
	warningsPath = answer.Path + "warnings"
	// warningsTime bounds how long one answer may take.
	warningsTime = 10 * time.Second
)

func standingOf(site string, at int64, b *warn.Board, place *time.Location) *answer.Standing {
	s := &answer.Standing{Site: site, At: time.Unix(0, at).In(place), Warnings: []warn.Document{}, Shelves: []answer.Shelved{}}
	for _, l := range b.Listed() {
		s.Warnings = append(s.Warnings, l.Document("", place))
	}
	for i := range b.Shelves {
		f := &b.Shelves[i]
		s.Shelves = append(s.Shelves, answer.Shelved{Subject: f.Subject, Kind: string(f.Kind), MarkDocument: *f.Document(place)})
	}
	return s
}

// boards tells the warnings that stand while the agent runs.
type boards struct {
	health *health
	zone   *time.Location
}

func newBoards(r *reports, h *health) *boards { return &boards{h, r.history.zone} }

func (s *boards) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	if err := noParameters(r.URL.Query()); err != nil {
		refuse(w, err)
		return
	}
	v := s.health.latest.Load()
	if v == nil {
		refuse(w, errNoBeat)
		return
	}
	hand(w, r, standingOf(v.Site, v.At, &v.Warnings, s.zone), reportStall)
}

// Warnings tells what stands by a history: a data folder, or a copy of its file. Where an
// agent runs on the folder, it is asked.
func Warnings(ctx context.Context, data string) (s *answer.Standing, err error) {
	err = reach(data, func(a address) (err error) {
		s, err = request[answer.Standing](ctx, a, warningsPath, url.Values{}, warningsTime, answerBytes)
		return err
	}, func(h history) (err error) {
		s, err = h.standing(time.Now())
		return err
	})
	if err != nil {
		return nil, err
	}
	return s, nil
}

// standing reads from the history what stands, by a clock that tells which shelves have ended.
func (h *history) standing(now time.Time) (*answer.Standing, error) {
	state, ok, err := h.db.Checkpoint()
	if err != nil {
		return nil, err
	}
	if !ok {
		return nil, errors.New("the history holds no account yet")
	}
	var s savedAccounts
	if err := gob.NewDecoder(bytes.NewReader(state)).Decode(&s); err != nil {
		return nil, err
	}
	place := h.zone
	if place == nil {
		place = time.UTC
	}
	b := s.board(max(now.UnixNano(), h.through()))
	return standingOf(h.site, h.through(), &b, place), nil
}
