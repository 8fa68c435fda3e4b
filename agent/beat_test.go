package agent

import (
	"testing"
)

// Room for a burst is given back when it is not filled any more, and what is held is let go.
func TestEmptied(t *testing.T) {
	held := new(int)
	for _, tt := range []struct {
		size, held int
		keeps      bool
	}{
		{100, 0, true}, {4 * pieceReadings, 10, true}, {4*pieceReadings + 1, 10, false}, {40_000, 9_999, false}, {40_000, 10_000, true}, {40_000, 40_000, true},
	} {
		s := make([]*int, tt.held, tt.size)
		for i := range s {
			s[i] = held
		}
		got := emptied(s)
		if len(got) != 0 || (cap(got) == tt.size) != tt.keeps {
			t.Errorf("%d of %d: %d of %d left; want the room kept: %v", tt.held, tt.size, len(got), cap(got), tt.keeps)
		}
		for _, p := range got[:cap(got)] {
			if p != nil {
				t.Fatalf("%d of %d: still holds something", tt.held, tt.size)
			}
		}
	}
}
