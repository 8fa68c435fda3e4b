package agent

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"log/slog"
	"strings"
	"time"

	"heatreeve/agent/proving"
	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// proveEvery is how often a trial takes what has come.
const proveEvery = 50 * time.Millisecond

// Prove holds a site against its broker for a while: it listens as one more client, with
// a session of its own that leaves nothing behind, so that an agent on the same site goes
// on undisturbed. It ends early with what there is when ctx does. progress is told what
// has come so far; may be nil. The error is why it could not begin.
func Prove(ctx context.Context, s *site.Site, length time.Duration, progress func(readings int)) (*proving.Result, error) {
	trial, err := proving.New(s, plantOf(s))
	if err != nil {
		return nil, err
	}
	o := connectionOf(s.Broker)
	o.ClientID, o.Transient = "heatreeve-check-"+rand.Text()[:8], true
	o.Ahead, o.Log, o.Rebirths = s.Timing.Ahead, slog.New(slog.DiscardHandler), s.Broker.Rebirths
	session, err := ingest.New(signalsOf(s), o)
	if err != nil {
		return nil, fmt.Errorf("broker session: %w", err)
	}
	sessionCtx, end := context.WithCancel(context.WithoutCancel(ctx))
	ended := make(chan error, 1)
	go func() { ended <- session.Run(sessionCtx) }()
	begun := time.Now()
	err = listen(ctx, session, length, func(all []proving.Heard) { trial.Hear(all) }, progress)
	end()
	if err = errors.Join(err, <-ended); err != nil {
		return nil, fmt.Errorf("%s: %w", s.Broker.URL, err)
	}
	r := trial.Tell(time.Since(begun).Seconds(), refusedOf(s, session.Stats()))
	return &r, nil
}

// listen takes what comes until the time is over.
func listen(ctx context.Context, session *ingest.Session, length time.Duration, hear func([]proving.Heard), progress func(int)) error {
	ctx, cancel := context.WithTimeout(ctx, length)
	defer cancel()
	ticker := time.NewTicker(proveEvery)
	defer ticker.Stop()
	var received []ingest.Received
	for total := 0; ; {
		over := false
		select {
		case <-ticker.C:
		case <-ctx.Done():
			over = true
		}
		stats := session.Stats()
		if stats.Connections == 0 && stats.Failures > 0 {
			return errors.New(stats.LastError)
		}
		if n := len(stats.Denied); n > 0 && stats.Subscribed == 0 {
			return fmt.Errorf("the broker grants none of %d topics; check its access list", n)
		}
		received = session.Take(received[:0])
		hear(heardOf(received, time.Now().UnixNano()))
		session.Ack(received)
		if total += len(received); progress != nil {
			progress(total)
		}
		if over {
			return nil
		}
	}
}

func heardOf(received []ingest.Received, now int64) []proving.Heard {
	all := make([]proving.Heard, len(received))
	for i, r := range received {
		all[i] = proving.Heard{Reading: readingOf(r.Reading), Arrival: now, Stamped: r.Stamped, Retained: r.Retained}
	}
	return all
}

// refusedOf are the messages of each tag that came to nothing.
func refusedOf(s *site.Site, stats ingest.Stats) [][]proving.Refused {
	all := make([][]proving.Refused, len(s.Tags))
	for i, t := range stats.Tags {
		for _, reason := range ingest.Reasons() {
			if n := t.Refused[reason]; n > 0 {
				r := proving.Refused{Reason: reason.String(), Count: n}
				if t.Last != nil && t.Last.Reason == reason {
					r.Last = strings.TrimPrefix(t.Last.Error(), fmt.Sprintf("tag %q: ", t.Last.Tag))
				}
				all[i] = append(all[i], r)
			}
		}
	}
	return all
}
