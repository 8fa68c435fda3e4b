package agent_test

import (
	"bytes"
	"io"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/demo"
	"heatreeve/agent/view"
)

// A running agent takes marks from who can read its data folder and from nobody else, and
// they outlast it.
func TestMarksOnARunningAgent(t *testing.T) {
	data := t.TempDir()
	d, err := demo.Start(demo.Options{Speed: 60, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	r := start(t, d, data)
	r.await(t, "a snapshot", func(s *view.Snapshot) bool { return s.Broker.Connected })
	order := agent.Order{Do: agent.Shelve, Subject: "hot-water", Kind: "short", By: "J. Marsh", Reason: "wash"}
	got, err := agent.Put(t.Context(), data, order)
	if err != nil || len(got.Lines) != 1 || !strings.HasPrefix(got.Lines[0], "shelved hot-water: short, until ") {
		t.Fatalf("%+v, %v", got, err)
	}
	refused(t, r, data)
	if v, err := r.metric(t, "heatreeve_warning_shelved", "short", "hot-water"); err != nil || v != 1 {
		r.await(t, "the shelf in a snapshot", func(s *view.Snapshot) bool { return len(s.Warnings.Shelves) == 1 })
	}
	s, err := agent.Warnings(t.Context(), data)
	if err != nil || len(s.Shelves) != 1 || s.Shelves[0].By != "J. Marsh" {
		t.Errorf("%+v, %v", s, err)
	}
	events, err := agent.Happened(t.Context(), data, answer.EventQuery{Kind: "shelved", Subject: "hot-water"})
	if err != nil || len(events.Events) != 1 {
		t.Errorf("%+v, %v", events, err)
	}
	if err := r.stop(); err != nil {
		t.Fatal(err)
	}
	r = start(t, d, data)
	r.await(t, "the shelf after a restart", func(s *view.Snapshot) bool { return len(s.Warnings.Shelves) == 1 })
	if err := r.stop(); err != nil {
		t.Error(err)
	}
}

// refused tries to mark without the key: with none, with that of nobody, and with the run that
// each answer tells.
func refused(t *testing.T, r *running, data string) {
	t.Helper()
	client := &http.Client{Transport: &http.Transport{DisableKeepAlives: true}}
	text, err := os.ReadFile(filepath.Join(data, "agent.address"))
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(string(text), "\n")
	send := func(method, key string) (int, string) {
		t.Helper()
		req, err := http.NewRequestWithContext(t.Context(), method, "http://"+r.address+"/mark", strings.NewReader("do=unshelve&subject=hot-water&by=x&reason=y"))
		if err != nil {
			t.Fatal(err)
		}
		req.Header.Set("Content-Type", "application/x-www-form-urlencoded")
		req.Header.Set("Heatreeve-Key", key)
		resp, err := client.Do(req)
		if err != nil {
			t.Fatal(err)
		}
		defer resp.Body.Close()
		body, err := io.ReadAll(resp.Body)
		if err != nil || bytes.Contains(body, []byte(lines[3])) || strings.Contains(resp.Header.Get("Heatreeve-Run"), lines[3]) {
			t.Errorf("%v; the answer tells the key", err)
		}
		return resp.StatusCode, string(body)
	}
	for _, key := range []string{"", "nobody", lines[1]} {
		if status, body := send(http.MethodPost, key); status != http.StatusForbidden {
			t.Errorf("key %q: %d %s", key, status, body)
		}
	}
	if status, body := send(http.MethodGet, lines[3]); status != http.StatusMethodNotAllowed {
		t.Errorf("GET: %d %s", status, body)
	}
}
