package agent

import (
	"context"
	"fmt"
	"log/slog"
	"net"
	"strings"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"

	"heatreeve/agent/demo"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/ingest/rough"
)

// lead gives readings of two tags, on two brokers, second by second.
type lead struct {
	pace
	t *testing.T
}

func newLead(t *testing.T) *lead {
	return &lead{newPace([]int{0, 1}, 5*time.Second, 10*time.Second, true), t}
}

// run lets both brokers, or those that are connected, send live readings from a second to
// another.
func (l *lead) run(from, to int64, brokers ...standing) {
	for s := from; s < to; s++ {
		for i, b := range brokers {
			if b.connected {
				l.reading(i, s*sec, true, true, wall(s*sec))
			}
		}
		l.advance(wall(s*sec), brokers...)
	}
}

func (l *lead) want(what string, s int64) {
	l.t.Helper()
	if l.through != s*sec {
		l.t.Errorf("%s: through %d s, want %d", what, l.through/sec, s)
	}
}

var (
	up   = standing{connected: true}
	down = standing{}
)

// A broker that is away is waited for a while, and then no more: the others' loads live.
func TestEventTimeGoesOnWithoutABroker(t *testing.T) {
	l := newLead(t)
	l.run(1000, 1100, up, up)
	l.want("both there", 1094)
	l.run(1100, 1120, up, down)
	l.want("one away for a moment", 1094)
	l.run(1120, 1200, up, down)
	l.want("one away for long", 1194)
	l.run(1200, 1300, up, up)
	l.want("both there again", 1294)
}

// What it had kept in a short loss comes in time.
func TestShortLossIsWaitedFor(t *testing.T) {
	l := newLead(t)
	l.run(1000, 1100, up, up)
	l.run(1100, 1105, up, down)
	l.reading(0, 1105*sec, true, true, wall(1105*sec))
	l.advance(wall(1105*sec), up, up)
	l.want("back, and its backlog to come", 1094)
	l.reading(1, 1101*sec, true, true, wall(1106*sec))
	l.advance(wall(1106*sec), up, up)
	l.want("some of its backlog", 1096)
}

// After a long loss nobody waits: what it had kept is late.
func TestLongLossIsNotWaitedFor(t *testing.T) {
	l := newLead(t)
	l.run(1000, 1100, up, up)
	l.run(1100, 1200, up, down)
	l.reading(1, 1101*sec, true, true, wall(1200*sec))
	l.reading(0, 1200*sec, true, true, wall(1200*sec))
	l.advance(wall(1200*sec), up, up)
	l.want("back with a backlog", 1195)
}

// While all are away event time stands still, as with one.
func TestEventTimeStandsWithoutAnyBroker(t *testing.T) {
	l := newLead(t)
	l.run(1000, 1100, up, up)
	l.run(1100, 5000, down, down)
	l.want("both away", 1094)
}

// A broker that keeps messages back for want of an acknowledgement is waited for.
func TestBrokerThatWaitsForUsIsWaitedFor(t *testing.T) {
	l := newLead(t)
	l.run(1000, 1100, up, up)
	for s := int64(1100); s < 1150; s++ {
		l.reading(0, s*sec, true, true, wall(s*sec))
		l.advance(wall(s*sec), up, standing{connected: true, heldBack: true})
	}
	l.want("held back", 1094)
}

const twoBrokers = `
site: Bench
timezone: UTC
broker: {url: "MAIN"}
brokers:
  annex: {url: "ANNEX"}
tags:
  TI: {topic: a, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 20 s}
  TO: {topic: b, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 20 s}
  FT: {topic: c, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 20 s}
  TI2: {topic: a, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 20 s, broker: annex}
  TO2: {topic: b, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 20 s, broker: annex}
  FT2: {topic: c, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 20 s, broker: annex}
loads:
  main: {stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 4 bar, gives: heat}}
  annex: {stream: {fluid: water, flow: FT2, inlet: TI2, outlet: TO2, pressure: 4 bar, gives: heat}}
`

