package agent

import (
	"bytes"
	"context"
	"encoding/gob"
	"errors"
	"fmt"
	"io/fs"
	"net"
	"net/http"
	"net/url"
	"os"
	"path/filepath"
	"time"

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
	var silence error
	if info.IsDir() {
		path = filepath.Join(data, HistoryFile)
		if a, ok := findAddress(data); ok {
			err := ask(a)
			if !errors.Is(err, errUnreachable) {
				return err
			}
			silence = err
		}
	}
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("no history in %q: there is no file %s", data, HistoryFile)
	}
	err = readFile(path, read)
	if errors.Is(err, store.ErrLocked) {
		return fmt.Errorf("%w, and it cannot be asked: %w; run this where it runs, or on a copy of the file", err, silentFor(silence, data))
	}
	return err
}

// silentFor says why no agent could be asked.
func silentFor(silence error, data string) error {
	if silence == nil {
		return fmt.Errorf("no %s in %q tells where it answers", addressFile, data)
	}
	return silence
}

// get asks the agent at a for a page. The answer is of that very run of it.
func (a address) get(ctx context.Context, path string, v url.Values) (*http.Response, error) {
	req, err := http.NewRequestWithContext(ctx, http.MethodGet, "http://"+a.hostPort+path+"?"+v.Encode(), nil)
	if err != nil {
		return nil, fmt.Errorf("%w at %q: %w", errUnreachable, a.hostPort, err)
	}
	transport := &http.Transport{DialContext: (&net.Dialer{Timeout: 3 * time.Second}).DialContext, DisableKeepAlives: true}
	resp, err := transport.RoundTrip(req)
	switch {
	case err != nil && ctx.Err() != nil:
		return nil, fmt.Errorf("agent at %s: %w", a.hostPort, err)
	case err != nil:
		return nil, fmt.Errorf("%w at %s: %w", errUnreachable, a.hostPort, err)
	case resp.Header.Get(runHeader) != a.run:
		resp.Body.Close()
		return nil, fmt.Errorf("%w at %s: something else listens there", errUnreachable, a.hostPort)
	}
	return resp, nil
}

// refusal is an agent's answer that is not what was asked for.
func refusal(status int, body []byte) error {
	text := string(bytes.TrimSpace(body))
	if status == http.StatusBadRequest {
		return &QueryError{text}
	}
	return errors.New(text)
}

// readFile has a file read that no agent has open.
func readFile(path string, read func(history) error) (err error) {
	db, err := store.OpenReadOnly(path)
	if err != nil {
		return err
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
	for name := range s.Judges {
		h.current = append(h.current, name)
	}
	if s.Zone != "" { // older histories have none
		h.zone, err = time.LoadLocation(s.Zone)
	}
	return h, err
}
