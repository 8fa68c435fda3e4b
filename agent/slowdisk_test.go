package agent

import (
	"context"
	"fmt"
	"log/slog"
	"path/filepath"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"

	"heatreeve/agent/demo"
	"heatreeve/agent/doors"
	"heatreeve/agent/view"
	"heatreeve/ingest"
	"heatreeve/store"
)

// A disk that takes five seconds for each commit, as a worn memory card does, stops
// neither the reception nor the answers to the broker, which at a keep-alive of two
// seconds would end the connection within three; nor is a reading lost.
func TestSlowDisk(t *testing.T) {
	const slow, commits, perSecond = 5 * time.Second, 3, 200
	b, err := demo.StartBroker(slog.New(slog.DiscardHandler))
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	s := parsed(t, strings.Replace(benchSite, "mqtt://127.0.0.1:1883", b.URL(), 1)+"timing: {commit: 1 s}\n")
	snapshots := make(chan *view.Snapshot, 1)
	a, err := New(s, Options{Data: t.TempDir(), Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Beat: func(v *view.Snapshot) {
		select {
		case <-snapshots:
		default:
		}
		snapshots <- v
	}})
	if err != nil {
		t.Fatal(err)
	}
	if a.intakes[0].session, err = ingest.New(signalsOf(s), ingest.Options{
		URL: b.URL(), ClientID: "slow", Reached: a.reached, Ahead: s.Timing.Ahead, Log: a.o.Log, KeepAlive: 2 * time.Second, PingTimeout: 2 * time.Second,
	}); err != nil {
		t.Fatal(err)
	}
	books, shut := open(t, s, filepath.Join(a.o.Data, HistoryFile), store.Options{})
	defer shut()
	begun := make(chan struct{}, 100)
	var worn atomic.Bool
	good := books.write
	books.write = func(batch store.Batch) error {
		if worn.Load() {
			begun <- struct{}{}
			<-time.NewTimer(slow).C
		}
		return good(batch)
	}
	open, err := doors.Open("127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() {
		ended <- a.work(ctx, books, open, newAddress(open.Private()), newReports(history{db: books.store, zone: s.Zone, through: books.through.Load}))
	}()
	awaitView(t, snapshots, "the subscription", func(v *view.Snapshot) bool { return v.Broker.Topics == 3 })

	client := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(strings.Replace(b.URL(), "mqtt", "tcp", 1)).SetClientID("plant"))
	if token := client.Connect(); !token.WaitTimeout(10*time.Second) || token.Error() != nil {
		t.Fatalf("publisher: %v", token.Error())
	}
	defer client.Disconnect(100)
	pace := time.NewTicker(time.Second / perSecond)
	defer pace.Stop()
	sent := uint64(0)
	base := time.Now().UnixMilli()
	worn.Store(true)
	for seen := 0; seen < commits; {
		select {
		case <-begun:
			seen++
		case <-pace.C:
			client.Publish([]string{"a", "b", "c"}[sent%3], 1, false, fmt.Sprintf(`{"v": %d, "ts": %d}`, []int{80, 60, 2}[sent%3], base+int64(sent)*1000/perSecond))
			sent++
		}
	}
	worn.Store(false)
	v := awaitView(t, snapshots, "every reading on disk", func(v *view.Snapshot) bool {
		return v.Tags[0].Accepted+v.Tags[1].Accepted+v.Tags[2].Accepted == sent && v.Broker.Waiting == 0
	})
	if v.Broker.Losses != 0 || !v.Broker.Connected {
		t.Errorf("%d connections lost, connected %v; want none, true", v.Broker.Losses, v.Broker.Connected)
	}
	if v.Loads[0].Booked.Given == 0 || b.Dropped() != 0 {
		t.Errorf("%g J booked, %d messages dropped", v.Loads[0].Booked.Given, b.Dropped())
	}
	if sent < perSecond*(commits-1) {
		t.Errorf("%d readings in %d commits: the stream was too thin to show anything", sent, commits)
	}
	cancel()
	if err := <-ended; err != nil {
		t.Error(err)
	}
	kept := uint64(0)
	for _, tag := range books.tagIDs {
		for _, err := range books.store.Readings(tag, 0, 1<<62) {
			if err != nil {
				t.Fatal(err)
			}
			kept++
		}
	}
	if kept != sent {
		t.Errorf("%d readings are in the history, %d were sent", kept, sent)
	}
}

func awaitView(t *testing.T, snapshots chan *view.Snapshot, what string, f func(*view.Snapshot) bool) *view.Snapshot {
	t.Helper()
	deadline := time.After(time.Minute)
	for {
		select {
		case v := <-snapshots:
			if f(v) {
				return v
			}
		case <-deadline:
			t.Fatalf("waited a minute for: %s", what)
		}
	}
}
