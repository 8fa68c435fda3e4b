package agent

import "testing"

// play lets a broker with a limit of messages in flight work against the window:
// publish(i) messages come to the broker before look i, and the agent commits each
// every looks, or when the window says so. It returns how many messages the broker
// keeps at most, and how many commits there were.
func play(w *window, limit, every, looks int, publish func(i int) int) (most, commits int) {
	kept, inFlight, last := 0, 0, 0
	for i := range looks {
		kept += publish(i)
		most = max(most, kept)
		send := min(kept, limit-inFlight)
		kept, inFlight = kept-send, inFlight+send
		if w.look(inFlight) || i-last >= every {
			w.committed(inFlight)
			inFlight, last = 0, i
			commits++
		}
	}
	return most, commits
}

func steadily(n int) func(int) int { return func(int) int { return n } }

// A commit every ten seconds lets two messages a second through a window of 20; the
// broker's queue holds 1,000 and loses the rest. Fifty a second pass instead.
func TestSmallWindowLosesNothing(t *testing.T) {
	for _, perLook := range []int{1, 2, 3, 4, 5} {
		if most, _ := play(new(window), 20, 100, 36_000, steadily(perLook)); most > 800 {
			t.Errorf("%d messages a second: the broker keeps up to %d", 10*perLook, most)
		}
	}
}

// A broker with room is left alone: commits keep to their interval.
func TestLargeWindowCommitsAtTheInterval(t *testing.T) {
	var w window
	if most, commits := play(&w, 10_000, 100, 6000, steadily(5)); most > 5 || commits > 60 || w.eager {
		t.Errorf("%d messages kept, %d commits, eager %v; want none, at most 60, no", most, commits, w.eager)
	}
}

// A plant that sends all its tags at once every second does not look like a broker
// that waits, or not for long.
func TestBurstsAreLeftAlone(t *testing.T) {
	var w window
	bursts := func(i int) int {
		if i%10 == 1 { // the look after the commit
			return 40
		}
		return 0
	}
	if _, commits := play(&w, 10_000, 100, 6000, bursts); commits > 70 {
		t.Errorf("%d commits in ten minutes, want about 60", commits)
	}
}

// A limit that is raised at the broker is believed.
func TestRaisedWindowIsBelieved(t *testing.T) {
	var w window
	play(&w, 20, 100, 600, steadily(5))
	if _, commits := play(&w, 10_000, 100, 6000, steadily(5)); commits > 70 {
		t.Errorf("%d commits in ten minutes, want about 60", commits)
	}
}
