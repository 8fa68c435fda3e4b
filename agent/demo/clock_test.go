package demo

import (
	"testing"
	"testing/synctest"
	"time"
)

func TestClockRunsFaster(t *testing.T) {
	start := time.Date(2026, 3, 29, 5, 30, 0, 0, time.UTC)
	for _, tt := range []struct {
		speed        float64
		system, want time.Duration
	}{
		{1, time.Hour, time.Hour},
		{60, time.Minute, time.Hour},
		{0.5, 10 * time.Second, 5 * time.Second},
		{1440, time.Minute, 24 * time.Hour},
	} {
		synctest.Test(t, func(t *testing.T) {
			c := NewClock(start, tt.speed)
			if got := c.Now(); !got.Equal(start) {
				t.Errorf("speed %g: begins at %v, want %v", tt.speed, got, start)
			}
			if got := c.Until(tt.want); got != tt.system {
				t.Errorf("speed %g: %v to wait for %v, want %v", tt.speed, got, tt.want, tt.system)
			}
			<-time.After(tt.system)
			if got := c.Now().Sub(start); got != tt.want {
				t.Errorf("speed %g: %v after %v, want %v", tt.speed, got, tt.system, tt.want)
			}
			if got := c.Until(tt.want); got != 0 {
				t.Errorf("speed %g: %v still to wait, want 0", tt.speed, got)
			}
		})
	}
}
