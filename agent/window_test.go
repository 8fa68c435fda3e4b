package agent

import "testing"

// play lets a broker with a limit of messages in flight work against the window:
// publish(i) messages come to the broker before look i, every tenth of which is that of a
// beat, and the agent commits each every looks, or when the window says so. It returns how many messages the broker
// keeps at most, and how many commits there were.
func play(w *window, limit, every, looks int, publish func(i int) int) (most, commits int) {
	kept, inFlight, last := 0, 0, 0
	for i := range looks {
		kept += publish(i)
		most = max(most, kept)
		for {
			send := min(kept, limit-inFlight)
			kept, inFlight = kept-send, inFlight+send
			if send == 0 || !w.reached(inFlight) {
				break
			}
			w.committed(inFlight)
			inFlight, last = 0, i
			commits++
		}
		if (i%10 == 0 || w.wakeful()) && w.look(inFlight) || i-last >= every {
			w.committed(inFlight)
			inFlight, last = 0, i
			commits++
		}
	}
	return most, commits
}

// A plant that sends little is looked at with the beat, and twice after a commit.
func TestLittleIsLookedAtSeldom(t *testing.T) {
	var w window
	w.connected()
	awake := 0
	play(&w, 10_000, 100, 6000, func(i int) int {
		if i%10 != 0 && w.wakeful() {
			awake++
		}
		return 4
	})
	if want := freshLooks + answerLooks*6000/100 + 6000/10; awake > want {
		t.Errorf("%d looks between the beats of ten minutes, want at most %d", awake, want)
	}
}

func steadily(n int) func(int) int { return func(int) int { return n } }

// A commit every ten seconds lets two messages a second through a window of 20; the
// broker's queue holds 1,000 and loses the rest. Fifty a second pass instead.
func TestSmallWindowLosesNothing(t *testing.T) {
	for _, perLook := range []int{1, 2, 3, 4, 5, 10, 20, 50, 100} {
		var w window
		w.connected()
		if most, _ := play(&w, 20, 100, 36_000, steadily(perLook)); most > 800 {
			t.Errorf("%d messages a second: the broker keeps up to %d", 10*perLook, most)
		}
	}
}

// At four thousand a second, more would wait within one silence than a broker keeps;
// once the limit is known there is no need of one, but for a proof each minute.
func TestSmallWindowAtFullRate(t *testing.T) {
	w := new(window)
	w.connected()
	most, commits := play(w, 20, 100, 6000, func(i int) int {
		if i < 50 {
			return 40 // while the limit is being found
		}
		return 400
	})
	if most > 1000 || w.limit != 20 {
		t.Errorf("the broker keeps up to %d messages, limit %d; want at most 1,000, and 20", most, w.limit)
	}
	if want := 6000 * 400 / 20; commits < want*9/10 || commits > want {
		t.Errorf("%d commits, want about %d: one for each full window", commits, want)
	}
}

// A plant that sends forty messages at a time now and then looked like a broker with
// that limit; the proof shows that it is none.
func TestWrongLimitIsGivenUp(t *testing.T) {
	w := &window{eager: true, proven: true, limit: 40, proof: 100}
	_, commits := play(w, 10_000, 100, 6000, func(i int) int {
		if i%10 == 1 {
			return 40
		}
		return 0
	})
	if w.limit != 0 || commits > 90 {
		t.Errorf("limit %d, %d commits in ten minutes; want none, and about 70", w.limit, commits)
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

// A limit that is raised at the broker is believed within half a minute.
func TestRaisedWindowIsBelieved(t *testing.T) {
	var w window
	play(&w, 20, 100, 600, steadily(5))
	if _, commits := play(&w, 10_000, 100, 6000, steadily(5)); commits > 150 || w.limit != 0 {
		t.Errorf("%d commits in ten minutes, limit %d; want about 60 and, in the first half minute, 75 more, and none", commits, w.limit)
	}
}

// A limit that a backlog made known keeps nobody awake once little comes.
func TestLimitSleepsInAQuietPlant(t *testing.T) {
	var w window
	w.connected()
	backlog := func(i int) int {
		switch {
		case i < 2:
			return 405
		case i%100 == 0:
			return 1
		}
		return 0
	}
	play(&w, 20, 100, 3000, backlog)
	if w.limit != 20 {
		t.Fatalf("limit %d after the backlog, want 20", w.limit)
	}
	awake := 0
	play(&w, 20, 100, 6000, func(i int) int {
		if i%10 != 0 && w.wakeful() {
			awake++
		}
		return backlog(100 + i)
	})
	if want := answerLooks * 6000 / 100; awake > want {
		t.Errorf("%d looks between the beats of ten minutes, want at most %d", awake, want)
	}
	if most, _ := play(&w, 20, 100, 6000, steadily(50)); most > 800 || w.limit != 20 {
		t.Errorf("the plant is busy again: the broker keeps up to %d messages, limit %d; want at most 800, and 20", most, w.limit)
	}
}

// bursting is a plant that sends n messages at once every period looks.
func bursting(n, period, phase int) func(int) int {
	return func(i int) int {
		if i%period == phase {
			return n
		}
		return 0
	}
}

// Bursts that follow a commit closely look like an answer; a broker with room for
// them is not said to wait, whatever their size and moment.
func TestBurstsAreNoSign(t *testing.T) {
	const limit, interval = 1000, 100
	for _, n := range []int{8, 20, 40, 90, 300, 499} {
		for _, period := range []int{5, 7, 10, 13, 20, 50, 100} {
			if n*(interval/period+1) >= limit {
				continue // so much does fill the window
			}
			for phase := range period {
				var w window
				w.connected()
				play(&w, limit, interval, 6000, bursting(n, period, phase))
				if w.proven {
					t.Errorf("%d messages each %d looks from look %d: the broker is said to wait", n, period, phase)
				}
			}
		}
	}
}

// A broker that waits several times between two commits is told of, be the plant slow
// or fast.
func TestSmallWindowIsTold(t *testing.T) {
	for _, limit := range []int{10, 20, 50} {
		for _, perLook := range []int{1, 2, 5, 20, 100} {
			if 100*perLook < 4*limit {
				continue
			}
			var w window
			w.connected()
			if play(&w, limit, 100, 6000, steadily(perLook)); !w.proven {
				t.Errorf("%d messages a second through a window of %d: nothing is told", 10*perLook, limit)
			}
		}
	}
}
