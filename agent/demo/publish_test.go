package demo

import (
	"context"
	"encoding/json"
	"net"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

var morning = time.Date(2026, 3, 2, 5, 30, 0, 0, time.UTC)

// behind is a clock that began so long ago that elapsed has passed already.
func behind(elapsed time.Duration, speed float64) *Clock {
	c := NewClock(morning, speed)
	c.base = c.base.Add(-time.Duration(float64(elapsed) / speed))
	return c
}

// publish runs the publisher until the test has seen enough.
func publish(t *testing.T, b *Broker, clock *Clock, p *Plant) (stop func()) {
	t.Helper()
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan error, 1)
	go func() { done <- Publish(ctx, b.URL(), clock, p, Course{}) }()
	return func() {
		t.Helper()
		cancel()
		if err := <-done; err != nil {
			t.Errorf("being asked to stop: %v, want no error", err)
		}
	}
}

type message struct {
	V  *float64 `json:"v"`
	TS int64    `json:"ts"`
}

// Two hours and forty minutes of the plant, with the garbled and the silent
// transmitter, go through the broker to a reader that acknowledges nothing: all of
// it comes, in order, with the plant's stamps.
func TestAllIsDeliveredInOrder(t *testing.T) {
	const past = 2*time.Hour + 40*time.Minute
	s := creamery(t)
	p, b := newPlant(t, s, 7), startBroker(t)
	messages := subscribe(t, connect(t, b, "reader"), 40_000)
	clock := behind(past, 60)
	stop := publish(t, b, clock, p)
	var garbled, missing int
	for elapsed := time.Duration(0); elapsed <= past; elapsed += 5 * time.Second {
		for _, want := range samplesAt(t, p, elapsed) {
			if want.Condition == Silent {
				missing++
				continue
			}
			m := receive(t, messages)
			if want.Condition == Garbled {
				garbled++
			}
			checkMessage(t, m, s.Tags[want.Tag].Topic, want, morning.Add(elapsed).UnixMilli())
		}
		if t.Failed() {
			break
		}
	}
	stop()
	if garbled != 12 || missing != 72 {
		t.Errorf("%d garbled and %d missing messages, want 12 in a minute and 72 in six", garbled, missing)
	}
	if d := b.Dropped(); d != 0 {
		t.Errorf("%d messages dropped, want 0", d)
	}
}

func checkMessage(t *testing.T, m mqtt.Message, topic string, want Sample, stamp int64) {
	t.Helper()
	var got message
	err := json.Unmarshal(m.Payload(), &got)
	switch {
	case m.Topic() != topic || m.Qos() != 1:
		t.Errorf("%s with QoS %d, want %s with QoS 1", m.Topic(), m.Qos(), topic)
	case want.Condition == Garbled:
		if err == nil {
			t.Errorf("%s: %q, want garbage", topic, m.Payload())
		}
	case err != nil || got.V == nil || *got.V != want.Value || got.TS != stamp:
		t.Errorf("%s: %s, %v; want v %g and ts %d", topic, m.Payload(), err, want.Value, stamp)
	}
}

// The lead is sent at once, in its own steps, and the day goes on from it.
func TestLead(t *testing.T) {
	s := creamery(t)
	p, b := newPlant(t, s, 7), startBroker(t)
	messages := subscribe(t, connect(t, b, "reader"), 1000)
	clock := NewClock(morning, 1)
	course := Course{Phase: time.Hour, Lead: 12 * time.Second}
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan error, 1)
	go func() { done <- Publish(ctx, b.URL(), clock, p, course) }()
	for _, at := range []time.Duration{-10 * time.Second, -5 * time.Second, 0} {
		samples, err := p.At(course.Phase + at)
		if err != nil {
			t.Fatal(err)
		}
		for _, want := range samples {
			checkMessage(t, receive(t, messages), s.Tags[want.Tag].Topic, want, morning.Add(at).UnixMilli())
		}
	}
	cancel()
	if err := <-done; err != nil {
		t.Error(err)
	}
}

// A round falls due when the clock says so, no sooner.
func TestRoundsKeepToTheClock(t *testing.T) {
	s := creamery(t)
	p, b := newPlant(t, s, 7), startBroker(t)
	messages := subscribe(t, connect(t, b, "reader"), 1000)
	clock := NewClock(morning, 40)
	stop := publish(t, b, clock, p)
	for range 4 * len(s.Tags) {
		var got message
		if err := json.Unmarshal(receive(t, messages).Payload(), &got); err != nil {
			t.Fatal(err)
		}
		if now := clock.Now().UnixMilli(); got.TS > now {
			t.Errorf("stamp %d is ahead of the clock's %d", got.TS, now)
		}
	}
	stop()
	if e := clock.Elapsed(); e < 15*time.Second {
		t.Errorf("four rounds, 5 s apart, came within %v", e)
	}
}

func TestStep(t *testing.T) {
	p := newPlant(t, creamery(t), 7)
	for _, tt := range []struct {
		speed float64
		want  time.Duration
	}{
		{1, time.Second},
		{2, 5 * time.Second},
		{100, 5 * time.Second},
		{150, 7 * time.Second},
		{1440, 10 * time.Second}, // a third of the tags' max_age of 30 s
	} {
		if got := Step(tt.speed, p); got != tt.want {
			t.Errorf("speed %g: a round every %v, want %v", tt.speed, got, tt.want)
		}
	}
}

func TestNoBrokerIsAnError(t *testing.T) {
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	address := listener.Addr().String()
	if err := listener.Close(); err != nil {
		t.Fatal(err)
	}
	p := newPlant(t, creamery(t), 7)
	if err := Publish(t.Context(), "mqtt://"+address, NewClock(morning, 1), p, Course{}); err == nil {
		t.Error("publishing to nobody gave no error")
	}
}

func TestPayloads(t *testing.T) {
	tags := creamery(t).Tags
	at := time.UnixMilli(1_767_225_600_123)
	bare, nested := tags[0], tags[0]
	bare.Value, bare.Time = "", ""
	nested.Value, nested.Time = "/d/a~1b/v", "/d/t~0s"
	untimed := tags[0]
	untimed.Time = ""
	for _, tt := range []struct {
		name string
		got  []byte
		want string
	}{
		{"value and stamp", payload(&tags[0], Sample{Value: 130, Decimals: 2}, at), `{"ts":1767225600123,"v":130.00}`},
		{"bare number", payload(&bare, Sample{Value: -3.5, Decimals: 1}, at), `-3.5`},
		{"pointers with steps and escapes", payload(&nested, Sample{Value: 7, Decimals: 0}, at), `{"d":{"a/b":{"v":7},"t~s":1767225600123}}`},
		{"no stamp", payload(&untimed, Sample{Value: 1.25, Decimals: 3}, at), `{"v":1.250}`},
	} {
		if string(tt.got) != tt.want {
			t.Errorf("%s: %s, want %s", tt.name, tt.got, tt.want)
		}
	}
}
