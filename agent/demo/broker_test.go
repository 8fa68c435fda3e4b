package demo

import (
	"log/slog"
	"net"
	"net/url"
	"strings"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
	"go.uber.org/goleak"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// patience bounds every wait of these tests.
const patience = 30 * time.Second

var silent = slog.New(slog.DiscardHandler)

func startBroker(t *testing.T) *Broker {
	t.Helper()
	b, err := StartBroker(silent)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		for range 2 { // closing twice is allowed
			if err := b.Close(); err != nil {
				t.Error(err)
			}
		}
	})
	return b
}

// connect returns a client of the broker that acknowledges nothing by itself.
func connect(t *testing.T, b *Broker, id string) mqtt.Client {
	t.Helper()
	c := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(b.URL()).SetClientID(id).SetAutoAckDisabled(true))
	finish(t, "connect", c.Connect())
	t.Cleanup(func() { c.Disconnect(250) })
	return c
}

func finish(t *testing.T, what string, token mqtt.Token) {
	t.Helper()
	if !token.WaitTimeout(patience) || token.Error() != nil {
		t.Fatalf("%s: %v", what, token.Error())
	}
}

// subscribe hands on the messages of all topics.
func subscribe(t *testing.T, c mqtt.Client, room int) <-chan mqtt.Message {
	t.Helper()
	messages := make(chan mqtt.Message, room)
	finish(t, "subscribe", c.Subscribe("#", 1, func(_ mqtt.Client, m mqtt.Message) { messages <- m }))
	return messages
}

func receive(t *testing.T, messages <-chan mqtt.Message) mqtt.Message {
	t.Helper()
	select {
	case m := <-messages:
		return m
	case <-time.After(patience):
		t.Fatal("no message came")
		return nil
	}
}

func TestBrokerIsOnLoopbackAlone(t *testing.T) {
	b := startBroker(t)
	u, err := url.Parse(b.URL())
	if err != nil || u.Scheme != "mqtt" || u.Port() == "" || !net.ParseIP(u.Hostname()).IsLoopback() {
		t.Errorf("address %q, %v; want mqtt://, a loopback address and a port", b.URL(), err)
	}
}

// The agent may leave 20 000 readings unacknowledged until it has written them;
// by default the broker would drop all but 8192 of them.
func TestUnacknowledgedMessagesAreNotDropped(t *testing.T) {
	const n = 20_000
	b := startBroker(t)
	messages := subscribe(t, connect(t, b, "reader"), n)
	writer := connect(t, b, "writer")
	payload := []byte(strings.Repeat("x", 40))
	for range n / 100 {
		tokens := make([]mqtt.Token, 100)
		for i := range tokens {
			tokens[i] = writer.Publish("a/b", 1, false, payload)
		}
		for _, token := range tokens {
			finish(t, "publish", token)
		}
	}
	for range n {
		receive(t, messages)
	}
	if d := b.Dropped(); d != 0 {
		t.Errorf("%d messages dropped, want 0", d)
	}
}

func TestDroppedMessagesAreCounted(t *testing.T) {
	b := startBroker(t)
	b.server.Options.Capabilities.MaximumInflight = 10
	messages := subscribe(t, connect(t, b, "reader"), 100)
	writer := connect(t, b, "writer")
	for range 15 {
		finish(t, "publish", writer.Publish("a/b", 1, false, "x"))
	}
	for range 10 {
		receive(t, messages)
	}
	finish(t, "publish", writer.Publish("a/b", 1, false, "x")) // the one before is through
	if d := b.Dropped(); d < 5 || d > 6 {
		t.Errorf("%d messages dropped, want the 5 or 6 beyond the limit", d)
	}
}

func TestBrokerLogsErrorsOnly(t *testing.T) {
	var text strings.Builder
	log := slog.New(errorsOnly{slog.NewTextHandler(&text, nil)}).With("part", "broker").WithGroup("g")
	log.Info("chatter")
	log.Warn("chatter")
	log.Error("trouble")
	if got := text.String(); strings.Contains(got, "chatter") || !strings.Contains(got, "trouble") {
		t.Errorf("log is %q, want the error alone", got)
	}
}
