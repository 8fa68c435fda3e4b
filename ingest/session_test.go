package ingest

import (
	"bytes"
	"context"
	"crypto/tls"
	"fmt"
	"io"
	"log/slog"
	"strings"
	"sync"
	"testing"
	"time"

	mochi "github.com/mochi-mqtt/server/v2"
	"github.com/mochi-mqtt/server/v2/listeners"
	"github.com/mochi-mqtt/server/v2/packets"
)

// openDoor lets everybody do everything, but for topics below secret/.
type openDoor struct{ mochi.HookBase }

func (*openDoor) ID() string { return "open-door" }

func (*openDoor) Provides(b byte) bool {
	return b == mochi.OnConnectAuthenticate || b == mochi.OnACLCheck
}

func (*openDoor) OnConnectAuthenticate(*mochi.Client, packets.Packet) bool { return true }

func (*openDoor) OnACLCheck(_ *mochi.Client, topic string, _ bool) bool {
	return !strings.HasPrefix(topic, "secret/")
}

// inProcess starts a broker in this process. It drops messages silently when
// a queue is full, so the end of the test makes sure that it did not.
func inProcess(t *testing.T) (*mochi.Server, string) {
	t.Helper()
	server, address := serve(t, nil)
	return server, "mqtt://" + address
}

// serve starts it with TLS where a configuration is given.
func serve(t *testing.T, config *tls.Config) (server *mochi.Server, address string) {
	t.Helper()
	server = mochi.New(&mochi.Options{InlineClient: true, Logger: slog.New(slog.NewTextHandler(io.Discard, nil))})
	if err := server.AddHook(new(openDoor), nil); err != nil {
		t.Fatal(err)
	}
	tcp := listeners.NewTCP(listeners.Config{ID: "t", Address: "127.0.0.1:0", TLSConfig: config})
	if err := server.AddListener(tcp); err != nil {
		t.Fatal(err)
	}
	if err := server.Serve(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if info := server.Info.Clone(); info.MessagesDropped != 0 || info.InflightDropped != 0 {
			t.Errorf("the broker dropped %d messages and %d in flight", info.MessagesDropped, info.InflightDropped)
		}
		if err := server.Close(); err != nil {
			t.Error(err)
		}
	})
	return server, tcp.Address()
}

// held is how many messages the broker keeps for a client until they are
// acknowledged. (Its own total counts down twice when a client comes back.)
func held(server *mochi.Server, id string) int {
	c, ok := server.Clients.Get(id)
	if !ok {
		return -1
	}
	return c.State.Inflight.Len()
}

// logged is a log that a test reads.
type logged struct {
	mu   sync.Mutex
	text bytes.Buffer
}

func (l *logged) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.text.Write(p)
}

func (l *logged) count(part string) int {
	l.mu.Lock()
	defer l.mu.Unlock()
	return strings.Count(l.text.String(), part)
}

// start runs a session until stop, which waits for its end.
func start(t *testing.T, tags []Tag, o Options) (s *Session, log *logged, stop func()) {
	t.Helper()
	log = &logged{}
	o.Log = slog.New(slog.NewTextHandler(log, nil))
	if o.ClientID == "" {
		o.ClientID = t.Name()
	}
	o.MaxBackoff = 50 * time.Millisecond
	s, err := New(tags, o)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	done := make(chan error, 1)
	go func() { done <- s.Run(ctx) }()
	stop = sync.OnceFunc(func() {
		cancel()
		if err := <-done; err != nil {
			t.Errorf("Run: %v", err)
		}
	})
	t.Cleanup(stop)
	return s, log, stop
}

func ready(t *testing.T, s *Session) {
	t.Helper()
	eventually(t, "subscribed", func() bool { return s.Stats().Subscribed == len(s.topics) && s.Stats().Connected })
}

// number is a tag that takes bare numbers as they are.
func number(name string) Tag {
	tag := bare()
	tag.Name, tag.Topic, tag.Scale = name, "plant/"+name, 1
	return tag
}

// collect takes until n readings are there.
func collect(t *testing.T, s *Session, n int) []Received {
	t.Helper()
	var batch []Received
	eventually(t, fmt.Sprintf("%d readings", n), func() bool {
		batch = s.Take(batch)
		return len(batch) >= n
	})
	return batch
}

