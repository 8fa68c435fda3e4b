package agent

import (
	"context"
	"fmt"
	"net/http"
	"net/url"
)

// queries answers queries of one kind while the agent runs, one at a time. An answer keeps its
// turn until it has been taken.
type queries[Q, A any] struct {
	turn   turn
	read   func(url.Values) (Q, error)
	answer func(context.Context, Q) (*A, error)
}

func (s *queries[Q, A]) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := s.read(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), reportTime)
	defer cancel()
	allow(w, reportTime+reportStall)
	if !s.turn.taken(ctx, w) {
		return
	}
	defer s.turn.free()
	x, err := s.answer(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	link(w, x)
	hand(w, r, x, reportStall)
}

// link tells where the next page of an answer is (RFC 8288).
func link(w http.ResponseWriter, x any) {
	if p, ok := x.(interface{ Following() string }); ok && p.Following() != "" {
		w.Header().Set("Link", fmt.Sprintf(`<%s>; rel="next"`, p.Following()))
	}
}
