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
	// After is how far an earlier demo had come whose history goes on: what the
	// plant says is stamped later. Zero is for a new history.
	After time.Time
	Log   *slog.Logger // nil for none
}

// The demo opens with the plant at 06:40 of its own day: the morning ramp is just
// over, and what was said since 05:50 is there at once, so that means and verdicts
// stand from the first moment.
const (
	openingPhase = 70 * time.Minute
	openingLead  = 50 * time.Minute
)

// Demo is an invented plant with its broker.
type Demo struct {
	Site   *site.Site // the plant's site, with the address of the demo's broker
	Clock  *Clock     // the plant's time, which the agent must go by too
	Broker *Broker
	plant  *Plant
	course Course
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
	start, course := opening(o.After, time.Now())
	return &Demo{Site: s, Clock: NewClock(start, o.Speed), Broker: broker, plant: plant, course: course}, nil
}

// Run publishes what the plant's transmitters say until ctx ends, which is no
// error.
func (d *Demo) Run(ctx context.Context) error {
	if err := Publish(ctx, d.Broker.URL(), d.Clock, d.plant, d.course); err != nil {
		return err
	}
	if n := d.Broker.Dropped(); n > 0 {
		return fmt.Errorf("the demo's broker has dropped %d messages: the agent was too slow for this speed", n)
	}
	return nil
}

// Duty is what a load of the plant truly moves at an instant of its clock, in W,
// positive in the load's service.
func (d *Demo) Duty(load string, at time.Time) (float64, error) {
	return d.plant.Duty(load, d.course.Phase+at.Sub(d.Clock.Start()))
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

// opening returns when the plant's clock starts: now, or where an earlier demo that
// ran faster has come; and the course, whose lead does not reach back into it.
func opening(after, now time.Time) (start time.Time, c Course) {
	if start = now; after.After(now) {
		start = after
	}
	return start, Course{Phase: openingPhase, Lead: min(openingLead, start.Sub(after))}
}
