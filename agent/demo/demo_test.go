package demo

import (
	"context"
	"math"
	"reflect"
	"testing"
	"time"

	"heatreeve/agent/site"
)

func TestDemoPublishes(t *testing.T) {
	after := time.Now().Add(time.Hour)
	d, err := Start(Options{Speed: 60, Seed: 3, After: after})
	if err != nil {
		t.Fatal(err)
	}
	defer func() {
		if err := d.Close(); err != nil {
			t.Error(err)
		}
	}()
	if d.Site.Broker.URL != d.Broker.URL() {
		t.Errorf("the site's broker is at %q, want %q", d.Site.Broker.URL, d.Broker.URL())
	}
	if !d.Clock.Start().Equal(after) {
		t.Errorf("the clock begins at %v, want %v", d.Clock.Start(), after)
	}
	messages := subscribe(t, connect(t, d.Broker, "reader"), 1000)
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan error, 1)
	go func() { done <- d.Run(ctx) }()
	seen := map[string]bool{}
	for range d.Site.Tags {
		seen[receive(t, messages).Topic()] = true
	}
	cancel()
	if err := <-done; err != nil {
		t.Errorf("being asked to stop: %v, want no error", err)
	}
	for _, tag := range d.Site.Tags {
		if !seen[tag.Topic] {
			t.Errorf("nothing came on %q", tag.Topic)
		}
	}
}

func TestWrongSpeedsAreRefused(t *testing.T) {
	for _, speed := range []float64{-1, 0.5, MaxSpeed + 1, math.NaN()} {
		if d, err := Start(Options{Speed: speed}); err == nil {
			t.Errorf("speed %g: no error", speed)
			_ = d.Close()
		}
	}
}

func TestTimingFollowsTheSpeed(t *testing.T) {
	own := creamery(t).Timing
	if got := hastened(own, 1); !reflect.DeepEqual(got, own) {
		t.Errorf("speed 1: %+v, want the site's own %+v", got, own)
	}
	for _, tt := range []struct {
		speed                  float64
		beat, lateness, commit time.Duration
	}{
		{2, time.Second, 5 * time.Second, 5 * time.Second},
		{60, 166666666, time.Minute, time.Second},
		{1440, 50 * time.Millisecond, 24 * time.Minute, time.Second},
	} {
		want := site.Timing{Grid: own.Grid, Ahead: own.Ahead, Beat: tt.beat, Lateness: tt.lateness, Commit: tt.commit}
		if got := hastened(own, tt.speed); got != want {
			t.Errorf("speed %g: %+v, want %+v", tt.speed, got, want)
		}
	}
}

func TestOpening(t *testing.T) {
	now := time.Date(2026, 3, 2, 12, 0, 0, 0, time.UTC)
	for _, tt := range []struct {
		name         string
		after, start time.Time
		lead         time.Duration
	}{
		{"a new history", time.Time{}, now, openingLead},
		{"one of yesterday", now.Add(-24 * time.Hour), now, openingLead},
		{"one that ended ten minutes ago", now.Add(-10 * time.Minute), now, 10 * time.Minute},
		{"one that ran ahead of the clock", now.Add(5 * time.Hour), now.Add(5 * time.Hour), 0},
	} {
		start, course := opening(tt.after, now)
		if !start.Equal(tt.start) || course != (Course{openingPhase, tt.lead}) {
			t.Errorf("%s: starts at %v with %+v, want %v with a lead of %v", tt.name, start, course, tt.start, tt.lead)
		}
	}
}
