package access

import (
	"context"
	"crypto/sha256"
	"crypto/subtle"
	"log/slog"
	"net/http"
	"sync"

	"golang.org/x/crypto/bcrypt"
)

// Refuse answers a request that is not let in.
type Refuse func(w http.ResponseWriter, r *http.Request, status int, why string)

// door lets in whom the file knows.
type door struct {
	path   string
	began  Terms
	next   http.Handler
	refuse Refuse
	log    *slog.Logger

	// turn is held by who has a password hashed: it takes tens of milliseconds of a small box, and
	// who guesses is to have one core at most.
	turn chan struct{}

	mu    sync.Mutex
	known map[string][sha256.Size]byte // by user, a digest of hash and password that agreed; mu guards it
}

// Door stands before next by the file at path, which asked for began at the start. Whom it does not
// know it refuses with 401; and with 503 everybody, where the file cannot be read or no longer asks
// for anything, so that a slip of the pen opens nothing.
func Door(path string, began Terms, next http.Handler, refuse Refuse, log *slog.Logger) http.Handler {
	if !began.Authenticates() {
		return next
	}
	return &door{path: path, began: began, next: next, refuse: refuse, log: log, turn: make(chan struct{}, 1), known: map[string][sha256.Size]byte{}}
}

func (d *door) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	f, err := read(d.path)
	if err != nil {
		d.log.Error("web configuration: nobody is let in", "file", d.path, "err", err)
		d.refuse(w, r, http.StatusServiceUnavailable, "the web configuration cannot be read: mend it; the log says what is wrong")
		return
	}
	switch now := f.terms(); {
	case !now.Authenticates():
		d.refuse(w, r, http.StatusServiceUnavailable, "the web configuration no longer asks for passwords or the certificates of clients, as it did at the start; put them back, or start the agent anew")
	case now.Certificate && (r.TLS == nil || len(r.TLS.VerifiedChains) == 0):
		w.Header().Set("Connection", "close")
		d.refuse(w, r, http.StatusUnauthorized, "the web configuration now asks for a certificate, which this connection began without: connect anew with one")
	case now.Password && !d.knows(r.Context(), f.Users, r):
		w.Header().Set("WWW-Authenticate", `Basic realm="Heatreeve", charset="UTF-8"`)
		d.refuse(w, r, http.StatusUnauthorized, "a name and its password are needed here (HTTP Basic)")
	default:
		d.next.ServeHTTP(w, r)
	}
}

// nobody is the hash of 32 random bytes that are kept nowhere: a wrong name takes as long as a wrong password.
const nobody = "$2a$10$l0GsaRsHKl.D1iqLtDI5vO2vvYd0Jet5ajXouL5uQOhBuRF6EuquK"

// knows tells whether a request has the password of one of the users.
func (d *door) knows(ctx context.Context, users map[string]string, r *http.Request) bool {
	name, password, given := r.BasicAuth()
	if !given {
		return false
	}
	hash, user := users[name]
	if !user {
		hash = nobody
	}
	digest := sha256.Sum256([]byte(hash + "\x00" + password))
	if d.agreed(name, digest) {
		return true
	}
	select {
	case d.turn <- struct{}{}:
		defer func() { <-d.turn }()
	case <-ctx.Done():
		return false
	}
	if bcrypt.CompareHashAndPassword([]byte(hash), []byte(password)) != nil || !user {
		return false
	}
	d.mu.Lock()
	defer d.mu.Unlock()
	d.known[name] = digest
	return true
}

// agreed tells whether a user has come with this password before.
func (d *door) agreed(name string, digest [sha256.Size]byte) bool {
	d.mu.Lock()
	defer d.mu.Unlock()
	before, ok := d.known[name]
	return ok && subtle.ConstantTimeCompare(before[:], digest[:]) == 1
}
