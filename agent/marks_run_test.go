package agent_test

import (
	"fmt"
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

// refused tries to mark where everybody looks, with the key too, and where the command line
// asks, without the run and the key.
func refused(t *testing.T, r *running, data string) {
	t.Helper()
	client := &http.Client{Transport: &http.Transport{DisableKeepAlives: true}}
	text, err := os.ReadFile(filepath.Join(data, "agent.address"))
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(string(text), "\n")
	own, run, key := lines[0], lines[1], lines[3]
	for _, tt := range []struct {
		method, at, path, run, key string
		want                       int
	}{
		{http.MethodPost, own, "/mark", "", "", http.StatusForbidden},
		{http.MethodPost, own, "/mark", run, "", http.StatusForbidden},
		{http.MethodPost, own, "/mark", run, run, http.StatusForbidden},
		{http.MethodPost, own, "/mark", key, key, http.StatusForbidden},
		{http.MethodPost, own, "/mark", "", key, http.StatusForbidden},
		{http.MethodGet, own, "/", "", "", http.StatusForbidden},
		{http.MethodGet, own, "/metrics", run, "nobody", http.StatusForbidden},
		{http.MethodGet, own, "/metrics", run, key, http.StatusOK},
		{http.MethodGet, own, "/mark", run, key, http.StatusNotFound},
		{http.MethodDelete, own, "/", run, key, http.StatusMethodNotAllowed},
		{http.MethodPost, r.address, "/mark", run, key, http.StatusMethodNotAllowed},
		{http.MethodPost, r.address, "/", run, key, http.StatusMethodNotAllowed},
	} {
		req, err := http.NewRequestWithContext(t.Context(), tt.method, "http://"+tt.at+tt.path, strings.NewReader("do=unshelve&subject=hot-water&by=x&reason=y"))
		if err != nil {
			t.Fatal(err)
		}
		req.Header.Set("Content-Type", "application/x-www-form-urlencoded")
		req.Header.Set("Heatreeve-Run", tt.run)
		req.Header.Set("Heatreeve-Key", tt.key)
		resp, err := client.Do(req)
		if err != nil {
			t.Fatal(err)
		}
		body, err := io.ReadAll(resp.Body)
		resp.Body.Close()
		if err != nil || resp.StatusCode != tt.want {
			t.Errorf("%+v: %d %s, %v", tt, resp.StatusCode, body, err)
		}
		told := fmt.Sprint(resp.Header, string(body))
		if strings.Contains(told, key) || tt.want == http.StatusForbidden && strings.Contains(told, run) {
			t.Errorf("%+v: the answer tells the run or the key: %s", tt, told)
		}
	}
}
