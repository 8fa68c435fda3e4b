package agent

import (
	"context"
	"log/slog"
	"net"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/demo"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/ingest/rough"
)

// Behind a link that goes dead a load grows blind once its readings have run out of age;
// when the link lives again, what the broker had kept fills the time without a gap.
func TestDeadLinkBlindsAndNothingIsMissing(t *testing.T) {
	b, err := demo.StartBroker(slog.New(slog.DiscardHandler))
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	road, err := rough.Open(strings.TrimPrefix(b.URL(), "mqtt://"))
	if err != nil {
		t.Fatal(err)
	}
	defer road.Close()
	s := parsed(t, strings.ReplaceAll(strings.Replace(benchSite, "mqtt://127.0.0.1:1883", "mqtt://"+road.Address(), 1), "value: /v,", "value: /v, max_age: 5 s,"))
	s.Timing.Beat, s.Timing.Commit = 200*time.Millisecond, time.Second // of the machine's clock
	now := hurried(3)
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
	defer plantOn(t, b.URL(), now)()
	current := func(v *view.Snapshot) *loads.Figure {
		f, _ := v.Current(0, now().UnixNano())
		return &f
	}
	awaitView(t, snapshots, "a duty", func(v *view.Snapshot) bool { f := current(v); return f.Measured() && f.Duty > 0 })
	road.Freeze(true)
	blind := awaitView(t, snapshots, "blindness", func(v *view.Snapshot) bool { return current(v).Fault == loads.Stale })
	road.Freeze(false)
	v := awaitView(t, snapshots, "sight again", func(v *view.Snapshot) bool {
		return current(v).Measured() && v.At > blind.At+20*sec && v.Loads[0].Booked.Measured > int64(15*time.Second)
	})
	if got := v.Loads[0].Booked; got.Missing > sec {
		t.Errorf("%v missing; the broker had kept everything", time.Duration(got.Missing))
	}
	if v.Broker.Losses != 0 || v.Tags[0].Late != 0 {
		t.Errorf("%d losses, %d readings late; want none", v.Broker.Losses, v.Tags[0].Late)
	}
	cancel()
	if err := <-ended; err != nil {
		t.Error(err)
	}
}
