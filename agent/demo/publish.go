package demo

import (
	"context"
	"fmt"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

const (
	// roundsApart is the least time by the system's clock between two bursts.
	roundsApart = 50 * time.Millisecond
	// answerWithin is how long the broker may take to acknowledge.
	answerWithin = 10 * time.Second
	// leadStep is the plant time between two rounds of the lead.
	leadStep = 5 * time.Second
)

// Course says how the plant's day lies against the clock.
type Course struct {
	Phase time.Duration // of the plant's day at the clock's start, since 05:30
	Lead  time.Duration // how long before the clock's start the plant is heard already
}

// Publish sends what the plant's transmitters say to the broker at url, with
// QoS 1, until ctx ends, which is no error. It begins with the lead of the course,
// in steps of [leadStep] and at once, as a broker does that kept it for a session;
// from the clock's start on it sends every [Step] of the clock. What fell due while
// it was held up is sent then, with the stamps it should have had.
func Publish(ctx context.Context, url string, clock *Clock, plant *Plant, course Course) error {
	c := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(url).SetClientID("invented-plant").SetConnectTimeout(answerWithin))
	if err := answer(ctx, c.Connect()); err != nil {
		return ended(ctx, fmt.Errorf("publish to %q: %w", url, err))
	}
	defer c.Disconnect(250)
	step := Step(clock.Speed(), plant)
	timer := time.NewTimer(0)
	defer timer.Stop()
	for next := -course.Lead.Truncate(leadStep); ; {
		select {
		case <-ctx.Done():
			return nil
		case <-timer.C:
		}
		for next <= clock.Elapsed() {
			if err := plant.round(ctx, c, clock.Start().Add(next), course.Phase+next); err != nil {
				return ended(ctx, fmt.Errorf("publish to %q: %w", url, err))
			}
			if next < 0 {
				next += leadStep
			} else {
				next += step
			}
		}
		timer.Reset(max(clock.Until(next), roundsApart))
	}
}

// Step is the plant time between two rounds: 1 s at the true speed; at a higher
// one 5 s, or more so that there are no more than 20 rounds in a second, but
// never so much that a tag's reading would run out of age.
func Step(speed float64, plant *Plant) time.Duration {
	if speed <= 1 {
		return time.Second
	}
	step := max(5*time.Second, time.Duration(speed*float64(roundsApart)))
	for _, t := range plant.site.Tags {
		step = min(step, t.MaxAge/3)
	}
	return max(step.Truncate(time.Second), time.Second)
}

// round publishes one sample of each transmitter, stamped at, and waits for the
// broker to have them all.
func (p *Plant) round(ctx context.Context, c mqtt.Client, at time.Time, elapsed time.Duration) error {
	samples, err := p.At(elapsed)
	if err != nil {
		return err
	}
	tokens := make([]mqtt.Token, 0, len(samples))
	for _, s := range samples {
		if s.Condition == Silent {
			continue
		}
		tag := &p.site.Tags[s.Tag]
		tokens = append(tokens, c.Publish(tag.Topic, 1, false, payload(tag, s, at)))
	}
	for _, token := range tokens {
		if err := answer(ctx, token); err != nil {
			return err
		}
	}
	return nil
}

// answer waits until the broker has answered.
func answer(ctx context.Context, token mqtt.Token) error {
	timer := time.NewTimer(answerWithin)
	defer timer.Stop()
	select {
	case <-token.Done():
		return token.Error()
	case <-ctx.Done():
		return ctx.Err()
	case <-timer.C:
		return fmt.Errorf("no answer for %v", answerWithin)
	}
}

// ended tells the end that was asked for from a failure.
func ended(ctx context.Context, err error) error {
	if ctx.Err() != nil {
		return nil
	}
	return err
}
