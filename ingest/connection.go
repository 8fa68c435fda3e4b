package ingest

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"sync"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
	"github.com/eclipse/paho.mqtt.golang/packets"
)

// filtersPerSubscribe bounds one SUBSCRIBE packet; brokers limit its size.
const filtersPerSubscribe = 200

// mostQoS is the greatest quality of service. A greater return code in a SUBACK denies
// the topic (0x80) or is reserved: MQTT 3.1.1, section 3.9.3.
const mostQoS = 2

// connected subscribes, at every connection: a broker that was restarted may
// have forgotten the session.
func (s *Session) connected(ctx context.Context, c mqtt.Client) {
	l := s.link.Load()
	s.short.begin(s.o.Now())
	s.tally.update(func(st *Stats) {
		st.Connections++
		st.LastError = ""
	})
	s.o.Log.Info("connected to the broker", "broker", s.broker.String(), "client_id", s.o.ClientID)
	err := s.subscribe(ctx, c)
	if err != nil && ctx.Err() == nil {
		l.end(err) // the next connection tries again; without effect if this one is lost already
	}
	if err == nil {
		s.greet(l)
		s.decoder.plug.askAll(s.o.Now().UnixNano())
	}
}

// greet opens the way for what is to be published, the presence before all else.
func (s *Session) greet(l *link) {
	if s.o.Presence != nil {
		s.outbox.first(s.online())
	}
	s.outbox.greet(l)
}

func (s *Session) subscribe(ctx context.Context, c mqtt.Client) error {
	s.unsubscribe(ctx, c, s.covered) // of the time before there were filters
	granted, refused, lowered := 0, make(map[string]bool), 0
	for chunk := range slices.Chunk(s.topics, filtersPerSubscribe) {
		codes, err := s.request(ctx, c, chunk)
		if err != nil {
			return err
		}
		for _, t := range chunk {
			switch code, answered := codes[t.name]; {
			case !answered:
				return fmt.Errorf("subscribe to %q: answered by another packet than there should be", t.name)
			case code > mostQoS:
				refused[t.name] = true
			case code < t.qos:
				lowered++
				granted++
			default:
				granted++
			}
		}
	}
	s.tally.subscribed(granted, refused)
	if s.listening != nil {
		s.listening.granted(granted)
	}
	if len(refused) > 0 {
		names := slices.Sorted(maps.Keys(refused))
		s.o.Log.Warn("the broker refuses subscriptions; check its access list", "count", len(names), "topics", strings.Join(names[:min(5, len(names))], " "))
	}
	if lowered > 0 {
		s.o.Log.Warn("the broker grants a lower quality of service than asked; messages may be lost", "count", lowered)
	}
	return nil
}

// request subscribes to some topics and returns the broker's codes.
func (s *Session) request(ctx context.Context, c mqtt.Client, topics []*topic) (map[string]byte, error) {
	filters := make(map[string]byte, len(topics))
	for _, t := range topics {
		filters[t.name] = t.qos
	}
	token := c.SubscribeMultiple(filters, nil)
	timer := time.NewTimer(s.o.ConnectTimeout)
	defer timer.Stop()
	select {
	case <-token.Done():
	case <-ctx.Done():
		return nil, ctx.Err()
	case <-timer.C:
		return nil, fmt.Errorf("subscribe to %d topics: no answer for %v", len(topics), s.o.ConnectTimeout)
	}
	if err := token.Error(); err != nil {
		return nil, fmt.Errorf("subscribe to %d topics: %w", len(topics), err)
	}
	t, ok := token.(*mqtt.SubscribeToken)
	if !ok {
		return nil, errors.New("subscribe: no result")
	}
	return t.Result(), nil
}

// failed notes an attempt that did not connect. The same error again is only
// counted.
func (s *Session) failed(ctx context.Context, err error) {
	if ctx.Err() != nil {
		return
	}
	why := s.explain(err)
	var again bool
	s.tally.update(func(st *Stats) {
		st.Failures++
		again = st.LastError == why
		st.LastError = why
	})
	if s.listening != nil {
		s.listening.refused(why)
	}
	if !again {
		s.o.Log.Warn("cannot connect to the broker; trying on", "broker", s.broker.String(), "error", why)
	}
}

// explain puts the library's error into words that a person can act on.
func (s *Session) explain(err error) string {
	if cause := s.dialErr.Load(); cause != nil {
		return s.broker.withAdvice(*cause)
	}
	switch {
	case errors.Is(err, packets.ErrorRefusedBadUsernameOrPassword), errors.Is(err, packets.ErrorRefusedNotAuthorised):
		who := "a client without a user name"
		if s.o.Username != "" {
			who = fmt.Sprintf("user %q", s.o.Username)
		}
		return fmt.Sprintf("the broker refuses %s with client id %q; check user name, password and the broker's access list", who, s.o.ClientID)
	case errors.Is(err, packets.ErrorRefusedIDRejected):
		return fmt.Sprintf("the broker refuses client id %q; choose another", s.o.ClientID)
	case errors.Is(err, packets.ErrorRefusedServerUnavailable):
		return "the broker says that it is not available"
	case errors.Is(err, packets.ErrorRefusedBadProtocolVersion):
		return "the broker does not speak MQTT 3.1.1"
	}
	why := strings.TrimPrefix(s.broker.withAdvice(err), packets.ErrorNetworkError.Error()+" : ")
	if s.broker.tls && s.o.CertFile == "" {
		// Since TLS 1.3 the refusal comes after the handshake, and may be overtaken by the end of the connection.
		why += "; perhaps the broker wants a client certificate"
	}
	return why
}

// lost notes the end of a connection that we did not want to end.
func (s *Session) lost(err error) {
	why := "closed by the broker"
	if err != nil {
		why = plainly(err)
	}
	s.tally.update(func(st *Stats) {
		st.Losses++
		st.LastError = why
	})
	s.o.Log.Warn("connection to the broker lost", "broker", s.broker.String(), "error", why)
	if s.short.end(s.o.Now()) {
		s.o.Log.Warn("connections end within seconds, again and again; probably another client uses this id", "client_id", s.o.ClientID)
	}
}

// shortLives watches for connections that keep ending soon after they began,
// as happens when two clients with one id throw each other out.
type shortLives struct {
	mu    sync.Mutex
	began time.Time
	inRow int
}

const (
	shortLife  = 10 * time.Second
	suspicious = 3 // short connections in a row
)

func (s *shortLives) begin(now time.Time) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.began = now
}

// end reports true once in a row of short connections.
func (s *shortLives) end(now time.Time) bool {
	s.mu.Lock()
	defer s.mu.Unlock()
	if now.Sub(s.began) > shortLife {
		s.inRow = 0
		return false
	}
	s.inRow++
	return s.inRow == suspicious
}
