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
	"net"
	"net/http"
	"os"
	"path/filepath"
	"time"

	"heatreeve/store"
)

// answerBytes bounds what is read of an agent's answer.
const answerBytes = 64 << 20

// errUnreachable says that no agent answers at the address that one has left.
var errUnreachable = errors.New("no answer")

// Inquire answers q from a history: a data folder, or a copy of its file. Where an agent
// runs on the folder, it is asked. What is wrong with q is a [*QueryError].
func Inquire(ctx context.Context, data string, q Query) (*Report, error) {
	path := data
	info, err := os.Stat(data)
	if err != nil {
		return nil, fmt.Errorf("history: %w", err)
	}
	var silence error
	if info.IsDir() {
		path = filepath.Join(data, HistoryFile)
		if a, ok := findAddress(data); ok {
			r, err := ask(ctx, a, q)
			if !errors.Is(err, errUnreachable) {
				return r, err
			}
			silence = err
		}
	}
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		return nil, fmt.Errorf("no history in %q: there is no file %s", data, HistoryFile)
	}
	r, err := inquireFile(ctx, path, q)
	if errors.Is(err, store.ErrLocked) {
		return nil, fmt.Errorf("%w, and it cannot be asked: %w; report where it runs, or on a copy of the file", err, silentFor(silence, data))
	}
	return r, err
}

// silentFor says why no agent could be asked.
func silentFor(silence error, data string) error {
	if silence == nil {
		return fmt.Errorf("no %s in %q tells where it answers", addressFile, data)
	}
	return silence
}

// ask has the agent at a answer.
func ask(ctx context.Context, a address, q Query) (*Report, error) {
	ctx, cancel := context.WithTimeout(ctx, reportTime+10*time.Second)
	defer cancel()
	req, err := http.NewRequestWithContext(ctx, http.MethodGet, "http://"+a.hostPort+reportPath+"?"+q.values().Encode(), nil)
	if err != nil {
		return nil, fmt.Errorf("%w at %q: %w", errUnreachable, a.hostPort, err)
	}
	transport := &http.Transport{DialContext: (&net.Dialer{Timeout: 3 * time.Second}).DialContext, DisableKeepAlives: true}
	resp, err := transport.RoundTrip(req)
	if err != nil {
		if ctx.Err() != nil {
			return nil, fmt.Errorf("agent at %s: %w", a.hostPort, err)
		}
		return nil, fmt.Errorf("%w at %s: %w", errUnreachable, a.hostPort, err)
	}
	defer resp.Body.Close()
	if resp.Header.Get(runHeader) != a.run {
		return nil, fmt.Errorf("%w at %s: something else listens there", errUnreachable, a.hostPort)
	}
	body, err := io.ReadAll(io.LimitReader(resp.Body, answerBytes))
	if err != nil {
		return nil, fmt.Errorf("agent at %s: %w", a.hostPort, err)
	}
	return understand(a, resp.StatusCode, body)
}

// understand reads an agent's answer.
func understand(a address, status int, body []byte) (*Report, error) {
	text := string(bytes.TrimSpace(body))
	switch status {
	case http.StatusOK:
		r := new(Report)
		if err := json.Unmarshal(body, r); err != nil {
			return nil, fmt.Errorf("agent at %s: its answer of %d bytes: %w", a.hostPort, len(body), err)
		}
		return r, nil
	case http.StatusBadRequest:
		return nil, &QueryError{text}
	}
	return nil, errors.New(text)
}

// inquireFile answers q from a file that no agent has open.
func inquireFile(ctx context.Context, path string, q Query) (r *Report, err error) {
	db, err := store.Open(path, store.Options{})
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	h, err := historyOf(db)
	if err != nil {
		return nil, err
	}
	return h.report(ctx, q)
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
	h.site = s.Site
	for name := range s.Judges {
		h.current = append(h.current, name)
	}
	if s.Zone != "" { // older histories have none
		h.zone, err = time.LoadLocation(s.Zone)
	}
	return h, err
}
