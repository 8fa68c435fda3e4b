package agent

import (
	"encoding/json"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"

	"heatreeve/agent/answer"
)

// said is the body of an answer, or the detail of a problem; a problem that is none, or is of
// another status, is nothing.
func said(w *httptest.ResponseRecorder) string {
	if w.Code == http.StatusOK {
		return w.Body.String()
	}
	var p answer.Problem
	d := json.NewDecoder(strings.NewReader(w.Body.String()))
	d.DisallowUnknownFields()
	if d.Decode(&p) != nil || w.Header().Get("Content-Type") != answer.ProblemType || p.Type != "about:blank" || p.Status != w.Code || p.Title != http.StatusText(w.Code) {
		return ""
	}
	return p.Detail
}

// Beside the paths of the interface there are problems too (RFC 9457).
func TestPathsThatAreNone(t *testing.T) {
	mux := http.NewServeMux()
	api{reportPath: http.NotFoundHandler()}.mount(mux)
	for _, tt := range []struct {
		method, path string
		status       int
		text         string
	}{
		{"GET", "/api/v1/nothing", 404, "there is no /api/v1/nothing; /api/v1/openapi.json tells what there is"},
		{"GET", "/api/", 404, "there is no /api/"},
		{"POST", reportPath, 405, "can only be read"},
		{"DELETE", reportPath, 405, "can only be read"},
	} {
		w := httptest.NewRecorder()
		mux.ServeHTTP(w, httptest.NewRequest(tt.method, tt.path, nil))
		if got := said(w); w.Code != tt.status || !strings.Contains(got, tt.text) {
			t.Errorf("%s %s: %d %q, want %d ...%q...", tt.method, tt.path, w.Code, got, tt.status, tt.text)
		}
		if allow := w.Header().Get("Allow"); (allow == "GET, HEAD") != (tt.status == 405) {
			t.Errorf("%s %s: Allow %q", tt.method, tt.path, allow)
		}
	}
}

// Who finds no room is told when to ask again, and that it is worth it.
func TestRetryAfter(t *testing.T) {
	full := newTurn(1, "another one is in the making")
	first := httptest.NewRecorder()
	if !full.taken(t.Context(), first) {
		t.Fatalf("the first: %d %s", first.Code, first.Body)
	}
	w := httptest.NewRecorder()
	if full.taken(t.Context(), w) || w.Code != http.StatusServiceUnavailable || w.Header().Get("Retry-After") != "5" {
		t.Errorf("%d, Retry-After %q", w.Code, w.Header().Get("Retry-After"))
	}
	if got := said(w); got != "another one is in the making" {
		t.Errorf("says %q", got)
	}
	full.free()
	if again := httptest.NewRecorder(); !full.taken(t.Context(), again) {
		t.Errorf("once it is free: %d %s", again.Code, again.Body)
	}
}
