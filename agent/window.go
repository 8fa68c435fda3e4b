package agent

import "time"

const (
	// lookEvery is how often the agent looks whether the broker waits for it.
	lookEvery = 100 * time.Millisecond
	// answerLooks is how many looks after an acknowledgement what has come is
	// taken for the answer to it.
	answerLooks = 2
	// silentLooks is how many looks without a message are a silence.
	silentLooks = 2
	// stuckLooks is how many looks without a message show that a broker has stopped,
	// where nothing can be acknowledged because nothing can be stored.
	stuckLooks = 10
	// leastWindow is the smallest number of messages that a broker is thought to
	// hold back for; fewer wait in any quiet plant.
	leastWindow = 8
	// maxMisses is after how many early commits in a row, each without an answer,
	// the agent no longer believes that the broker waits.
	maxMisses = 3
)

// window finds out whether the broker waits for acknowledgements, because it allows
// only so many messages in flight, and says when to commit early because of it. The
// sign is the answer to an acknowledgement: a broker that was waiting sends at once
// half as many messages as were acknowledged, or more. While it does, the agent
// commits in each silence; a plant whose bursts only looked like that gives no
// answers, and is left alone after three.
type window struct {
	eager   bool // the broker waits for us, or may
	proven  bool // it was seen to
	misses  int
	early   bool // the last commit was for the broker's sake
	waiting int  // at the last look
	silent  int  // looks without a message
	acked   int  // messages that the last commit acknowledged
	looks   int  // since that commit
}

// committed notes that a commit has acknowledged n messages.
func (w *window) committed(n int) {
	w.acked, w.waiting, w.looks, w.silent = n, 0, 0, 0
}

// connected notes a new connection: what the broker kept is to come, so it waits for
// us until it is seen not to.
func (w *window) connected() { w.eager, w.misses = true, 0 }

// failed notes that a commit could not be made: the broker's silence means nothing
// until one is.
func (w *window) failed() { w.eager, w.early, w.acked, w.silent = false, false, 0, 0 }

// look takes in how many messages wait now, and reports whether to commit for the
// broker's sake.
func (w *window) look(waiting int) bool {
	if w.looks++; w.looks == answerLooks {
		w.judge(waiting >= max(leastWindow, w.acked/2) && w.acked >= leastWindow)
	}
	if w.silent++; waiting != w.waiting {
		w.silent = 0
	}
	w.waiting = waiting
	commit := w.eager && waiting >= leastWindow && w.silent >= silentLooks && w.looks > answerLooks
	w.early = w.early || commit
	return commit
}

// stuck reports whether messages wait and no more have come for a while.
func (w *window) stuck() bool { return w.waiting >= leastWindow && w.silent >= stuckLooks }

// judge takes in whether the last commit was answered.
func (w *window) judge(answered bool) {
	switch {
	case answered:
		w.eager, w.proven, w.misses = true, true, 0
	case w.early:
		w.misses++
		if w.misses >= maxMisses {
			w.eager, w.misses = false, 0
		}
	}
	w.early = false
}
