package agent

import (
	"crypto/subtle"
	"net/http"
)

const (
	// runHeader names the run of the agent: in what its own command line asks, and in each
	// answer to that.
	runHeader = "Heatreeve-Run"
	// keyHeader proves that who asks can read the data folder.
	keyHeader = "Heatreeve-Key"
)

// private has h answer the command line of this machine alone: who sends the run and the key
// that stand in the address file and nowhere else. They are told at once, ahead of the answer,
// by a status 102 that names the run: that it is this agent, and that it is at it.
func private(run, key string, h http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		knows := subtle.ConstantTimeCompare([]byte(r.Header.Get(runHeader)), []byte(run)) &
			subtle.ConstantTimeCompare([]byte(r.Header.Get(keyHeader)), []byte(key))
		if knows != 1 {
			http.Error(w, "this address answers heatreeve's own command line, to those who can read the data folder; everybody else uses the one of --listen", http.StatusForbidden)
			return
		}
		w.Header().Set(runHeader, run)
		if r.ProtoAtLeast(1, 1) {
			w.WriteHeader(http.StatusProcessing)
		}
		h.ServeHTTP(w, r)
	})
}

// privately adds to what everybody may ask what the command line alone may do.
func privately(public http.Handler, orders chan<- mark) http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /", public)
	mux.Handle("POST "+markPath, &marks{orders})
	return mux
}
