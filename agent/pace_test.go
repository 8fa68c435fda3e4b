package agent

import (
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/ingest"
	"heatreeve/store"
)

const sec = int64(time.Second)

func wall(ns int64) time.Time { return time.Unix(0, ns) }

func TestPaceFollowsTheStamps(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1000*sec, true, true, wall(1001*sec))
	if got := p.advance(wall(1001*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s, want 995", got/sec)
	}
	p.reading(0, 990*sec, true, true, wall(1002*sec))
	if got := p.advance(wall(1002*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s after an older stamp, want 995", got/sec)
	}
}

func TestPaceIsNotLedByAFastClock(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1025*sec, true, true, wall(1000*sec))
	if got := p.advance(wall(1000*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s, want 995: our own clock bounds it", got/sec)
	}
}

func TestPaceIsNotLedByArrivalsWhereSomeAreStamped(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 500*sec, true, true, wall(1000*sec))   // the broker's backlog
	p.reading(0, 1000*sec, false, true, wall(1000*sec)) // a bare number among it
	if got := p.advance(wall(1000*sec), standing{true, false}); got != 495*sec {
		t.Errorf("through %d s, want 495", got/sec)
	}
}

func TestSilenceIsTimedByTheClockOnlyWhileConnected(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1000*sec, true, true, wall(1000*sec))
	p.advance(wall(1000*sec), standing{true, false})
	if got := p.advance(wall(1014*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s after 14 s of silence, want 995", got/sec)
	}
	if got := p.advance(wall(1015*sec), standing{true, false}); got != 1010*sec {
		t.Errorf("through %d s after 15 s of silence, want 1010", got/sec)
	}
	p.advance(wall(1016*sec), standing{false, false})
	if got := p.advance(wall(2000*sec), standing{false, false}); got != 1010*sec {
		t.Errorf("through %d s while the broker is away, want 1010", got/sec)
	}
	if got := p.advance(wall(2001*sec), standing{true, false}); got != 1010*sec {
		t.Errorf("through %d s just after the broker is back, want 1010", got/sec)
	}
	if got := p.advance(wall(2016*sec), standing{true, false}); got != 2011*sec {
		t.Errorf("through %d s after 15 s of silence again, want 2011", got/sec)
	}
}

func TestWaitingMessagesAreNoSilence(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1000*sec, true, true, wall(1000*sec))
	for s := int64(1000); s < 1100; s++ {
		p.advance(wall(s*sec), standing{true, true})
	}
	if p.through != 995*sec {
		t.Errorf("through %d s while messages wait for the disk, want 995", p.through/sec)
	}
	for s := int64(1100); s < 1400; s++ {
		p.advance(wall(s*sec), standing{true, true})
	}
	if p.through != 1394*sec {
		t.Errorf("through %d s after minutes of waiting in vain, want 1394", p.through/sec)
	}
}

// Stamps two minutes behind our clock stay in time through a silence.
func TestSlowClocksAreNotLateAfterASilence(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	for s := int64(1000); s <= 1060; s += 10 {
		p.reading(0, (s-120)*sec, true, true, wall(s*sec))
		p.advance(wall(s*sec), standing{true, false})
	}
	for s := int64(1061); s <= 1100; s++ {
		p.advance(wall(s*sec), standing{true, false})
	}
	if want := (1100 - 120 - 5) * sec; p.through != want {
		t.Errorf("through %d s after a silence, want %d: the stamps lag 120 s", p.through/sec, want/sec)
	}
}

// What the broker kept lags far, but what follows it does not: the least counts.
func TestBacklogIsNoSlowClock(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	for s := int64(0); s <= 1000; s += 10 {
		p.reading(0, s*sec, true, true, wall(1001*sec))
	}
	p.advance(wall(1001*sec), standing{true, false})
	if got := p.advance(wall(1016*sec), standing{true, false}); got != 1010*sec {
		t.Errorf("through %d s, want 1010: the newest stamp lags 1 s", got/sec)
	}
}

// A publisher whose clock is mended, or grows slow, is followed within two spans.
func TestLagIsForgotten(t *testing.T) {
	var l lag
	l.note(0, wall(1*sec))
	l.note(90*sec, wall(2*sec))
	if l.least() != 0 {
		t.Errorf("least lag %d s, want 0", l.least()/sec)
	}
	l.note(90*sec, wall(700*sec))
	l.note(90*sec, wall(1400*sec))
	if l.least() != 90*sec {
		t.Errorf("least lag %d s two spans later, want 90", l.least()/sec)
	}
}

// A bare number keeps coming while the stamped publisher is dead: time goes on by
// the clock all the same.
func TestBareNumbersDoNotHideASilence(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1000*sec, true, true, wall(1000*sec))
	for s := int64(1001); s <= 1100; s++ {
		p.reading(0, s*sec, false, true, wall(s*sec))
		p.advance(wall(s*sec), standing{true, false})
	}
	if p.through != 1095*sec {
		t.Errorf("through %d s, want 1095", p.through/sec)
	}
}

// A live message without delivery guarantee, or a retained one, overtakes what the
// broker kept, and must not make it late.
func TestWhatOvertakesDoesNotLead(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.reading(0, 1000*sec, true, false, wall(1000*sec))
	p.reading(0, 400*sec, true, true, wall(1000*sec))
	if got := p.advance(wall(1000*sec), standing{true, false}); got != 395*sec {
		t.Errorf("through %d s, want 395: the backlog leads", got/sec)
	}
}

