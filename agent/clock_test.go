package agent

import (
	"log/slog"
	"path/filepath"
	"testing"
	"testing/synctest"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/ingest"
	"heatreeve/store"
)

// machine is a computer whose clock can be set.
type machine struct {
	*stepless
	passed time.Duration
	offset time.Duration
}

// newMachine returns one that has been on for a while.
func newMachine() *machine {
	m := justOn()
	m.pass(settling)
	return m
}

func justOn() *machine {
	m := new(machine)
	m.stepless = newStepless(func() time.Time { return clock.Add(m.passed + m.offset) }, func() time.Duration { return m.passed }, slog.New(slog.DiscardHandler))
	return m
}

func (m *machine) pass(d time.Duration) time.Duration {
	m.passed += d
	return m.Now().Sub(clock)
}

func TestClockFollowsSmallCorrections(t *testing.T) {
	m := newMachine()
	for range 100 {
		m.offset += 400 * time.Millisecond
		if got := m.pass(time.Second); got != m.passed+m.offset {
			t.Fatalf("shows %v after %v, want %v", got, m.passed, m.passed+m.offset)
		}
	}
	if steps, shifted := m.state(); steps != 0 || shifted != 0 {
		t.Errorf("%d steps by %v, want none", steps, shifted)
	}
}

// A setting by years, or back by hours, that is mended within minutes moves nothing.
func TestMendedSettingMovesNothing(t *testing.T) {
	for _, by := range []time.Duration{10 * 8766 * time.Hour, -2 * time.Hour, time.Minute} {
		m := newMachine()
		m.pass(time.Minute)
		m.offset = by
		for range 299 {
			if got := m.pass(time.Second); got != m.passed {
				t.Fatalf("set by %v: shows %v after %v", by, got, m.passed)
			}
		}
		m.offset = 0
		for range 1000 {
			if got := m.pass(time.Second); got != m.passed {
				t.Fatalf("set by %v and back: shows %v after %v", by, got, m.passed)
			}
		}
		if steps, shifted := m.state(); steps != 1 || shifted != 0 {
			t.Errorf("set by %v: %d steps, %v followed; want 1, and none", by, steps, shifted)
		}
	}
}

func TestLastingSettingIsFollowed(t *testing.T) {
	for _, by := range []time.Duration{3 * time.Hour, -2 * time.Hour} {
		m := newMachine()
		m.offset = by
		first, begun := time.Duration(0), m.passed
		for range 400 {
			if got := m.pass(time.Second); got == m.passed+by && first == 0 {
				first = m.passed - begun
			}
		}
		if first != time.Second+believeAfter {
			t.Errorf("set by %v: followed after %v, want %v", by, first, believeAfter)
		}
		if steps, shifted := m.state(); steps != 1 || shifted != by {
			t.Errorf("set by %v: %d steps, %v followed", by, steps, shifted)
		}
	}
}

// A box that keeps no time while it is off has the right time soon after its start.
func TestFirstSettingIsFollowedAtOnce(t *testing.T) {
	m := justOn()
	m.pass(20 * time.Second)
	m.offset = 50 * 8766 * time.Hour
	if got := m.pass(time.Second); got != m.passed+m.offset {
		t.Errorf("shows %v after %v, want %v", got, m.passed, m.passed+m.offset)
	}
	if steps, shifted := m.state(); steps != 1 || shifted != m.offset {
		t.Errorf("%d steps, %v followed; want 1 and %v", steps, shifted, m.offset)
	}
}

// A clock that is set again while it is not yet believed must stand anew.
func TestEachSettingMustStand(t *testing.T) {
	m := newMachine()
	m.offset = time.Hour
	m.pass(4 * time.Minute)
	m.pass(time.Second)
	m.offset = 2 * time.Hour
	m.pass(time.Second)
	if got := m.pass(4 * time.Minute); got != m.passed {
		t.Errorf("shows %v after %v: followed too soon", got, m.passed)
	}
	if steps, _ := m.state(); steps != 2 {
		t.Errorf("%d steps, want 2", steps)
	}
}

