package agent

import (
	"context"
	"time"
)

const (
	// clockWait is the longest that the start waits for a clock that is behind the
	// history; after that the history is taken to be wrong.
	clockWait = settling
	// clockLook is how often it looks.
	clockLook = time.Second
)

// awaitClock waits while this machine's clock is behind the history that goes up to
// through, as that of a box is which keeps no time while it is off. Until the clock is
// set, stamps that are right would be refused as ahead of it, and what the broker has
// kept would be gone; so nothing is fetched before.
func (a *Agent) awaitClock(ctx context.Context, through int64) {
	behind := func() bool { return time.Unix(0, through).Sub(a.o.Now()) > a.site.Timing.Ahead }
	if !behind() {
		return
	}
	a.o.Log.Warn("this machine's clock is behind the history and must not have been set yet; the broker keeps the readings until it is", "history", time.Unix(0, through).UTC(), "at_most", clockWait)
	deadline := time.NewTimer(clockWait)
	defer deadline.Stop()
	look := time.NewTicker(clockLook)
	defer look.Stop()
	for behind() {
		select {
		case <-ctx.Done():
			return
		case <-deadline.C:
			return
		case <-look.C:
		}
	}
}
