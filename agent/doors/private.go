package doors

import (
	"crypto/subtle"
	"net/http"
)

const (
	// RunHeader names the run of the agent: in what its own command line asks, and in each
	// answer to that.
	RunHeader = "Heatreeve-Run"
	// KeyHeader proves that who asks can read the data folder.
	KeyHeader = "Heatreeve-Key"
)

// Private has h answer the command line of this machine alone: who sends the run and the key
// that stand in the address file and nowhere else. They are told at once, ahead of the answer,
// by a status 102 that names the run: that it is this agent, and that it is at it.
func Private(run, key string, h http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		knows := subtle.ConstantTimeCompare([]byte(r.Header.Get(RunHeader)), []byte(run)) &
			subtle.ConstantTimeCompare([]byte(r.Header.Get(KeyHeader)), []byte(key))
		if knows != 1 {
			http.Error(w, "this address answers heatreeve's own command line, to those who can read the data folder; everybody else uses the one of --listen", http.StatusForbidden)
			return
		}
		w.Header().Set(RunHeader, run)
		if r.ProtoAtLeast(1, 1) {
			w.WriteHeader(http.StatusProcessing)
		}
		h.ServeHTTP(w, r)
	})
}
