package agent

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"log/slog"
	"strings"
	"time"

	"golang.org/x/sync/errgroup"

	"heatreeve/agent/proving"
	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// proveEvery is how often a trial takes what has come.
const proveEvery = 50 * time.Millisecond

// Prove holds a site against its brokers for a while: it listens as one more client of
// each, with a session of its own that leaves nothing behind, so that an agent on the same
// site goes on undisturbed. It ends early with what there is when ctx does. progress is
// told what has come so far; may be nil. The error is why it could not begin.
func Prove(ctx context.Context, s *site.Site, length time.Duration, progress func(readings int)) (*proving.Result, error) {
	trial, err := proving.New(s, plantOf(s))
	if err != nil {
		return nil, err
	}
	ears, err := newEars(s)
	if err != nil {
		return nil, err
	}
	running, end := context.WithCancel(context.WithoutCancel(ctx))
	var g errgroup.Group
	for _, e := range ears {
		g.Go(func() error { return e.session.Run(running) })
	}
	begun := time.Now()
	err = listen(ctx, ears, length, trial.Hear, progress)
	end()
	if err = errors.Join(err, g.Wait()); err != nil {
		return nil, err
	}
	refused := make([][]proving.Refused, len(s.Tags))
	for _, e := range ears {
		e.refused(refused)
	}
	r := trial.Tell(time.Since(begun).Seconds(), refused)
	return &r, nil
}

// ear is what listens to one broker.
type ear struct {
	broker  site.Broker
	session *ingest.Session
	tags    []int // of the site, in the session's order
	buf     []ingest.Received
}

func newEars(s *site.Site) ([]*ear, error) {
	var ears []*ear
	signals := signalsOf(s)
	for i, b := range s.AllBrokers() {
		e := &ear{broker: b}
		var on []ingest.Tag
		e.tags, on = onBroker(s, signals, i)
		o := connectionOf(b)
		o.ClientID, o.Transient = "heatreeve-check-"+rand.Text()[:8], true
		o.Ahead, o.Log, o.Rebirths, o.Subscribe = s.Timing.Ahead, slog.New(slog.DiscardHandler), b.Rebirths, b.Subscribe
		var err error
		if e.session, err = ingest.New(on, o); err != nil {
			return nil, fmt.Errorf("session with %s: %w", b.Called(), err)
		}
		ears = append(ears, e)
	}
	return ears, nil
}

// listen takes what comes until the time is over.
func listen(ctx context.Context, ears []*ear, length time.Duration, hear func([]proving.Heard), progress func(int)) error {
	ctx, cancel := context.WithTimeout(ctx, length)
	defer cancel()
	ticker := time.NewTicker(proveEvery)
	defer ticker.Stop()
	for total := 0; ; {
		over := false
		select {
		case <-ticker.C:
		case <-ctx.Done():
			over = true
		}
		for _, e := range ears {
			if err := e.fault(over); err != nil {
				return fmt.Errorf("%s: %w", e.broker.URL, err)
			}
			heard := e.take(time.Now().UnixNano())
			hear(heard)
			total += len(heard)
		}
		if progress != nil {
			progress(total)
		}
		if over {
			return nil
		}
	}
}

// fault is why nothing can be heard, or was up to the end, where it is over.
func (e *ear) fault(over bool) error {
	stats := e.session.Stats()
	if over && stats.Connections == 0 && stats.Failures == 0 {
		return errors.New("the broker has not answered yet; check host and port and whether it hangs, or listen for longer")
	}
	if stats.Connections == 0 && stats.Failures > 0 {
		return errors.New(stats.LastError)
	}
	if n := len(stats.Denied); n > 0 && stats.Subscribed == 0 {
		return fmt.Errorf("the broker grants none of %d subscriptions; check its access list", n)
	}
	return nil
}

// take takes what came.
func (e *ear) take(now int64) []proving.Heard {
	e.buf = e.session.Take(e.buf[:0])
	all := make([]proving.Heard, len(e.buf))
	for i, r := range e.buf {
		all[i] = proving.Heard{Reading: readingOf(r.Reading), Arrival: now, Stamped: r.Stamped, Retained: r.Retained}
		all[i].Tag = e.tags[r.Tag]
	}
	e.session.Ack(e.buf)
	return all
}

// refused tells of each tag which messages came to nothing.
func (e *ear) refused(all [][]proving.Refused) {
	for i, t := range e.session.Stats().Tags {
		for _, reason := range ingest.Reasons() {
			if n := t.Refused[reason]; n > 0 {
				r := proving.Refused{Reason: reason.String(), Count: n}
				if t.Last != nil && t.Last.Reason == reason {
					r.Last = strings.TrimPrefix(t.Last.Error(), fmt.Sprintf("tag %q: ", t.Last.Tag))
				}
				all[e.tags[i]] = append(all[e.tags[i]], r)
			}
		}
	}
}
