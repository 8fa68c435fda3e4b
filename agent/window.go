package agent

import "time"

const (
	// lookEvery is how often the agent looks whether the broker waits for it, as long as
	// there is something to be seen; otherwise each beat looks.
	lookEvery = 100 * time.Millisecond
	// busyLook is how many messages between two looks are so many that the next one does not
	// wait: the queue of a broker that stops might be full before the beat.
	busyLook = 20
	// freshLooks is how many looks after a connection there is, for what the broker kept.
	freshLooks = 100
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
	// proofLooks is how many looks a limit is believed in before it is put to the proof.
	proofLooks = 300
	// proofAnswer is how many messages, after a silence at the limit, prove that the
	// broker kept them back.
	proofAnswer = 2
)

// window finds out whether the broker waits for acknowledgements, because it allows
// only so many messages in flight, and says when to commit early because of it. The
// sign is the answer to an acknowledgement: a broker that was waiting sends at once
// half as many messages as were acknowledged, or more. While it does, the agent
// commits in each silence; a plant whose bursts only looked like that gives no
// answers, and is left alone after three.
//
// A silence that was answered also tells the limit: as many messages as waited in it.
// From then on the agent does not wait for silences, which would let no more than a
// few hundred messages a second through, but commits whenever so many wait. More
// than that at once, and the limit is forgotten, for the broker has another; twice a
// minute it is put to the proof by a silence.
type window struct {
	eager   bool // the broker waits for us, or may
	proven  bool // it was seen to: a limit stood its proof
	misses  int
	early   bool // the last commit was for the broker's sake
	limit   int  // messages at which the broker stops; 0: not known
	proof   int  // looks until the limit is put to the proof; none left: it is being
	hits    int  // commits at the limit since the last proof
	waiting int  // at the last look
	silent  int  // looks without a message
	acked   int  // messages that the last commit acknowledged
	looks   int  // since that commit
	fresh   int  // looks for which the connection is still new
	grown   int  // messages between the last two looks
	calm    int  // looks since the limit was last reached
}

// committed notes that a commit has acknowledged n messages.
func (w *window) committed(n int) {
	w.acked, w.waiting, w.looks, w.silent = n, 0, 0, 0
	w.eager = w.eager || w.limit > 0
}

// connected notes a new connection: what the broker kept is to come, so it waits for
// us until it is seen not to.
func (w *window) connected() { w.eager, w.misses, w.limit, w.fresh = true, 0, 0, freshLooks }

// failed notes that a commit could not be made: none is tried for the broker's sake
// until one is.
func (w *window) failed() { w.eager, w.early, w.acked = false, false, 0 }

// wakeful reports whether the next look should not wait for the beat: a commit may be
// answered, a silence may be that of a broker that waits, a limit that is known was
// reached lately, or much comes. In a plant with little to say, looking ten times a second costs a third of what
// receiving it does.
func (w *window) wakeful() bool {
	silence := w.eager && w.silent > 0 && w.waiting >= leastWindow
	return w.limit > 0 && w.calm < proofLooks || w.fresh > 0 || w.looks < answerLooks || w.grown > busyLook || silence
}

// look takes in how many messages wait now, and reports whether to commit for the
// broker's sake.
func (w *window) look(waiting int) bool {
	if w.looks++; w.looks == answerLooks {
		w.judge(waiting)
	}
	w.outgrown(waiting)
	if w.calm++; waiting == w.limit {
		w.calm = 0
	}
	if w.silent++; waiting != w.waiting {
		w.silent = 0
	}
	w.grown, w.waiting = waiting-w.waiting, waiting
	w.proof, w.fresh = max(0, w.proof-1), max(0, w.fresh-1)
	commit := w.eager && waiting >= leastWindow && w.silent >= silentLooks && w.looks > answerLooks
	if w.limit > 0 { // the number speaks as well, and a queue of a thousand may be full within three looks
		commit = w.eager && waiting == w.limit && w.silent > 0
	}
	w.early = w.early || commit
	return commit
}

// reached takes in that the limit may have been, and reports whether to commit at once.
func (w *window) reached(waiting int) bool {
	w.outgrown(waiting)
	if !w.eager || w.limit == 0 || waiting != w.limit {
		return false
	}
	w.calm = 0
	if w.proof == 0 && w.early && w.looks < answerLooks { // the silence at the limit is answered in full
		w.early, w.proven, w.proof, w.hits = false, true, proofLooks, 0
	}
	if w.proof > 0 {
		w.hits++
		return true
	}
	if w.hits > proofLooks { // at such a rate any moment without a message is a silence
		w.waiting = waiting
	}
	return false
}

// stuck reports whether messages wait and no more have come for a while.
func (w *window) stuck() bool { return w.waiting >= leastWindow && w.silent >= stuckLooks }

// outgrown forgets a limit that the broker does not keep to.
func (w *window) outgrown(waiting int) {
	if w.limit > 0 && waiting > w.limit {
		w.limit = 0
	}
}

// judge takes in how many messages have come since the last commit.
func (w *window) judge(waiting int) {
	answered := w.acked >= leastWindow && waiting >= max(leastWindow, w.acked/2)
	switch {
	case w.early && w.limit > 0:
		w.proof, w.hits = proofLooks, 0
		if waiting < proofAnswer {
			w.eager, w.limit = false, 0
		} else {
			w.proven = true
		}
	case answered:
		w.eager, w.misses = true, 0
		if w.early {
			w.limit, w.proof, w.hits, w.calm = w.acked, proofLooks, 0, 0
		}
	case w.early:
		w.misses++
		if w.misses >= maxMisses {
			w.eager, w.misses = false, 0
		}
	}
	w.early = false
}