// hurried is a clock so many times as fast as the machine's.
func hurried(times time.Duration) func() time.Time {
	begun := time.Now()
	return func() time.Time { return begun.Add(times * time.Since(begun)) }
}

// plantOn publishes the three readings of a load to a broker, ten times a second, until
// the function it returns is called.
func plantOn(t *testing.T, url string, now func() time.Time) (stop func()) {
	t.Helper()
	c := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(strings.Replace(url, "mqtt", "tcp", 1)).SetClientID("plant").SetAutoReconnect(false))
	if token := c.Connect(); !token.WaitTimeout(10*time.Second) || token.Error() != nil {
		t.Fatalf("publisher: %v", token.Error())
	}
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan struct{})
	go func() {
		defer close(done)
		tick := time.NewTicker(100 * time.Millisecond)
		defer tick.Stop()
		for {
			select {
			case <-ctx.Done():
				return
			case <-tick.C:
				for i, topic := range []string{"a", "b", "c"} {
					c.Publish(topic, 1, false, fmt.Sprintf(`{"v": %d, "ts": %d}`, []int{80, 60, 2}[i], now().UnixMilli()))
				}
			}
		}
	}()
	return func() { cancel(); <-done; c.Disconnect(0) }
}

// The loss of one broker blinds its loads and no others; it is told by name.
func TestLossOfOneBrokerBlindsItsLoadsOnly(t *testing.T) {
	brokers := [2]*demo.Broker{}
	for i := range brokers {
		var err error
		if brokers[i], err = demo.StartBroker(slog.New(slog.DiscardHandler)); err != nil {
			t.Fatal(err)
		}
		defer brokers[i].Close()
	}
	road, err := rough.Open(strings.TrimPrefix(brokers[1].URL(), "mqtt://"))
	if err != nil {
		t.Fatal(err)
	}
	defer road.Close()
	s := parsed(t, strings.NewReplacer("MAIN", brokers[0].URL(), "ANNEX", "mqtt://"+road.Address()).Replace(twoBrokers))
	s.Timing.Beat = 100 * time.Millisecond // of the machine's clock
	now := hurried(10)
	snapshots := make(chan *view.Snapshot, 1)
	a, err := New(s, Options{Data: t.TempDir(), Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Now: now, Ready: func(net.Addr) {},
		Beat: func(v *view.Snapshot) {
			select {
			case <-snapshots:
			default:
			}
			snapshots <- v
		}})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- a.Run(ctx) }()
	measured := func(v *view.Snapshot, i int) bool {
		f, _ := v.Current(i, now().UnixNano())
		return f.Measured() && f.Duty > 0
	}
	for _, b := range brokers {
		defer plantOn(t, b.URL(), now)()
	}
	awaitView(t, snapshots, "both loads measured", func(v *view.Snapshot) bool { return measured(v, 0) && measured(v, 1) })
	road.Shut(true)
	gone := awaitView(t, snapshots, "the loss", func(v *view.Snapshot) bool { return !v.Brokers[0].Connected })
	v := awaitView(t, snapshots, "a minute of it", func(v *view.Snapshot) bool {
		if !measured(v, 0) {
			t.Fatalf("the other load is blind at %v: %q", time.Unix(0, v.At).UTC(), v.Loads[0].Figure.Reason)
		}
		return v.At > gone.At+60*sec
	})
	if f, _ := v.Current(1, now().UnixNano()); f.Fault != loads.Stale || !v.Broker.Connected {
		t.Errorf("load of the broker that is away: fault %v; the main one connected %t", f.Fault, v.Broker.Connected)
	}
	if got := a.health.ready(); len(got) != 1 || !strings.HasPrefix(got[0], `broker "annex" is not connected`) {
		t.Errorf("not ready because of %q; want broker annex alone", got)
	}
	road.Shut(false)
	awaitView(t, snapshots, "both loads measured again", func(v *view.Snapshot) bool { return measured(v, 0) && measured(v, 1) })
	cancel()
	if err := <-ended; err != nil {
		t.Error(err)
	}
}
