package agent

import (
	"context"
	"fmt"
	"heatreeve/agent/answer"
	"net/http"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/site"
	"heatreeve/agent/working"
)

const (
	explainPath = answer.Path + "explain"
	// explainTime bounds how long one explanation may take, and beatTime how long the beat
	// may take to answer.
	explainTime = time.Minute
	beatTime    = 10 * time.Second
	// explanationBytes bounds what is read of an agent's answer.
	explanationBytes = 1 << 20
)

// question asks the beat for what the newest figure of a load was worked from.
type question struct {
	load   int
	answer chan<- working.Subject // has room for the one answer
}

// explains tells the working of figures while the agent runs, one at a time: of the newest
// it asks the beat, of others the history.
type explains struct {
	history   history
	site      *site.Site
	questions chan<- question
	turn      turn // holds one while an explanation is in the making
}

func newExplains(r *reports, s *site.Site, questions chan<- question) *explains {
	return &explains{history: r.history, site: s, questions: questions, turn: newTurn(atATime, "other explanations are in the making; try again in a while")}
}

func (s *explains) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := answer.ExplanationOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), explainTime)
	defer cancel()
	allow(w, explainTime+reportStall)
	if !s.turn.taken(ctx, w) {
		return
	}
	defer s.turn.free()
	x, err := s.explain(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	hand(w, r, x, reportStall)
}

func (s *explains) explain(ctx context.Context, q answer.Explanation) (*working.Working, error) {
	if q.At != "" {
		return s.history.explain(ctx, q)
	}
	load, err := loadIn(s.site, q.Load)
	if err != nil {
		return nil, err
	}
	x, err := s.newest(ctx, load)
	if err != nil {
		return nil, err
	}
	if x.Basis.Figure.At == 0 {
		return nil, fmt.Errorf("%w of a figure of %s since the agent has started: that comes with its first readings, or half a minute later; an earlier one is explained at its time", answer.ErrNoRecord, q.Load)
	}
	return working.Of(x), nil
}

// newest asks the beat.
func (s *explains) newest(ctx context.Context, load int) (x working.Subject, err error) {
	ctx, cancel := context.WithTimeout(ctx, beatTime)
	defer cancel()
	answer := make(chan working.Subject, 1)
	select {
	case s.questions <- question{load, answer}:
	case <-ctx.Done():
		return x, fmt.Errorf("%w does not come to answer within %v; it is busy, or stops", errBusy, beatTime)
	}
	select {
	case x = <-answer:
		return x, nil
	case <-ctx.Done():
		return x, fmt.Errorf("%w has not answered within %v; it is busy, or stops", errBusy, beatTime)
	}
}

// answer tells what the newest figure was worked from; in the goroutine of the beat.
func (a *Agent) answer(r *rhythm, q question) {
	l := r.books.accounts
	x := working.Subject{Site: a.site, Load: q.load, Basis: l.engine.Basis(q.load), Grounds: l.verdicts.Grounds(q.load), Evidence: l.verdicts.Evidence(q.load), Exchanger: expecting(l.verdicts, q.load)}
	if late := a.o.Now().Sub(time.Unix(0, l.engine.Through())); late > time.Minute {
		x.Notes = append(x.Notes, fmt.Sprintf("event time has come no further: it is %v behind the clock of this machine", late.Round(time.Second)))
	}
	q.answer <- x
}

// expecting is the exchanger by which a load's duty is expected, nil for none.
func expecting(p *design.Plant, load int) *working.Exchanger {
	of, minute, ok := p.Expecting(load)
	if !ok {
		return nil
	}
	return &working.Exchanger{Name: of.Name, Model: of.Model, State: minute, Loss: of.Loss, Hot: load == of.Hot}
}

// Explain tells the working of a figure from a history: a data folder, or a copy of its
// file. Where an agent runs on the folder, it is asked. What is wrong with q is a
// [*QueryError].
func Explain(ctx context.Context, data string, q answer.Explanation) (w *working.Working, err error) {
	err = reach(data, func(a address) (err error) {
		w, err = request[working.Working](ctx, a, explainPath, q.Values(), explainTime, explanationBytes)
		return err
	}, func(h history) (err error) {
		w, err = h.explain(ctx, q)
		return err
	})
	if err != nil {
		return nil, err
	}
	return w, nil
}