func TestReadingsInOrderAcknowledgedAfterStoring(t *testing.T) {
	const messages = 500
	server, url := inProcess(t)
	tags := []Tag{number("a"), number("b"), number("c")}
	s, _, stop := start(t, tags, Options{URL: url})
	ready(t, s)
	for i := range messages {
		if err := server.Publish(tags[i%3].Topic, fmt.Append(nil, i), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	batch := collect(t, s, messages)
	for i, r := range batch {
		if r.Value != float64(i) || r.Tag != i%3 || r.Stamped {
			t.Fatalf("reading %d is %+v", i, r.Reading)
		}
	}
	if got := s.Waiting(); got != messages {
		t.Errorf("%d messages waiting before Ack, want %d", got, messages)
	}
	if got := held(server, t.Name()); got != messages {
		t.Errorf("the broker holds %d before Ack, want %d", got, messages)
	}
	s.Ack(batch)
	stop() // the acknowledgements must go out before the goodbye
	if got := s.Waiting(); got != 0 {
		t.Errorf("%d messages waiting after Ack, want 0", got)
	}
	eventually(t, "broker has all acknowledgements", func() bool { return held(server, t.Name()) == 0 })
	st := s.Stats()
	if st.Connected || st.Losses != 0 || st.Connections != 1 || st.Tags[0].Accepted != 167 || st.Tags[0].NewestAt == 0 {
		t.Errorf("stats %+v", st)
	}
	if err := s.Run(context.Background()); err == nil {
		t.Error("a second Run was allowed")
	}
}

func TestManyTopics(t *testing.T) {
	server, url := inProcess(t)
	var tags []Tag
	for i := range 2*filtersPerSubscribe + 50 {
		tags = append(tags, number(fmt.Sprint("n", i)))
	}
	s, _, _ := start(t, tags, Options{URL: url})
	ready(t, s)
	for _, tag := range tags {
		if err := server.Publish(tag.Topic, []byte("1"), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	batch := collect(t, s, len(tags))
	for i, r := range batch {
		if r.Tag != i {
			t.Fatalf("reading %d has tag %d", i, r.Tag)
		}
	}
}

func TestDeniedTopics(t *testing.T) {
	server, url := inProcess(t)
	hidden := number("hidden")
	hidden.Topic = "secret/hidden"
	s, log, _ := start(t, []Tag{number("a"), hidden}, Options{URL: url})
	eventually(t, "a denied topic", func() bool { return len(s.Stats().Denied) > 0 })
	if st := s.Stats(); st.Denied[0] != hidden.Topic || st.Subscribed != 1 || log.count("secret/hidden") != 1 {
		t.Errorf("stats %+v; want %q denied, one granted, and one line in the log", st, hidden.Topic)
	}
	if err := server.Publish("plant/a", []byte("1"), false, 1); err != nil {
		t.Fatal(err)
	}
	collect(t, s, 1)
}

func TestRefusedMessagesAreCountedAndAcknowledged(t *testing.T) {
	server, url := inProcess(t)
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url})
	ready(t, s)
	for _, payload := range []string{"12,4", "NaN", "13,5", "", strings.Repeat("1", 3<<20), "7"} {
		if err := server.Publish("plant/a", []byte(payload), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	batch := collect(t, s, 1)
	if s.Waiting() != 1 { // the refused ones came before and are acknowledged
		t.Errorf("%d waiting, want the good one", s.Waiting())
	}
	s.Ack(batch)
	eventually(t, "all acknowledged", func() bool { return held(server, t.Name()) == 0 })
	var want Counts
	want[NotANumber], want[NotFinite], want[Empty], want[TooLarge] = 2, 1, 1, 1
	st := s.Stats().Tags[0]
	if st.Refused != want || st.Accepted != 1 || st.Last == nil || st.Last.Reason != TooLarge {
		t.Errorf("stats %+v, last %v; want refused %v", st, st.Last, want)
	}
	if got := log.count("message refused"); got != 4 {
		t.Errorf("%d refusals logged, want the first of each of 4 kinds", got)
	}
}

func TestRetainedWithoutStamp(t *testing.T) {
	server, url := inProcess(t)
	if err := server.Publish("plant/a", []byte("42"), true, 1); err != nil {
		t.Fatal(err)
	}
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url})
	eventually(t, "the retained message", func() bool { return s.Stats().Tags[0].Refused[Retained] == 1 })
	if st := s.Stats().Tags[0]; st.Retained != 42 || st.Accepted != 0 {
		t.Errorf("stats %+v; want 42 to show and none accepted", st)
	}
	if got := s.Take(nil); len(got) != 0 {
		t.Errorf("took %v; want none", got)
	}
}

func TestUnknownTopic(t *testing.T) {
	server, url := inProcess(t)
	old := []Tag{number("old1"), number("old2"), number("old3")}
	first, _, stop := start(t, old, Options{URL: url})
	ready(t, first)
	stop()
	s, log, _ := start(t, []Tag{number("new")}, Options{URL: url}) // the session still has the old topics
	ready(t, s)
	for _, tag := range old {
		if err := server.Publish(tag.Topic, []byte("1"), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	eventually(t, "3 unknown", func() bool { return s.Stats().UnknownTopic == 3 })
	eventually(t, "acknowledged", func() bool { return held(server, t.Name()) == 0 })
	if st := s.Stats(); st.Tags[0].Refused != (Counts{}) || log.count("no tag reads") != 1 {
		t.Errorf("counted under a tag, or logged %d times", log.count("no tag reads"))
	}
}

func TestFullBufferLosesNothing(t *testing.T) {
	const messages = 30
	server, url := inProcess(t)
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url, Buffer: 10, PingTimeout: 200 * time.Millisecond})
	ready(t, s)
	for i := range messages {
		if err := server.Publish("plant/a", fmt.Append(nil, i), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	drainOverflow(t, s, messages) // in any order: this broker delivers again from a map
	eventually(t, "copies acknowledged as well", func() bool {
		s.Ack(s.Take(nil))
		return held(server, t.Name()) == 0
	})
	if log.count("buffer was full; reconnecting") == 0 {
		t.Error("the reconnection was not explained in the log")
	}
}

// drainOverflow waits until a buffer of 10 overflows, then takes and stores all
// messages, and returns them in the order of their first coming.
func drainOverflow(t *testing.T, s *Session, messages int) []int {
	t.Helper()
	eventually(t, "overflow", func() bool { return s.Stats().Tags[0].Refused[Overflow] > 0 })
	if st := s.Stats(); st.Losses != 0 || !st.Connected {
		t.Errorf("a full buffer cost the connection: %+v", st)
	}
	var got []int
	seen := map[int]bool{}
	var batch []Received
	eventually(t, "all messages", func() bool {
		batch = s.Take(batch[:0])
		for _, r := range batch {
			if v := int(r.Value); !seen[v] {
				seen[v] = true
				got = append(got, v)
			}
		}
		s.Ack(batch)
		return len(got) == messages
	})
	return got
}

func TestShortLives(t *testing.T) {
	var s shortLives
	now := time.Unix(1e9, 0)
	live := func(d time.Duration) bool {
		s.begin(now)
		now = now.Add(d)
		return s.end(now)
	}
	for i, tt := range []struct {
		d    time.Duration
		want bool
	}{{time.Second, false}, {time.Second, false}, {time.Minute, false}, {time.Second, false}, {time.Second, false}, {time.Second, true}, {time.Second, false}} {
		if got := live(tt.d); got != tt.want {
			t.Errorf("connection %d of %v: warned %v, want %v", i, tt.d, got, tt.want)
		}
	}
}

func TestPasswordThatCannotBeRead(t *testing.T) {
	_, url := inProcess(t)
	broken := true
	var mu sync.Mutex
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, Username: "ann", Password: func() (string, error) {
		mu.Lock()
		defer mu.Unlock()
		if broken {
			return "", io.ErrUnexpectedEOF
		}
		return "pw", nil
	}})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	if got := s.Stats().LastError; !strings.Contains(got, `password of user "ann"`) {
		t.Errorf("last error %q; want it to name the password", got)
	}
	mu.Lock()
	broken = false
	mu.Unlock()
	ready(t, s)
}
