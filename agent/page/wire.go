package page

import (
	"bytes"
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
	tag := tagOf(body)
	h.Add("Vary", "Accept-Encoding")
	if len(body) >= leastPacked && takesGzip(r.Header.Values("Accept-Encoding")) {
		h.Set("Content-Encoding", "gzip")
		body, tag = packedUp(body), tag[:len(tag)-1]+`-gzip"` // another validator (RFC 9110, 8.8.3.3)
	}
	h.Set("ETag", tag)
	h.Set("Content-Length", strconv.Itoa(len(body)))
	c := &conditional{ResponseWriter: w, have: r.Header.Values("If-None-Match")}
	_, _ = c.Write(body) // who asked has gone
}

// tagOf is the entity tag of a body.
func tagOf(body []byte) string {
	sum := sha256.Sum256(body)
	return `"` + base64.RawURLEncoding.EncodeToString(sum[:16]) + `"`
}

// Bounded has what h answers go out by [Answer], where h is done with it: what is no 200, or
// has a validator of its own, goes out as it is. It keeps the whole answer in memory.
func Bounded(h http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		k := &kept{ResponseWriter: w, status: http.StatusOK}
		h.ServeHTTP(k, r)
		if k.status != http.StatusOK || w.Header().Get("ETag") != "" {
			w.WriteHeader(k.status)
			_, _ = w.Write(k.body.Bytes()) // who asked has gone
			return
		}
		Answer(w, r, w.Header().Get("Content-Type"), k.body.Bytes())
	})
}

// kept is an answer that is held until it is whole.
type kept struct {
	http.ResponseWriter
	status int
	body   bytes.Buffer
}

func (k *kept) Write(p []byte) (int, error) { return k.body.Write(p) }

func (k *kept) WriteHeader(status int) {
	if status < 200 {
		k.ResponseWriter.WriteHeader(status)
		return
	}
	k.status = status
}

// conditional answers 304 in place of a body that who asks has.
type conditional struct {
	http.ResponseWriter
	have  []string // lines of If-None-Match
	begun bool
	held  bool // by who asks
}

func (c *conditional) WriteHeader(status int) {
	h := c.Header()
	if c.begun = true; status == http.StatusOK && holds(c.have, h.Get("ETag")) {
		c.held, status = true, http.StatusNotModified
		for _, name := range []string{"Content-Type", "Content-Length", "Content-Encoding"} {
			h.Del(name)
		}
	}
	c.ResponseWriter.WriteHeader(status)
}

func (c *conditional) Write(p []byte) (int, error) {
	if !c.begun {
		c.WriteHeader(http.StatusOK)
	}
	if c.held {
		return len(p), nil
	}
	return c.ResponseWriter.Write(p)
}