// A silence is measured by the time that passes: a clock that is set in it moves event
// time by nothing.
func TestSettingTheClockIsNoSilence(t *testing.T) {
	for _, by := range []time.Duration{1000 * time.Hour, -time.Hour} {
		m := newMachine()
		p := newPace(make([]int, 1), 5*time.Second, 10*time.Second, true)
		start := m.Now()
		p.reading(0, start.UnixNano(), true, true, start)
		p.advance(start, standing{true, false})
		m.pass(10 * time.Second)
		p.advance(m.Now(), standing{true, false})
		for range 5 {
			m.pass(time.Second)
			p.advance(m.Now(), standing{true, false})
		}
		if want := start.Add(10 * time.Second).UnixNano(); p.through != want { // 15 s of silence, less the lateness
			t.Fatalf("through %v before the setting, want %v", time.Unix(0, p.through), time.Unix(0, want))
		}
		m.offset = by
		before, steps := time.Duration(0), 0
		for range 400 {
			m.pass(time.Second)
			now := m.Now()
			if _, shifted := m.state(); shifted != before {
				p.shift(shifted - before)
				before, steps = shifted, steps+1
			}
			p.advance(now, standing{true, false})
		}
		want := start.Add(m.passed - settling - 5*time.Second).UnixNano()
		if by < 0 { // it waits, once the setting is followed, for the clock to come where it was
			want = start.Add(15*time.Second + believeAfter - 5*time.Second).UnixNano()
		}
		if steps != 1 || p.through != want {
			t.Errorf("set by %v: through %v, want %v; followed %d times", by, time.Unix(0, p.through).UTC(), time.Unix(0, want).UTC(), steps)
		}
	}
}

const bareSite = `
site: Bare
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
tags:
  TI: {topic: a, unit: °C, accuracy: IEC 60751 A}
  TO: {topic: b, unit: °C, accuracy: IEC 60751 A}
  FT: {topic: c, unit: kg/s, accuracy: 0.5 % of reading}
loads:
  main:
    stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 3 barg, gives: heat}
`

// bare runs a plant without stamps for so many seconds on the machine; before each
// second what happens to its clock is asked.
func bare(t *testing.T, m *machine, seconds int, before func(second int)) loads.Totals {
	t.Helper()
	site := parsed(t, bareSite)
	l, shut := open(t, site, filepath.Join(t.TempDir(), "h.db"), store.Options{})
	defer shut()
	p := newPace(make([]int, 3), 5*time.Second, 10*time.Second, hasStamps(site))
	var followed time.Duration
	for s := range seconds {
		before(s)
		m.pass(time.Second)
		now := m.Now()
		if _, shifted := m.state(); shifted != followed {
			p.shift(shifted - followed)
			followed = shifted
		}
		in := make([]ingest.Reading, 3)
		for i, v := range []float64{350, 330, 2} {
			in[i] = ingest.Reading{Tag: i, At: now.UnixNano(), Value: v}
			p.reading(i, now.UnixNano(), false, true, now)
		}
		l.beat(in, p.advance(now, standing{true, false}))
	}
	return l.registers()[0]
}

// What a clock that was set does to the accounts of tags without stamps, over half an
// hour of steady flow.
func TestAccountsAcrossASetClock(t *testing.T) {
	const seconds = 1800
	calm := bare(t, newMachine(), seconds, func(int) {})
	if calm.Measured < (seconds-10)*sec || calm.Missing != 0 {
		t.Fatalf("undisturbed: %+v", calm)
	}
	for _, tt := range []struct {
		name             string
		by               time.Duration
		mended           int           // second; 0: never
		measured         time.Duration // less than undisturbed, at most
		missing, atLeast time.Duration
	}{
		{"ten years ahead, mended", 10 * 8766 * time.Hour, 500, 0, 0, 0},
		{"two hours back, mended", -2 * time.Hour, 500, 0, 0, 0},
		{"three hours ahead", 3 * time.Hour, 0, time.Minute, 3 * time.Hour, 3*time.Hour - 2*time.Minute},
		{"ten years ahead", 10 * 8766 * time.Hour, 0, 2 * time.Minute, firstReach + time.Minute, firstReach - 2*time.Minute},
		{"ten minutes back", -10 * time.Minute, 0, 10*time.Minute + time.Minute, 0, 0},
	} {
		t.Run(tt.name, func(t *testing.T) {
			m := newMachine()
			got := bare(t, m, seconds, func(s int) {
				switch s {
				case 400:
					m.offset = tt.by
				case tt.mended:
					m.offset = 0
				}
			})
			if lacks := time.Duration(calm.Measured - got.Measured); lacks > tt.measured || lacks < -time.Minute {
				t.Errorf("measured %v less than undisturbed, want at most %v", lacks, tt.measured)
			}
			if got.Missing > int64(tt.missing) || got.Missing < int64(tt.atLeast) {
				t.Errorf("missing %v, want %v to %v", time.Duration(got.Missing), tt.atLeast, tt.missing)
			}
			if tt.mended > 0 && got != calm {
				t.Errorf("registers %+v, undisturbed %+v", got, calm)
			}
		})
	}
}