// Where nothing else comes, such messages do not stop time.
func TestOnlyWithoutGuarantee(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	for s := int64(1000); s <= 1100; s++ {
		p.reading(0, (s-30)*sec, true, false, wall(s*sec))
		p.advance(wall(s*sec), standing{true, false})
	}
	if want := (1100 - 30 - 5) * sec; p.through != want {
		t.Errorf("through %d s, want %d: by the clock, set back by the lag", p.through/sec, want/sec)
	}
}

// Two stray stamps of 2000, one a beat, then real ones: event time begins a day back
// at most.
func TestStrayStampsDoNotBeginIn2000(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	now := int64(1_700_000_000) * sec
	for s := range int64(2) {
		p.reading(0, (946_684_800+10*s)*sec, true, true, wall(now+s*sec))
		if got, least := p.advance(wall(now+s*sec), standing{true, false}), now-int64(firstReach)-6*sec; got < least {
			t.Errorf("through %d s, want at least %d", got/sec, least/sec)
		}
	}
}

// A commit interval longer than the usual quiet lengthens it: a broker may wait that
// long for an acknowledgement.
func TestQuietIsLongerThanACommit(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, time.Minute, true)
	p.reading(0, 1000*sec, true, true, wall(1000*sec))
	p.advance(wall(1000*sec), standing{true, false})
	if got := p.advance(wall(1064*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s after 64 s of silence, want 995", got/sec)
	}
	if got := p.advance(wall(1065*sec), standing{true, false}); got != 1060*sec {
		t.Errorf("through %d s after 65 s of silence, want 1060", got/sec)
	}
}

// What the broker kept comes one tag after the other: the first does not make the
// second late.
func TestBacklogTagByTag(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.last[0], p.last[1] = 400*sec, 400*sec // as an earlier run left them
	p.through = 395 * sec
	p.advance(wall(1000*sec), standing{true, false})
	for s := int64(400); s <= 1000; s += 10 {
		p.reading(0, s*sec, true, true, wall(1001*sec))
	}
	if got := p.advance(wall(1001*sec), standing{true, false}); got != 395*sec {
		t.Errorf("through %d s after the first tag, want 395", got/sec)
	}
	for s := int64(400); s <= 1000; s += 10 {
		p.reading(1, s*sec, true, true, wall(1002*sec))
	}
	if got := p.advance(wall(1002*sec), standing{true, false}); got != 995*sec {
		t.Errorf("through %d s after both, want 995", got/sec)
	}
}

// A tag that is dead holds event time back for that while only.
func TestDeadTagHoldsBackForAWhileOnly(t *testing.T) {
	p := newPace(make([]int, 2), 5*time.Second, 10*time.Second, true)
	p.last[1] = 400 * sec
	p.advance(wall(1000*sec), standing{true, false})
	for s := int64(1001); s <= 1020; s++ {
		p.reading(0, s*sec, true, true, wall(s*sec))
		p.advance(wall(s*sec), standing{true, false})
	}
	if p.through != 1015*sec {
		t.Errorf("through %d s, want 1015", p.through/sec)
	}
}

// What a broker kept for half a day comes within seconds, while a tag that has spoken once holds
// event time back: the others' readings are booked rather than refused for want of room.
func TestLongBacklogIsBooked(t *testing.T) {
	const hours = 12
	s := parsed(t, strings.Replace(benchSite, "tags:\n", "tags:\n  QT: {topic: q, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}\n", 1))
	l, shut := open(t, s, filepath.Join(t.TempDir(), "history.db"), store.Options{})
	defer shut()
	now := clock.Add(hours * time.Hour)
	r := &rhythm{books: l, pace: newPace(brokerOf(s), s.Timing.Lateness, s.Timing.Commit, true)}
	r.standings = []standing{{connected: true}}
	f := &intake{tags: []int{0, 1, 2, 3}}
	r.pace.advance(now, standing{true, false})
	values := map[string]float64{"TI": 353.15, "TO": 333.15, "FT": 2, "QT": 293.15}
	var all []ingest.Received
	for at := clock; at.Before(now); at = at.Add(5 * time.Second) {
		for i, tag := range s.Tags {
			if tag.Name != "QT" || at.Equal(clock) {
				all = append(all, ingest.Received{Reading: ingest.Reading{Tag: i, At: at.UnixNano(), Value: values[tag.Name], Stamped: true, InOrder: true}})
			}
		}
	}
	for piece := range slices.Chunk(all, pieceReadings) {
		r.account(f, piece, now)
	}
	for _, tag := range l.accounts.engine.Snapshot().Tags {
		if tag.Tally != (loads.Tally{}) {
			t.Errorf("tally of a tag: %+v", tag.Tally)
		}
	}
	r.account(f, nil, now.Add(r.pace.sources[0].quiet))
	got := l.accounts.engine.Snapshot().Loads[0].Totals
	if want := hours*time.Hour - 10*time.Second; got.Measured < int64(want) || got.Missing > int64(time.Second) {
		t.Errorf("measured %v, missing %v of %v", time.Duration(got.Measured), time.Duration(got.Missing), hours*time.Hour)
	}
}
