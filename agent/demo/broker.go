package demo

import (
	"context"
	"fmt"
	"log/slog"
	"math"
	"net"
	"sync"
	"sync/atomic"

	mqtt "github.com/mochi-mqtt/server/v2"
	"github.com/mochi-mqtt/server/v2/listeners"
	"github.com/mochi-mqtt/server/v2/packets"
)

// writesPending is how many messages may wait to be written to one client.
const writesPending = 32 * 1024

// Broker is an MQTT broker inside this process, for the demo only: it keeps
// sessions in memory and lets in everybody who reaches it, and it listens on the
// loopback address alone.
type Broker struct {
	server *mqtt.Server
	url    string
	close  func() error
}

// StartBroker starts a broker on a free loopback port. Only its errors go to
// log; what it drops is counted by [Broker.Dropped].
func StartBroker(log *slog.Logger) (*Broker, error) {
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return nil, fmt.Errorf("demo broker: %w", err)
	}
	server := mqtt.New(&mqtt.Options{Capabilities: patient(), Logger: slog.New(errorsOnly{log.Handler()})})
	if err := serve(server, listener); err != nil {
		_ = listener.Close()
		return nil, fmt.Errorf("demo broker: %w", err)
	}
	return &Broker{server: server, url: "mqtt://" + listener.Addr().String(), close: sync.OnceValue(server.Close)}, nil
}

func serve(server *mqtt.Server, listener net.Listener) error {
	if err := server.AddHook(new(everyone), nil); err != nil {
		return err
	}
	if err := server.AddListener(listeners.NewNet("loopback", listener)); err != nil {
		return err
	}
	return server.Serve()
}

// patient are the broker's limits, raised to what the protocol has packet ids
// for: the agent acknowledges only after it has written to disk, and this broker
// drops what exceeds its limits although the publisher was told that it arrived.
func patient() *mqtt.Capabilities {
	c := mqtt.NewDefaultServerCapabilities()
	c.MaximumInflight = math.MaxUint16
	c.ReceiveMaximum = math.MaxUint16
	c.MaximumClientWritesPending = writesPending
	return c
}

// URL is the broker's address as a site file writes it.
func (b *Broker) URL() string { return b.url }

// Dropped is the number of messages that were taken from a publisher and not
// delivered to a subscriber. It should be zero.
func (b *Broker) Dropped() int64 {
	return atomic.LoadInt64(&b.server.Info.MessagesDropped) + atomic.LoadInt64(&b.server.Info.InflightDropped)
}

// Close ends all connections and the broker. It may be called twice.
func (b *Broker) Close() error { return b.close() }

// everyone lets all clients in, to all topics.
type everyone struct{ mqtt.HookBase }

func (*everyone) ID() string { return "everyone" }

func (*everyone) Provides(event byte) bool {
	return event == mqtt.OnConnectAuthenticate || event == mqtt.OnACLCheck
}

func (*everyone) OnConnectAuthenticate(*mqtt.Client, packets.Packet) bool { return true }

func (*everyone) OnACLCheck(*mqtt.Client, string, bool) bool { return true }

// errorsOnly keeps the broker's chatter, a line and more for each connection,
// out of the log.
type errorsOnly struct{ slog.Handler }

func (h errorsOnly) Enabled(ctx context.Context, level slog.Level) bool {
	return level >= slog.LevelError && h.Handler.Enabled(ctx, level)
}

func (h errorsOnly) WithAttrs(attrs []slog.Attr) slog.Handler {
	return errorsOnly{h.Handler.WithAttrs(attrs)}
}

func (h errorsOnly) WithGroup(name string) slog.Handler {
	return errorsOnly{h.Handler.WithGroup(name)}
}