// A year and more without a beat is not booked as missing, and a restart that puts
// the same beats through comes to the same.
func TestYearsAreNotBooked(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	s := parsed(t, benchSite)
	l, shut := open(t, s, path, store.Options{})
	feed(l, 0, 100)
	before := l.registers()[0]
	later := int64(20 * 8766 * 3600)
	feed(l, later, later+100)
	got := l.registers()[0]
	if missing := time.Duration(got.Missing - before.Missing); missing > firstReach+time.Minute || missing < firstReach-time.Minute {
		t.Errorf("missing %v, want about the last %v before the readings came back", missing, firstReach)
	}
	if more := got.Measured - before.Measured; more < 90*sec {
		t.Errorf("measured %d s after the years, want about 95", more/sec)
	}
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	shut() // without a checkpoint, as after a kill
	l, shut = open(t, s, path, store.Options{})
	defer shut()
	if again := l.registers()[0]; again != got {
		t.Errorf("registers %+v after a restart, want %+v", again, got)
	}
}

// The start waits for a clock that is behind the history, ten minutes at most, and
// not where it has been set.
func TestStartWaitsForTheClock(t *testing.T) {
	for _, tt := range []struct {
		name        string
		behind, set time.Duration // at the start; after how long it is set
		want        time.Duration
	}{
		{"never off", 0, 0, 0},
		{"no more than a stamp may be ahead", 30 * time.Second, time.Hour, 0},
		{"off for a day, set after a while", 24 * time.Hour, 40 * time.Second, 40 * time.Second},
		{"a history from the future", 24 * time.Hour, 23 * time.Hour, clockWait},
		{"as far behind as will have passed", 2 * time.Minute, time.Hour, 90 * time.Second},
	} {
		t.Run(tt.name, func(t *testing.T) {
			synctest.Test(t, func(t *testing.T) {
				start := time.Now()
				now := func() time.Time {
					if time.Since(start) < tt.set {
						return time.Now().Add(-tt.behind)
					}
					return time.Now()
				}
				a := &Agent{site: parsed(t, benchSite), o: Options{Now: now, Log: slog.New(slog.DiscardHandler)}}
				a.awaitClock(t.Context(), start.UnixNano())
				if got := time.Since(start); got != tt.want {
					t.Errorf("waited %v, want %v", got, tt.want)
				}
			})
		})
	}
}

// A machine that slept shows the right time when it wakes: nobody has set its clock.
func TestSleepIsNoSetting(t *testing.T) {
	m := newMachine()
	before := m.Now()
	m.pass(settling + 8*time.Hour) // both clocks go on in a sleep
	if got := m.Now().Sub(before); got != settling+8*time.Hour {
		t.Errorf("%v have passed, want all", got)
	}
	if steps, _ := m.state(); steps != 0 {
		t.Errorf("%d steps, want none", steps)
	}
}

// The machine's own clock of what has elapsed goes with time, and never back.
func TestElapsed(t *testing.T) {
	clock := elapsed()
	begun, last := time.Now(), clock()
	first := last
	for time.Since(begun) < 20*time.Millisecond {
		now := clock()
		if now < last {
			t.Fatalf("%v after %v", now, last)
		}
		last = now
	}
	if got := last - first; got < 19*time.Millisecond || got > 10*time.Second {
		t.Errorf("%v elapsed in about 20 ms", got)
	}
}
