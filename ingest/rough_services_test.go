//go:build services

package ingest

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"heatreeve/ingest/rough"
)

// roughRoad is mosquitto behind a rough road, with a session on it.
func roughRoad(t *testing.T, o Options) (*mosquitto, *rough.Road, *Session) {
	t.Helper()
	b := newMosquitto(t, "allow_anonymous true", "max_inflight_messages 1000")
	b.start(t)
	road, err := rough.Open(strings.TrimPrefix(b.url(), "mqtt://"))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := road.Close(); err != nil {
			t.Error(err)
		}
	})
	o.URL = "mqtt://" + road.Address()
	s, _, _ := start(t, []Tag{number("a")}, o)
	ready(t, s)
	return b, road, s
}

// each wants every number below to, from the first on, repeats and older ones allowed, and
// acknowledges.
func each(t *testing.T, s *Session, from, to int) {
	t.Helper()
	missing := make(map[float64]bool)
	for i := from; i < to; i++ {
		missing[float64(i)] = true
	}
	eventually(t, fmt.Sprintf("readings %d to %d", from, to), func() bool {
		batch := s.Take(nil)
		for _, r := range batch {
			delete(missing, r.Value)
		}
		s.Ack(batch)
		return len(missing) == 0
	})
	eventually(t, "nothing left to acknowledge", func() bool { s.Ack(s.Take(nil)); return s.Waiting() == 0 })
}

// A slow road loses nothing and no connection, whether it takes long or carries little.
func TestSlowRoads(t *testing.T) {
	for name, slow := range map[string]func(*rough.Road){
		"latency": func(r *rough.Road) { r.Delay(150 * time.Millisecond) },
		"drip":    func(r *rough.Road) { r.Drip(4000) },
	} {
		t.Run(name, func(t *testing.T) {
			b, road, s := roughRoad(t, Options{KeepAlive: time.Second, PingTimeout: 3 * time.Second})
			slow(road)
			b.publish(t, "plant/a", counted(0, 300)...)
			each(t, s, 0, 300)
			if st := s.Stats(); st.Losses != 0 || st.Tags[0].Accepted != 300 {
				t.Errorf("%d losses, %d accepted; want none, 300", st.Losses, st.Tags[0].Accepted)
			}
		})
	}
}

// Resets in the stream: what was on its way comes again.
func TestResetRoad(t *testing.T) {
	b, road, s := roughRoad(t, Options{})
	for i := range 3 {
		b.publish(t, "plant/a", counted(100*i, 100*(i+1))...)
		road.Reset()
		eventually(t, "the loss", func() bool { return s.Stats().Losses == uint64(i+1) })
		ready(t, s)
	}
	each(t, s, 0, 300)
}

// A dead link is noticed within the keep-alive and the wait for an answer, as the library
// rounds them: by 5 s at most each. What was published meanwhile comes on the next connection.
func TestHalfOpenRoad(t *testing.T) {
	const keepAlive, ping = 2 * time.Second, time.Second
	b, road, s := roughRoad(t, Options{KeepAlive: keepAlive, PingTimeout: ping})
	b.publish(t, "plant/a", counted(0, 10)...)
	each(t, s, 0, 10)
	road.Freeze(true)
	begun := time.Now()
	b.publish(t, "plant/a", counted(10, 20)...)
	eventually(t, "the loss", func() bool { return s.Stats().Losses == 1 })
	took := time.Since(begun)
	t.Logf("a dead link was noticed after %v", took.Round(100*time.Millisecond))
	if took > keepAlive+ping+2*time.Second {
		t.Errorf("noticed after %v; want within the keep-alive of %v and the wait of %v, rounded up by a second each", took, keepAlive, ping)
	}
	road.Freeze(false)
	ready(t, s)
	each(t, s, 10, 20)
}
