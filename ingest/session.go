package ingest

import (
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"net"
	"net/url"
	"slices"
	"sync"
	"sync/atomic"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"

	"heatreeve/ingest/sparkplug"
)

// Session keeps one persistent MQTT session and the readings it delivers.
//
// One goroutine calls Run; Take, Ack, Waiting and Stats may be called from any.
type Session struct {
	tags    []Tag
	o       Options
	broker  broker
	decoder *Decoder
	topics  []*topic // subscribed to: by name, filters before them
	covered []string // topics that a filter is in place of
	strays  *strays
	inbox   *inbox
	outbox  *outbox
	tally   *tally

	running atomic.Bool
	client  atomic.Pointer[mqtt.Client]
	link    atomic.Pointer[link]
	dialErr atomic.Pointer[error] // of the attempt under way: the library does not hand it on whole

	will      []byte    // payload, which the library holds; nil without a presence
	presented time.Time // of the attempt under way

	listening *listening // nil of a session that decodes
	outcomes  []Outcome  // of the message at hand
	owed      debts
	told      SparkplugStats // of which the first of each kind is logged
	short     shortLives
}

// New checks tags and options and prepares a session; nothing is sent before
// [Session.Run]. The error names every fault.
func New(tags []Tag, o Options) (*Session, error) {
	o, wrong := o.withDefaults()
	decoder, wrongTags := NewDecoder(tags, o.Ahead)
	if err := errors.Join(wrong, wrongTags); err != nil {
		return nil, err
	}
	b, err := parseBroker(o.URL)
	if err != nil {
		return nil, err
	}
	s := &Session{
		tags: tags, o: o, broker: b, decoder: decoder, strays: newStrays(), owed: make(debts),
		inbox: newInbox(o.Buffer, patience(o.PingTimeout)), outbox: newOutbox(o.Outbox), tally: newTally(len(tags)),
	}
	if o.Rebirths {
		decoder.plug.start(decoder.ahead, rand.Float64)
	}
	if o.Reached != nil {
		s.inbox.reached = o.Reached
	}
	if o.Presence != nil {
		s.will = slices.Clone(o.Presence.Offline(o.Now()))
	}
	for _, t := range decoder.sorted() {
		if n := t.most(); n > o.Buffer {
			return nil, fmt.Errorf("buffer of %d readings: topic %q feeds %d tags with up to %d in one message", o.Buffer, t.name, len(t.tags), n)
		}
	}
	topics := append(decoder.sorted(), decoder.plug.filters()...)
	if o.Host != "" {
		topics = append(topics, &topic{name: o.Presence.Topic, qos: 1})
	}
	if err := checkFilters(o.Subscribe, topics); err != nil {
		return nil, err
	}
	s.topics, s.covered = under(o.Subscribe, topics)
	return s, nil
}

// patience is how long a message may hold up the connection: less than the
// broker's answer to a probe may take, for it comes behind the message.
func patience(pingTimeout time.Duration) time.Duration { return pingTimeout * 3 / 5 }

// Run connects, and reconnects, until ctx ends; then it tells the broker
// goodbye, after the acknowledgements given so far, and returns nil. To stop
// without repeats: stop taking, store, [Session.Ack], then end ctx. Run may be
// called once.
//
// If ctx ends while there is no connection, a goroutine of the client library
// remains until its pause between two attempts is over.
func (s *Session) Run(ctx context.Context) error {
	if s.running.Swap(true) {
		return errors.New("the session was run before; make a new one")
	}
	client := mqtt.NewClient(s.clientOptions(ctx))
	s.client.Store(&client)
	s.outbox.up = client.IsConnectionOpen
	client.Connect()
	sending, endSending := context.WithCancel(context.WithoutCancel(ctx))
	var sender sync.WaitGroup
	sender.Go(func() { s.send(sending) })
	sender.Go(func() { s.sweep(sending, client) })
	if s.o.Rebirths && s.decoder.plug != nil {
		sender.Go(func() { s.ask(sending) })
	}
	<-ctx.Done()
	s.part()
	if l := s.link.Load(); l != nil {
		l.parting.Store(true)
	}
	client.Disconnect(500) // ms
	endSending()
	sender.Wait()
	return nil
}

func (s *Session) clientOptions(ctx context.Context) *mqtt.ClientOptions {
	o := mqtt.NewClientOptions().AddBroker("tcp://" + s.broker.address()).SetProtocolVersion(4)
	o.SetClientID(s.o.ClientID).SetCleanSession(s.o.Transient || s.o.Host != "")
	o.SetKeepAlive(s.o.KeepAlive).SetPingTimeout(s.o.PingTimeout).SetConnectTimeout(s.o.ConnectTimeout)
	o.SetAutoReconnect(true).SetMaxReconnectInterval(s.o.MaxBackoff)
	o.SetConnectRetry(!s.o.Transient).SetConnectRetryInterval(min(5*time.Second, s.o.MaxBackoff))
	o.SetCredentialsProvider(s.credentials)
	if s.will != nil {
		o.SetBinaryWill(s.o.Presence.Topic, s.will, 1, true)
	}
	o.SetCustomOpenConnectionFn(func(*url.URL, mqtt.ClientOptions) (net.Conn, error) { return s.open(ctx) })
	o.SetOnConnectHandler(func(c mqtt.Client) { s.connected(ctx, c) })
	o.SetConnectionLostHandler(func(_ mqtt.Client, err error) { s.lost(err) })
	o.SetConnectionNotificationHandler(func(_ mqtt.Client, n mqtt.ConnectionNotification) {
		if failed, ok := n.(mqtt.ConnectionNotificationFailed); ok {
			s.failed(ctx, failed.Reason)
		}
	})
	return o
}

