package answer

import (
	"encoding/json"
	"net/http"
	"strconv"
)

// Path is where the interface for programs begins. All of it can only be read.
const Path = "/api/v1/"

// ProblemType is the media type of a [Problem].
const ProblemType = "application/problem+json"

// Problem says why there is no answer (RFC 9457). Type is about:blank: the status says it, and
// Title is the status in words. Detail is for people, and what the command line prints.
type Problem struct {
	Type   string `json:"type"`
	Title  string `json:"title"`
	Status int    `json:"status"`
	Detail string `json:"detail"`
}

// busySeconds is after how long it is worth asking anew where there was no room for a query.
const busySeconds = 5

// Refuse answers with a status and why. What an answer would have told of its body is taken
// back. A caller whose turn may come is told when to ask again.
func Refuse(w http.ResponseWriter, status int, detail string) {
	h := w.Header()
	for _, name := range []string{"Content-Length", "Content-Encoding", "ETag", "Last-Modified", "Link"} {
		h.Del(name)
	}
	h.Set("Content-Type", ProblemType)
	h.Set("Cache-Control", "no-store")
	h.Set("X-Content-Type-Options", "nosniff")
	if status == http.StatusServiceUnavailable {
		h.Set("Retry-After", strconv.Itoa(busySeconds))
	}
	w.WriteHeader(status)
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	_ = e.Encode(Problem{"about:blank", http.StatusText(status), status, detail}) // who asked has gone
}
