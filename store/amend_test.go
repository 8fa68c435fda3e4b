package store

import (
	"testing"
)

// An amended state is that of the same beats as the one before it, and comes with its events.
func TestAmend(t *testing.T) {
	s := newStore(t, Options{})
	if err := s.Amend([]byte("x"), nil); err == nil {
		t.Error("amended what is not there")
	}
	commit(t, s, Batch{Beats: []Beat{{Through: 1}}, Checkpoint: []byte("first")})
	commit(t, s, Batch{Beats: []Beat{{Through: 2}}})
	next, err := s.NextEvent()
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Amend([]byte("second"), []Event{{At: 5, Until: 5, Number: next, Kind: "acknowledged"}}); err != nil {
		t.Fatal(err)
	}
	if state, ok, err := s.Checkpoint(); err != nil || !ok || string(state) != "second" {
		t.Errorf("%q, %v, %v", state, ok, err)
	}
	var since []int64
	for b, err := range s.Since() {
		if err != nil {
			t.Fatal(err)
		}
		since = append(since, b.Through)
	}
	if len(since) != 1 || since[0] != 2 {
		t.Errorf("beats since the state: %v, want the second", since)
	}
	for e, err := range s.Events(0, 10) {
		if err != nil || e.Kind != "acknowledged" {
			t.Errorf("%+v, %v", e, err)
		}
	}
	if again, err := s.NextEvent(); err != nil || again != next+1 {
		t.Errorf("next event %d, %v", again, err)
	}
}
