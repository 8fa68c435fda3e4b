package agent

import (
	"bytes"
	"context"
	"encoding/gob"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"maps"
	"net/http"
	"net/http/httptrace"
	"net/textproto"
	"net/url"
	"os"
	"path/filepath"
	"slices"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/doors"
	"heatreeve/store"
)

// errUnreachable says that no agent answers at the address that one has left.
var errUnreachable = errors.New("no answer")

// reach finds a history in data, a data folder or a copy of its file: where an agent runs on
// the folder it has it asked, and otherwise has the file read.
func reach(data string, ask func(address) error, read func(history) error) error {
	path := data
	info, err := os.Stat(data)
	if err != nil {
		return fmt.Errorf("history: %w", err)
	}
	silence := errors.New("this is a file, and no data folder with its address")
	if info.IsDir() {
		path = filepath.Join(data, HistoryFile)
		a, err := findAddress(data)
		if err == nil {
			err = ask(a)
			if !errors.Is(err, errUnreachable) {
				return err
			}
		}
		silence = err
	}
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("no history in %q: there is no file %s", data, HistoryFile)
	}
	err = readFile(path, read)
	if errors.Is(err, store.ErrLocked) {
		return fmt.Errorf("%w, and it cannot be asked: %w; run this where it runs, or on a copy of the file", err, silence)
	}
	return err
}

const (
	// headerTime is how long an agent may take to tell that it is there.
	headerTime  = 5 * time.Second
	headerBytes = 64 << 10
)

// get asks the agent at a for a page, and has take the answer, which is of that very run of
// it. Who does not tell at once that it is that run is taken for no agent.
func (a address) get(ctx context.Context, path string, v url.Values, take func(*http.Response) error) error {
	return a.send(ctx, http.MethodGet, path+"?"+v.Encode(), nil, take)
}

// send is get with another method and a form.
func (a address) send(ctx context.Context, method, path string, form io.Reader, take func(*http.Response) error) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	silence := fmt.Errorf("%w at %s within %v", errUnreachable, a.hostPort, headerTime)
	timer := time.AfterFunc(headerTime, func() { cancel(silence) })
	defer timer.Stop()
	traced := httptrace.WithClientTrace(ctx, &httptrace.ClientTrace{Got1xxResponse: func(_ int, h textproto.MIMEHeader) error {
		if h.Get(doors.RunHeader) == a.run {
			timer.Stop()
		}
		return nil
	}})
	req, err := http.NewRequestWithContext(traced, method, "http://"+a.hostPort+path, form)
	if err != nil {
		return fmt.Errorf("%w at %q: %w", errUnreachable, a.hostPort, err)
	}
	req.Header.Set(doors.RunHeader, a.run)
	req.Header.Set(doors.KeyHeader, a.key)
	if form != nil {
		req.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	}
	transport := &http.Transport{DisableKeepAlives: true, DisableCompression: true, MaxResponseHeaderBytes: headerBytes}
	resp, err := transport.RoundTrip(req)
	switch {
	case errors.Is(context.Cause(ctx), errUnreachable):
		return silence
	case err != nil && ctx.Err() != nil:
		return fmt.Errorf("agent at %s: %w", a.hostPort, err)
	case err != nil:
		return fmt.Errorf("%w at %s: %w", errUnreachable, a.hostPort, err)
	}
	defer resp.Body.Close()
	timer.Stop()
	if resp.Header.Get(doors.RunHeader) != a.run {
		return fmt.Errorf("%w at %s: something else listens there", errUnreachable, a.hostPort)
	}
	return take(resp)
}

// refusal is an agent's answer that is not what was asked for.
func refusal(status int, body []byte) error {
	text := string(bytes.TrimSpace(body))
	var p answer.Problem
	if json.Unmarshal(body, &p) == nil && p.Detail != "" {
		text = p.Detail
	}
	if status == http.StatusBadRequest {
		return &answer.QueryError{Text: text}
	}
	return errors.New(text)
}

// readFile has a file read that no agent has open.
func readFile(path string, read func(history) error) (err error) {
	db, err := store.OpenReadOnly(path)
	if err != nil {
		return salvageable(path, err)
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	h, err := historyOf(db)
	if err != nil {
		return err
	}
	return read(h)
}

// historyOf reads from a file what a running agent knows of its site.
func historyOf(db *store.Store) (h history, err error) {
	through, err := eventTime(db)
	if err != nil {
		return h, err
	}
	if through.IsZero() {
		return h, errors.New("the history holds no account yet")
	}
	h = history{db: db, through: through.UnixNano}
	state, ok, err := db.Checkpoint()
	if err != nil || !ok {
		return h, err
	}
	var s savedAccounts
	if err := gob.NewDecoder(bytes.NewReader(state)).Decode(&s); err != nil {
		return h, fmt.Errorf("state of %d bytes: %w", len(state), err)
	}
	h.site, h.units = s.Site, s.Units
	h.current = slices.AppendSeq(h.current, maps.Keys(s.Loads))
	if len(s.Loads) == 0 { // as older ones have it
		h.current = slices.AppendSeq(h.current, maps.Keys(s.Judges))
	}
	if s.Zone != "" { // older histories have none
		h.zone, err = time.LoadLocation(s.Zone)
	}
	return h, err
}