// credentials has no way to fail, so [Session.open] does it instead.
func (s *Session) credentials() (user, password string) {
	s.dialErr.Store(nil)
	s.present()
	if s.o.Password == nil {
		return s.o.Username, ""
	}
	password, err := s.o.Password()
	if err != nil {
		err = fmt.Errorf("password of user %q: %w", s.o.Username, err)
		s.dialErr.Store(&err)
	}
	return s.o.Username, password
}

// open is called for each attempt, after all messages of the connection before
// have been handled.
func (s *Session) open(ctx context.Context) (net.Conn, error) {
	s.departed(ctx)
	if err := s.dialErr.Load(); err != nil {
		return nil, *err
	}
	s.inbox.reconnect()
	s.outbox.open(nil)
	s.tally.subscribed(0, nil)
	conn, err := s.dial(ctx)
	if err != nil {
		s.dialErr.Store(&err)
		return nil, err
	}
	l := newLink(conn, s.o.ConnectTimeout, func(l *link, d *delivery) { s.receive(ctx, l, d) })
	if s.decoder.plug != nil || s.listening != nil {
		l.in.most = maxPacket - MaxPayload + sparkplug.MaxPayload
	}
	l.in.confirm = s.outbox.confirm
	l.in.within = messageTimes * s.o.ConnectTimeout
	s.outbox.open(l)
	s.link.Store(l)
	return l, nil
}

// messageTimes bounds the time that one message may take, in connect timeouts.
const messageTimes = 12

// receive handles one message, in the goroutine that reads the connection it came
// by, and in order.
func (s *Session) receive(ctx context.Context, by acknowledger, d *delivery) {
	arrival := s.o.Now().UnixNano()
	if s.listening != nil {
		s.listening.hear(Heard{Topic: string(d.topic), Payload: d.payload, Retained: d.retained, At: arrival})
		return
	}
	topic := string(d.topic)
	out, known := s.decoder.Decode(topic, d.payload, arrival, d.retained, s.outcomes[:0])
	out = s.owed.pay(out)
	s.outcomes = out
	switch {
	case s.o.Host != "" && topic == s.o.Presence.Topic:
		s.contradict(d.payload)
	case !known:
		s.unknown(topic, arrival)
	}
	var m *message
	if d.qos > 0 {
		m = &message{by: by, answer: d.answer()}
	}
	for i := range out {
		out[i].InOrder, out[i].Retained = m != nil && !d.retained, d.retained
	}
	if !s.inbox.put(ctx, m, out) {
		s.owed.note(s.tags, out)
		s.overflow(out, d.payload, arrival)
	}
	s.tellRefused()
	for _, r := range s.tally.count(arrival, out) {
		s.o.Log.Warn("message refused; more of this kind are only counted", "reason", r.Reason.String(), "refusal", r.Error())
	}
	s.inbox.acknowledge()
}

func (s *Session) unknown(topic string, arrival int64) {
	if s.tally.unknown(arrival) {
		s.o.Log.Warn("message on a topic that no tag reads; more of them are only counted", "topic", topic)
	}
	if !slices.ContainsFunc(s.o.Subscribe, func(f string) bool { return covers(f, topic) }) {
		s.strays.note(topic)
	}
}

// overflow turns what found no room into refusals.
func (s *Session) overflow(out []Outcome, payload []byte, arrival int64) {
	text, cut := excerpt(payload)
	for i := range out {
		if out[i].Refusal == nil {
			out[i].Refusal = &Refusal{Tag: s.tags[out[i].Tag].Name, Reason: Overflow, Payload: text, Cut: cut, At: arrival,
				Detail: fmt.Sprintf("found the buffer of %d readings full; check the disk and the load of this machine", s.o.Buffer)}
		}
	}
}

// Take appends to buf the readings that came since the last call, in the order
// of their arrival. They are the caller's until it calls [Session.Ack].
func (s *Session) Take(buf []Received) []Received {
	buf, left := s.inbox.take(buf)
	if l := s.link.Load(); left && l != nil {
		l.end(errLeft)
	}
	return buf
}

var errLeft = errors.New("the buffer was full; reconnecting, so that the broker delivers again what found no room")

// Ack says that the readings are on disk. A message is acknowledged to the
// broker when all its readings are, and all messages before it; one from before
// a reconnection no more, because it is delivered again.
func (s *Session) Ack(batch []Received) { s.inbox.stored(batch) }

// Waiting returns how many messages of this connection are not yet
// acknowledged. A broker sends only so many ahead (mosquitto: 20 unless told
// otherwise), so that a caller that finds many here should store early.
func (s *Session) Waiting() int { return s.inbox.waiting() }

// TellAt says at how many waiting messages [Options.Reached] is told; 0: at none.
func (s *Session) TellAt(n int) { s.inbox.tellAt(n) }

// Stats returns the counts so far.
func (s *Session) Stats() Stats {
	stats := s.tally.copy()
	stats.Outbox, stats.Sparkplug = s.outbox.stats(), s.decoder.plug.stats()
	if c := s.client.Load(); c != nil {
		stats.Connected = (*c).IsConnectionOpen()
	}
	if stats.Connected {
		stats.LastError = ""
	}
	return stats
}
