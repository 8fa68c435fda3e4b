package agent

import (
	"bytes"
	"context"
	"encoding/gob"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"net/http"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/warn"
	"heatreeve/store"
)

const (
	// markPath is where marks are put on warnings.
	markPath  = "/mark"
	markBytes = 16 << 10
)

// mark is an order on its way to the beat.
type mark struct {
	order  Order
	answer chan<- marked // has room for the one answer
}

type marked struct {
	done Done
	err  error
}

// marks takes orders, and answers when they are on disk.
type marks struct {
	orders chan<- mark
}

func (s *marks) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	r.Body = http.MaxBytesReader(w, r.Body, markBytes)
	if err := r.ParseForm(); err != nil {
		answer.Refuse(w, http.StatusBadRequest, "mark: "+err.Error())
		return
	}
	o, err := orderOf(r.PostForm)
	if err != nil {
		refuse(w, err)
		return
	}
	done, err := s.put(r.Context(), o)
	if err != nil {
		refuse(w, err)
		return
	}
	w.Header().Set("Content-Type", "application/json")
	_ = json.NewEncoder(w).Encode(done) // who asked has gone
}

// put hands the order to the beat, and waits for what comes of it.
func (s *marks) put(ctx context.Context, o Order) (d Done, err error) {
	ctx, cancel := context.WithTimeout(ctx, beatTime)
	defer cancel()
	answer := make(chan marked, 1)
	select {
	case s.orders <- mark{o, answer}:
	case <-ctx.Done():
		return d, fmt.Errorf("the agent does not come to it within %v, and nothing is marked; it is busy, or stops", beatTime)
	}
	select {
	case m := <-answer:
		return m.done, m.err
	case <-ctx.Done():
		return d, fmt.Errorf("the agent has not written it within %v; heatreeve warnings tells what has become of it", beatTime)
	}
}

// mark carries an order out and commits it; in the goroutine of the beat. What is not on disk
// is not marked.
func (a *Agent) mark(r *rhythm, o Order) marked {
	l := r.books
	before := l.accounts.roll.Clone()
	m := marking{&l.accounts.roll, l.accounts.watched, l.accounts.place, l.present(), l.diary.number}
	events, err := m.carryOut(o)
	if err != nil {
		l.accounts.roll = before
		return marked{err: err}
	}
	for _, e := range events {
		l.tellEvent(e)
	}
	l.board = l.accounts.roll.Board(l.accounts.watched)
	if a.commit(r, time.Now(), true) {
		a.publish(r) // so that who asks next is told
		return marked{done: done(events)}
	}
	l.accounts.roll, l.forced = before, true
	l.board = l.accounts.roll.Board(l.accounts.watched)
	l.diary.waiting = slices.DeleteFunc(l.diary.waiting, func(e store.Event) bool {
		return slices.ContainsFunc(events, func(x store.Event) bool { return x.Number == e.Number })
	})
	return marked{err: errors.New("the history is not written, and nothing is marked: " + l.fault)}
}

// Put carries an order out on the warnings of a history, a data folder or a file that no
// agent has open. Where an agent runs on the folder, it is asked; it answers when the order is
// on disk. What is wrong with the order is a [*QueryError].
func Put(ctx context.Context, data string, o Order) (d *Done, err error) {
	path := data
	info, err := os.Stat(data)
	if err != nil {
		return nil, fmt.Errorf("history: %w", err)
	}
	silence := errors.New("this is a file, and no data folder with its address")
	if info.IsDir() {
		path = filepath.Join(data, HistoryFile)
		a, err := findAddress(data)
		if err == nil {
			d, err = a.put(ctx, o)
			if !errors.Is(err, errUnreachable) {
				return d, err
			}
		}
		silence = err
	}
	if _, err := os.Stat(path); err != nil { // which opening would make
		return nil, fmt.Errorf("no history in %q: %w", data, err)
	}
	d, err = amend(path, o, time.Now())
	if errors.Is(err, store.ErrLocked) {
		return nil, fmt.Errorf("%w, and it cannot be asked: %w; run this where it runs", err, silence)
	}
	return d, err
}

// put has the agent at a carry the order out.
func (a address) put(ctx context.Context, o Order) (d *Done, err error) {
	ctx, cancel := context.WithTimeout(ctx, beatTime+headerTime)
	defer cancel()
	err = a.send(ctx, http.MethodPost, markPath, strings.NewReader(o.values().Encode()), func(resp *http.Response) error {
		body, err := io.ReadAll(io.LimitReader(resp.Body, explanationBytes))
		if err != nil {
			return fmt.Errorf("agent at %s: %w", a.hostPort, err)
		}
		d, err = understand[Done](a, resp.StatusCode, body)
		return err
	})
	return d, err
}

// amend carries the order out in a file that no agent has open.
func amend(path string, o Order, now time.Time) (d *Done, err error) {
	db, err := store.Open(path, store.Options{})
	if err != nil {
		return nil, salvageable(path, err)
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	state, ok, err := db.Checkpoint()
	switch {
	case err != nil:
		return nil, err
	case !ok:
		return nil, errors.New("the history holds no account yet")
	}
	var s savedAccounts
	if err := gob.NewDecoder(bytes.NewReader(state)).Decode(&s); err != nil {
		return nil, fmt.Errorf("state of %d bytes: %w", len(state), err)
	}
	m, err := s.marking(db, now)
	if err != nil {
		return nil, err
	}
	events, err := m.carryOut(o)
	if err != nil {
		return nil, err
	}
	var buf bytes.Buffer
	if err := gob.NewEncoder(&buf).Encode(s); err != nil {
		return nil, err
	}
	if err := db.Amend(buf.Bytes(), events); err != nil {
		return nil, err
	}
	told := done(events)
	return &told, nil
}

// marking is what carries orders out on the saved roll.
func (s *savedAccounts) marking(db *store.Store, now time.Time) (m marking, err error) {
	through, err := eventTime(db)
	if err != nil {
		return m, err
	}
	d, err := newDiary(db, time.Now)
	if err != nil {
		return m, err
	}
	m = marking{&s.Roll, s.Watched, time.UTC, max(now.UnixNano(), through.UnixNano()), d.number}
	if s.Zone != "" {
		m.place, err = time.LoadLocation(s.Zone)
	}
	return m, err
}

// boardOf is what a history has of its warnings.
func (s *savedAccounts) board(now int64) warn.Board {
	r := s.Roll.Clone()
	r.Advance(now)
	return r.Board(s.Watched)
}

// privately adds to what everybody may ask what the command line alone may do.
func privately(public http.Handler, orders chan<- mark) http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /", public)
	mux.Handle("POST "+markPath, &marks{orders})
	return mux
}
