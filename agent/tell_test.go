package agent

import (
	"context"
	"encoding/json"
	"log/slog"
	"maps"
	"net"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"

	"heatreeve/agent/demo"
	"heatreeve/agent/view"
)

// board keeps the newest message of each topic.
type board struct {
	mu     sync.Mutex
	newest map[string]string
}

// watchAll subscribes to all topics of a broker, as another client.
func watchAll(t *testing.T, url string) *board {
	t.Helper()
	b := &board{newest: make(map[string]string)}
	c := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(strings.Replace(url, "mqtt", "tcp", 1)).SetClientID("board").SetAutoReconnect(false))
	for _, step := range []func() mqtt.Token{c.Connect, func() mqtt.Token {
		return c.Subscribe("#", 1, func(_ mqtt.Client, m mqtt.Message) {
			b.mu.Lock()
			defer b.mu.Unlock()
			b.newest[m.Topic()] = string(m.Payload())
		})
	}} {
		if token := step(); !token.WaitTimeout(10*time.Second) || token.Error() != nil {
			t.Fatalf("board: %v", token.Error())
		}
	}
	t.Cleanup(func() { c.Disconnect(0) })
	return b
}

func (b *board) await(t *testing.T, what string, ok func(newest map[string]string) bool) {
	t.Helper()
	tick := time.NewTicker(10 * time.Millisecond)
	defer tick.Stop()
	late := time.After(30 * time.Second)
	for {
		b.mu.Lock()
		done := ok(b.newest)
		b.mu.Unlock()
		if done {
			return
		}
		select {
		case <-tick.C:
		case <-late:
			t.Fatalf("waited in vain for %s; there is %q", what, b.newest)
		}
	}
}

func (b *board) all() map[string]string {
	b.mu.Lock()
	defer b.mu.Unlock()
	return maps.Clone(b.newest)
}

// Results go out with the figures that the agent shows, the last ones at the stop, before
// the agent says that it is gone.
func TestResultsArePublished(t *testing.T) {
	b, err := demo.StartBroker(slog.New(slog.DiscardHandler))
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	text := strings.Replace(benchSite, `{url: "mqtt://127.0.0.1:1883"}`, `{url: "`+b.URL()+`", availability: heat/agent}`, 1)
	s := parsed(t, text+"publish: {topic: heat/loads, every: 1 h}\ntiming: {commit: 1 s}\n")
	var newest atomic.Pointer[view.Snapshot]
	a, err := New(s, Options{Data: t.TempDir(), Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Ready: func(net.Addr) {},
		Beat: newest.Store})
	if err != nil {
		t.Fatal(err)
	}
	results := watchAll(t, b.URL())
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- a.Run(ctx) }()
	results.await(t, "the agent", func(n map[string]string) bool { return n["heat/agent"] == "online" })
	stop := plantOn(t, b.URL(), time.Now)
	results.await(t, "a first result", func(n map[string]string) bool { return n["heat/loads/main"] != "" })
	first := results.all()["heat/loads/main"]
	begun := newest.Load().Loads[0].Booked.Measured
	results.await(t, "more to tell", func(map[string]string) bool { return newest.Load().Loads[0].Booked.Measured > begun+2*sec })
	stop()
	cancel()
	if err := <-ended; err != nil {
		t.Fatal(err)
	}
	results.await(t, "the end", func(n map[string]string) bool { return n["heat/agent"] == "offline" })
	last := results.all()["heat/loads/main"]
	var got struct {
		Load     string
		Time     time.Time
		Given    float64 `json:"heat_given_joules"`
		Measured float64 `json:"measured_seconds"`
	}
	if err := json.Unmarshal([]byte(last), &got); err != nil {
		t.Fatalf("%q: %v", last, err)
	}
	latest := newest.Load()
	booked := latest.Loads[0].Booked
	if last == first || got.Load != "main" || got.Time.UnixNano() != latest.At || got.Measured != float64(booked.Measured)/1e9 || got.Given-booked.Given > 1 || booked.Given-got.Given > 1 {
		t.Errorf("last result %s; the agent ended at %d with %+v", last, latest.At, booked)
	}
	if n := len(results.all()); n != 5 {
		t.Errorf("%d topics, %v; want the plant's three, one load and the agent's own", n, results.all())
	}
}
