package store

import (
	"math"
	"sync"
	"testing"
)

// TestReadWhileWriting reads all the time while batches are committed and trimmed:
// every reader sees whole batches in order, none twice, and gaps only where a
// trim has overtaken it.
func TestReadWhileWriting(t *testing.T) {
	s := newStore(t, Options{MaxBytes: 150_000})
	s.groupBytes, s.sealing.enough, s.beatAge = 4000, 3000, 10*second
	s.minuteSealing.after = 0
	commit(t, s, numbered(1))
	stop := make(chan struct{})
	var readers sync.WaitGroup
	for range 2 {
		readers.Go(func() {
			for last := 0.0; ; {
				select {
				case <-stop:
					return
				default:
				}
				last, _ = testRun(t, s, last)
			}
		})
	}
	for n := uint64(2); n < 800; n++ {
		commit(t, s, numbered(n))
		if n%50 == 0 {
			if _, err := s.Trim(0); err != nil {
				t.Error(err)
			}
		}
	}
	close(stop)
	readers.Wait()
	if got, gaps := testRun(t, s, 0); got != 799 || gaps != 0 {
		t.Errorf("the last reading is %v, with %d gaps", got, gaps)
	}
}

// testRun reads tag 1 and returns its last value, which must be no less than that
// of the run before, and how many gaps it met.
func testRun(t *testing.T, s *Store, before float64) (last float64, gaps int) {
	for r, err := range s.Readings(1, 0, math.MaxInt64) {
		if err != nil {
			t.Error(err)
			return before, gaps
		}
		if last != 0 && r.Value != last+1 {
			gaps++
		}
		if r.Value <= last {
			t.Errorf("%v follows %v", r.Value, last)
		}
		last = r.Value
	}
	if last < before {
		t.Errorf("a run ends with %v, one before it with %v", last, before)
	}
	return last, gaps
}
