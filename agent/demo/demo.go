package demo

import (
	"context"
	"fmt"
	"log/slog"
	"time"

	"heatreeve/agent/site"
	"heatreeve/configs"
)

// MaxSpeed is a day in a minute.
const MaxSpeed = 1440

// Options choose how the demo runs; the zero value is the true speed.
type Options struct {
	Speed float64 // plant seconds a second, 1 to MaxSpeed; 0 is 1
	Seed  uint64  // of the transmitters' noise
	// After is the instant that the plant's clock begins after: at the next 05:30
	// in the site's zone. Give the end of an earlier demo whose history goes on.
	// Zero is the midnight that today began with.
	After time.Time
	Log   *slog.Logger // nil for none
}

// Demo is an invented plant with its broker.
type Demo struct {
	Site   *site.Site // the plant's site, with the address of the demo's broker
	Clock  *Clock     // the plant's time, which the agent must go by too
	Broker *Broker
	plant  *Plant
}

// Start starts the broker and the plant's clock. Nothing is published before
// [Demo.Run]. [Demo.Close] must be called in the end.
func Start(o Options) (*Demo, error) {
	if o.Speed == 0 {
		o.Speed = 1
	}
	if !(o.Speed >= 1 && o.Speed <= MaxSpeed) {
		return nil, fmt.Errorf("speed %g: allowed are 1 to %d times the true speed", o.Speed, MaxSpeed)
	}
	if o.Log == nil {
		o.Log = slog.New(slog.DiscardHandler)
	}
	s, err := site.Parse(configs.DemoName, configs.Demo)
	if err != nil {
		return nil, err
	}
	plant, err := NewPlant(s, o.Seed)
	if err != nil {
		return nil, err
	}
	broker, err := StartBroker(o.Log)
	if err != nil {
		return nil, err
	}
	s.Broker.URL = broker.URL()
	s.Timing = hastened(s.Timing, o.Speed)
	return &Demo{Site: s, Clock: NewClock(morningAfter(o.After, s.Zone), o.Speed), Broker: broker, plant: plant}, nil
}

// Run publishes what the plant's transmitters say until ctx ends, which is no
// error.
func (d *Demo) Run(ctx context.Context) error {
	if err := Publish(ctx, d.Broker.URL(), d.Clock, d.plant); err != nil {
		return err
	}
	if n := d.Broker.Dropped(); n > 0 {
		return fmt.Errorf("the demo's broker has dropped %d messages: the agent was too slow for this speed", n)
	}
	return nil
}

// Close ends the broker, and with it all connections. It may be called twice.
func (d *Demo) Close() error { return d.Broker.Close() }

// hastened suits the agent's timing, whose beat and commits keep to the system's
// clock, to a plant that runs faster: a beat at least each 10 s of the plant's
// time where 20 a second allow it, commits as often, down to one a second, and a
// lateness of a second by the system's clock, for a message may take that long.
func hastened(t site.Timing, speed float64) site.Timing {
	if speed <= 1 {
		return t
	}
	by := func(d time.Duration) time.Duration { return time.Duration(float64(d) / speed) }
	t.Beat = min(t.Beat, max(50*time.Millisecond, by(10*time.Second)))
	t.Commit = min(t.Commit, max(time.Second, by(t.Commit)))
	t.Lateness = max(t.Lateness, time.Duration(speed*float64(time.Second)))
	return t
}

// morningAfter is the first 05:30 in the zone after an instant.
func morningAfter(after time.Time, zone *time.Location) time.Time {
	if after.IsZero() {
		y, m, d := time.Now().In(zone).Date()
		return time.Date(y, m, d, 5, 30, 0, 0, zone)
	}
	y, m, d := after.In(zone).Date()
	morning := time.Date(y, m, d, 5, 30, 0, 0, zone)
	if !morning.After(after) {
		morning = time.Date(y, m, d+1, 5, 30, 0, 0, zone)
	}
	return morning
}
