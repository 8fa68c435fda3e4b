package agent

import (
	"fmt"
	"strings"
	"sync/atomic"
	"time"

	"heatreeve/agent/view"
)

// deadBeat is how long the beat may stand still before the agent counts as hung.
const deadBeat = 30 * time.Second

// health answers whether the agent lives and whether it serves.
type health struct {
	latest *atomic.Pointer[view.Snapshot]
	now    func() time.Time
	beat   atomic.Int64 // time.Now().UnixNano() of the last beat
}

func (h *health) tick(now time.Time) { h.beat.Store(now.UnixNano()) }

// alive lists what is wrong with the agent itself.
func (h *health) alive() []string {
	if since := time.Since(time.Unix(0, h.beat.Load())); since > deadBeat {
		return []string{fmt.Sprintf("no beat for %.0f s", since.Seconds())}
	}
	return nil
}

// ready lists what keeps the agent from its work.
func (h *health) ready() []string {
	wrong := h.alive()
	s := h.latest.Load()
	if s == nil {
		return append(wrong, "no beat yet")
	}
	if ahead := time.Unix(0, s.At).Sub(h.now()); ahead > time.Minute {
		wrong = append(wrong, fmt.Sprintf("the accounts stand %s ahead of this machine's clock: set the clock, or give another data folder", ahead.Round(time.Second)))
	}
	for _, b := range s.AllBrokers() {
		if !b.Connected {
			wrong = append(wrong, strings.TrimSuffix(b.Called()+" is not connected: "+b.Fault, ": "))
		}
	}
	if s.History.Fault != "" {
		wrong = append(wrong, "history: "+s.History.Fault)
	}
	return wrong
}
