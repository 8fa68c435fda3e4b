package design

import (
	"math/rand/v2"
	"testing"
)

// A load that drifts within its allowance is warned of, since about when it began; the warning
// outlasts a night without flow, ends with a day of rest, and does not flutter while it rests.
func TestDriftIsWarnedOfThroughNights(t *testing.T) {
	noise := rand.New(rand.NewPCG(7, 7))
	j := NewJudge(target)
	at := int64(0)
	var told []Warning
	run := func(minutes int, kW float64) {
		for range minutes {
			m := Minute{Start: at, Whole: true, Duty: (kW + noise.NormFloat64()) * 1e3, Uncertainty: 3e3, Random: 1e6}
			if kW == 0 {
				m = Minute{Start: at, Idle: true}
			}
			observe(j, m)
			at += nanosecondsPerMinute
		}
		told = j.take(told)
	}
	run(3*dayOfMinutes, 640)
	if len(told) > 0 {
		t.Fatalf("warnings of a load that does what is expected: %+v", told)
	}
	run(dayOfMinutes/2, 615) // 4 % low, of 8 % allowed
	if len(told) != 1 || told[0].Kind != WarnDrifting || told[0].End != 0 || !(told[0].Now < -0.03) {
		t.Fatalf("warnings of a drift: %+v", told)
	}
	if since := told[0].Since; since < 3*nanosecondsPerDay-nanosecondsPerMinute*60 || since > told[0].Begin {
		t.Errorf("since %d, begun on day 3", since/nanosecondsPerMinute)
	}
	run(dayOfMinutes/3, 0)
	run(60, 615)
	if len(told) != 1 {
		t.Errorf("warnings after a night: %+v", told)
	}
	run(2*dayOfMinutes, 0)
	if len(told) != 2 || told[1].End == 0 {
		t.Errorf("warnings after two days of rest: %+v", told)
	}
	run(dayOfMinutes, 640)
	for _, w := range told[2:] {
		if w.Begin > at-nanosecondsPerDay/2 {
			t.Errorf("warned of what has come back: %+v", w)
		}
	}
}
