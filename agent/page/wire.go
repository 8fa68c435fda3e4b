package page

import (
	"crypto/sha256"
	"encoding/base64"
	"net/http"
	"strconv"
)

// Answer writes a whole answer of a kind, as a media type names it: with a strong validator, made of
// the body (RFC 9110, 8.8.3), and not at all for those who have it already. Who keeps it is to ask
// each time whether it still holds.
func Answer(w http.ResponseWriter, r *http.Request, kind string, body []byte) {
	h := w.Header()
	h.Set("Content-Type", kind)
	h.Set("X-Content-Type-Options", "nosniff")
	if h.Get("Cache-Control") == "" {
		h.Set("Cache-Control", "no-cache")
	}
	h.Add("Vary", "Accept-Encoding")
	tag := tagOf(body)
	if len(body) >= leastPacked && takesGzip(r.Header.Values("Accept-Encoding")) {
		h.Set("Content-Encoding", "gzip")
		body, tag = packedUp(body), tagOfPacked(tag)
	}
	whole(w, r, tag, body)
}

// whole writes a body whose header is set, or that who asks has it.
func whole(w http.ResponseWriter, r *http.Request, tag string, body []byte) {
	h := w.Header()
	h.Set("ETag", tag)
	if holds(r.Header.Values("If-None-Match"), tag) {
		h.Del("Content-Type")
		h.Del("Content-Encoding")
		w.WriteHeader(http.StatusNotModified)
		return
	}
	h.Set("Content-Length", strconv.Itoa(len(body)))
	_, _ = w.Write(body) // who asked has gone
}

// tagOf is the entity tag of a body.
func tagOf(body []byte) string {
	sum := sha256.Sum256(body)
	return `"` + base64.RawURLEncoding.EncodeToString(sum[:16]) + `"`
}

// tagOfPacked is that of the body when it is compressed, which is another one (RFC 9110,
// 8.8.3.3).
func tagOfPacked(tag string) string { return tag[:len(tag)-1] + `-gzip"` }
