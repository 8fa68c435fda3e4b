package agent

import (
	"fmt"
	"log/slog"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/store"
)

const benchSite = `
site: Bench
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
tags:
  TI: {topic: a, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  TO: {topic: b, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  FT: {topic: c, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading}
loads:
  main:
    stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 3 barg, gives: heat}
    design: {duty: 193 kW, allow: 8 %, lasting: 2 min}
`

const annex = `
  annex:
    stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 3 barg, gives: heat}
`

func parsed(t *testing.T, text string) *site.Site {
	t.Helper()
	s, err := site.Parse("bench.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

var clock = time.Unix(1_700_000_040, 0)

// open returns a ledger on the history at path; close is called before the next.
func open(t *testing.T, s *site.Site, path string, o store.Options) (l *ledger, shut func()) {
	t.Helper()
	db, err := store.Open(path, o)
	if err != nil {
		t.Fatal(err)
	}
	l, err = openLedger(s, db, Options{Log: slog.New(slog.DiscardHandler)}, clock)
	if err != nil {
		t.Fatal(err)
	}
	return l, func() {
		if err := db.Close(); err != nil {
			t.Fatal(err)
		}
	}
}

// feed puts one beat a second through, with readings each ten seconds.
func feed(l *ledger, from, until int64) {
	for s := from; s < until; s++ {
		at := clock.UnixNano() + s*sec
		var in []ingest.Reading
		if s%10 == 0 {
			in = []ingest.Reading{
				{Tag: 0, At: at, Value: 350 + float64(s%7), Stamped: true},
				{Tag: 1, At: at, Value: 330, Stamped: true},
				{Tag: 2, At: at, Value: 2, Stamped: true},
			}
		}
		l.beat(in, at-5*sec)
	}
}

// minutesOf commits what waits, and returns the minutes that the history has of the first load.
func minutesOf(t *testing.T, l *ledger) (all []store.Minute) {
	t.Helper()
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	for m, err := range l.store.Minutes(l.loadIDs[0], math.MinInt64, math.MaxInt64) {
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, m)
	}
	return all
}

// A run that is cut off after any commit goes on to the same totals, the same verdict and the
// same minutes, with what was expected of each, as one that was not.
func TestLedgerAfterACut(t *testing.T) {
	s := parsed(t, benchSite)
	whole, shut := open(t, s, filepath.Join(t.TempDir(), "h.db"), store.Options{})
	feed(whole, 0, 600)
	want, verdict := whole.registers(), whole.accounts.verdicts.Verdict(0, false, false)
	minutes := minutesOf(t, whole)
	shut()
	if len(minutes) != 9 || minutes[8].Expected != 193e3 {
		t.Fatalf("%d minutes, the last is %+v, want 9 of which 193 kW were expected", len(minutes), minutes[len(minutes)-1])
	}
	if verdict != design.Holding || want[0].Given == 0 {
		t.Fatalf("verdict %v, given %g J: the course does not show anything", verdict, want[0].Given)
	}

	path := filepath.Join(t.TempDir(), "h.db")
	at := int64(0)
	for cut := int64(7); cut <= 600; cut += 97 {
		l, shut := open(t, s, path, store.Options{})
		feed(l, at, cut)
		if err := l.commit(clock, false); err != nil {
			t.Fatal(err)
		}
		feed(l, cut, cut+20) // not committed: the broker will deliver it again
		at = cut
		shut()
	}
	l, shut := open(t, s, path, store.Options{})
	defer shut()
	feed(l, at, 600)
	if got := l.registers(); got[0] != want[0] {
		t.Errorf("registers %+v, want %+v", got[0], want[0])
	}
	if got := l.accounts.verdicts.Verdict(0, false, false); got != verdict {
		t.Errorf("verdict %v, want %v", got, verdict)
	}
	if got := minutesOf(t, l); !slices.Equal(got, minutes) {
		t.Errorf("minutes\n%+v\nwant\n%+v", got, minutes)
	}
}

// Totals shown are those on disk, so that they never fall after a restart.
func TestLedgerShowsWhatIsCommitted(t *testing.T) {
	l, shut := open(t, parsed(t, benchSite), filepath.Join(t.TempDir(), "h.db"), store.Options{})
	defer shut()
	feed(l, 0, 100)
	if l.committed[0] != (loads.Totals{}) {
		t.Errorf("committed %+v before the first commit, want nothing", l.committed[0])
	}
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	if l.committed[0] != l.registers()[0] || l.committed[0].Given == 0 {
		t.Errorf("committed %+v, want %+v", l.committed[0], l.registers()[0])
	}
}

// A load that the site file leaves out for a while finds its registers again.
func TestLedgerKeepsTheRegistersOfALoadThatWasAway(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	both, one := parsed(t, benchSite+annex), parsed(t, benchSite)
	run := func(s *site.Site, from, until int64) []loads.Totals {
		l, shut := open(t, s, path, store.Options{})
		defer shut()
		feed(l, from, until)
		if err := l.commit(clock, true); err != nil {
			t.Fatal(err)
		}
		return l.registers()
	}
	first := run(both, 0, 100)
	run(one, 100, 200)
	l, shut := open(t, both, path, store.Options{})
	defer shut()
	if got := l.registers()[1]; got.Given != first[1].Given || got.Measured != first[1].Measured {
		t.Errorf("annex comes back with %+v, left with %+v", got, first[1])
	}
	if got := l.registers()[0]; got.Given <= first[0].Given {
		t.Errorf("main has %g J, not more than the %g J of the first run", got.Given, first[0].Given)
	}
}

// After a kill, beats of another site file are not computed by today's: the
// registers stand as last committed, and go on from there.
func TestLedgerDoesNotReplayAnotherSite(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	water := parsed(t, benchSite)
	glycol := parsed(t, strings.Replace(benchSite, "fluid: water", "fluid: glycol", 1)+"fluids: {glycol: {propylene glycol: 40 %}}\n")
	l, shut := open(t, water, path, store.Options{})
	feed(l, 0, 301)
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	want := l.registers()[0]
	shut() // without a checkpoint, as after a kill

	l, shut = open(t, glycol, path, store.Options{})
	defer shut()
	if got := l.registers()[0]; got != want {
		t.Errorf("registers %+v after a change of the site file, want %+v", got, want)
	}
	feed(l, 301, 400)
	got := l.registers()[0]
	if got.Given <= want.Given || got.Measured+got.Missing != want.Measured+want.Missing+99*sec {
		t.Errorf("registers %+v a hundred seconds later, were %+v", got, want)
	}
}

const counted = `
site: Bench
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
timing: {bridge: 2 min}
tags:
  TI: {topic: a, unit: °C, value: /v, time: /ts, accuracy: 0.1 K, max_age: 20 s}
  TO: {topic: b, unit: °C, value: /v, time: /ts, accuracy: 0.1 K, max_age: 20 s}
  FQ: {topic: c, unit: kg, value: /v, time: /ts, accuracy: 1 % of reading, max_age: 10 min, counts: {}}
loads:
  main:
    stream: {fluid: water, flow: FQ, inlet: TI, outlet: TO, pressure: 3 barg, gives: heat}
`

// count puts a beat a second through, with temperatures each ten seconds up to an instant
// and a count each hundred.
func count(l *ledger, from, until, warm int64) {
	for s := from; s < until; s++ {
		at := clock.UnixNano() + s*sec
		var in []ingest.Reading
		if s%10 == 0 && s < warm {
			in = append(in, ingest.Reading{Tag: 0, At: at, Value: 350, Stamped: true}, ingest.Reading{Tag: 1, At: at, Value: 330, Stamped: true})
		}
		if s%100 == 0 {
			in = append(in, ingest.Reading{Tag: 2, At: at, Value: float64(s), Stamped: true})
		}
		l.beat(in, at-5*sec)
	}
}

// Time that waits for a count or a bridge when the site file changes is missing: none of it
// is left out of the account, after a stop and after a kill, and nothing of what waited is
// worked with a count in another unit. A load that has not changed waits on after a stop.
func TestLedgerLeavesNoTimeOutWhenTheSiteChanges(t *testing.T) {
	litres := strings.NewReplacer("unit: kg,", "unit: t,").Replace(counted)
	for _, tt := range []struct {
		name, after string
		stop        bool
		waits       int64 // s, at the start
	}{
		{"the unit of the count, after a stop", litres, true, 0},
		{"the unit of the count, after a kill", litres, false, 0},
		{"another load, after a stop", counted + strings.NewReplacer("FT", "FQ").Replace(annex), true, 74},
		{"another load, after a kill", counted + strings.NewReplacer("FT", "FQ").Replace(annex), false, 0},
	} {
		path := filepath.Join(t.TempDir(), "h.db")
		l, shut := open(t, parsed(t, counted), path, store.Options{})
		count(l, 0, 150, 430)
		if err := l.commit(clock, true); err != nil {
			t.Fatal(err)
		}
		count(l, 150, 480, 430)
		if err := l.commit(clock, tt.stop); err != nil {
			t.Fatal(err)
		}
		before := l.accounts.engine.Snapshot()
		shut()
		if before.Loads[0].Undecided != 74*sec || before.Loads[0].Given == 0 {
			t.Fatalf("%s: %+v wait when the site changes, want 74 s", tt.name, before.Loads[0])
		}

		l, shut = open(t, parsed(t, tt.after), path, store.Options{})
		now := l.accounts.engine.Snapshot().Loads[0]
		sum := func(l loads.LoadState) int64 { return l.Measured + l.Bridged + l.Missing + l.Undecided }
		if sum(now) != sum(before.Loads[0]) || now.Undecided != tt.waits*sec || now.Given != before.Loads[0].Given {
			t.Errorf("%s: %+v, undecided %d s, after %+v, want %d s to wait and nothing left out", tt.name, now.Totals, now.Undecided/sec, before.Loads[0].Totals, tt.waits)
		}
		count(l, 480, 720, 720)
		then := l.accounts.engine.Snapshot().Loads[0]
		if sum(then) != sum(before.Loads[0])+240*sec {
			t.Errorf("%s: %d s are accounted for 240 s later, were %d", tt.name, sum(then)/sec, sum(before.Loads[0])/sec)
		}
		shut()
	}
}

// A disk that takes nothing stops neither the accounts nor the agent: failures are
// counted, what waits is bounded, and with the disk's return everything that the
// accounts hold is written.
func TestLedgerOnAFullDisk(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	s := parsed(t, benchSite)
	l, shut := open(t, s, path, store.Options{MaxBytes: 1 << 20, MaxFile: 1 << 20})
	noise := func(at int64) []ingest.Reading {
		in := make([]ingest.Reading, 3000)
		for i := range in {
			in[i] = ingest.Reading{Tag: i % 3, At: clock.UnixNano() + at*sec + int64(i)*7919, Value: 300 + float64(i)*0.1234567891 + float64(at)*0.987654321}
		}
		return in
	}
	at := int64(0)
	for ; l.failures < 3 && at < 2000; at++ {
		l.beat(noise(at), clock.UnixNano()+(at-5)*sec)
		l.commit(clock, false)
	}
	if l.failures < 3 || !strings.Contains(l.fault, "history") {
		t.Fatalf("%d failures, fault %q after %d beats into a file of 1 MiB", l.failures, l.fault, at)
	}
	for range 100 {
		l.beat(noise(at), clock.UnixNano()+(at-5)*sec)
		at++
	}
	if l.waiting > maxUncommitted || l.lost == 0 {
		t.Errorf("%d readings wait and %d were given up; want at most %d waiting", l.waiting, l.lost, maxUncommitted)
	}
	totals := l.registers()[0]
	shut()

	// The same accounts on a disk with room.
	db, err := store.Open(filepath.Join(t.TempDir(), "roomy.db"), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	l.store, l.write = db, db.Commit
	if _, err := db.IDs("load", []string{"main"}); err != nil {
		t.Fatal(err)
	}
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	if l.fault != "" || l.committed[0] != totals {
		t.Errorf("fault %q, committed %+v; want none and %+v", l.fault, l.committed[0], totals)
	}
	if _, ok, err := db.Checkpoint(); !ok || err != nil {
		t.Errorf("checkpoint written: %v, %v; readings were given up, so it must be", ok, err)
	}
}

// On a disk that is full at the start the agent makes what room it can, and starts
// in any case; the fault is told.
func TestLedgerStartsOnAFullDisk(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	s := parsed(t, benchSite)
	tight := store.Options{MaxBytes: 1 << 20, MaxFile: 1 << 20}
	l, shut := open(t, s, path, tight)
	for at := int64(0); l.failures == 0; at++ {
		in := make([]ingest.Reading, 3000)
		for i := range in {
			in[i] = ingest.Reading{Tag: i % 3, At: clock.UnixNano() + at*sec + int64(i)*7919, Value: 300 + float64(i)*0.1234567891 + float64(at)*0.987654321}
		}
		l.beat(in, clock.UnixNano()+(at-5)*sec)
		l.commit(clock, at%10 == 0)
	}
	before := l.committed[0]
	shut()
	l, shut = open(t, s, path, tight)
	defer shut()
	if got := l.registers()[0]; got.Given < before.Given || got.Measured < before.Measured {
		t.Errorf("starts with %+v, the last commit had %+v", got, before)
	}
	if l.fault != "" && l.committed[0] != l.registers()[0] {
		t.Errorf("shows %+v, has %+v", l.committed[0], l.registers()[0])
	}
}

// So it is where the site file has new tags, whose names take pages in a row.
func TestLedgerNamesOnAFullDisk(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	tight := store.Options{MaxBytes: 1 << 20, MaxFile: 1 << 20}
	l, shut := open(t, parsed(t, benchSite), path, tight)
	for at := int64(0); l.failures == 0; at++ {
		in := make([]ingest.Reading, 3000)
		for i := range in {
			in[i] = ingest.Reading{Tag: i % 3, At: clock.UnixNano() + at*sec + int64(i)*7919, Value: 300 + float64(i)*0.1234567891 + float64(at)*0.987654321}
		}
		l.beat(in, clock.UnixNano()+(at-5)*sec)
		l.commit(clock, at%10 == 0)
	}
	shut()
	var more strings.Builder
	for i := range 6000 {
		fmt.Fprintf(&more, "  TX-%d: {topic: x/%d, unit: °C, accuracy: ± 0.3 K}\n", i, i)
	}
	grown := parsed(t, strings.Replace(benchSite, "loads:", more.String()+"loads:", 1))
	db, err := store.Open(path, tight)
	if err != nil {
		t.Fatal(err)
	}
	names := names(grown.Tags, func(t site.Tag) string { return t.Name })
	if _, err := db.IDs("tag", names); !store.IsFull(err) {
		t.Fatalf("a full history takes %d names: %v", len(names), err)
	}
	if err := db.Close(); err != nil {
		t.Fatal(err)
	}
	l, shut = open(t, grown, path, tight)
	defer shut()
	if len(l.tagIDs) != len(names) {
		t.Errorf("%d tags have a number, want %d", len(l.tagIDs), len(names))
	}
}

// A clock that was set by years costs no history at once, and retention comes there after all.
func TestLedgerTrimsNoLeap(t *testing.T) {
	s := parsed(t, benchSite)
	l, shut := open(t, s, filepath.Join(t.TempDir(), "h.db"), store.Options{MaxAge: 30 * 24 * time.Hour})
	defer shut()
	feed(l, 0, 2*3600)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	minutes := func() (n int) {
		for _, err := range l.store.Minutes(l.loadIDs[0], math.MinInt64, math.MaxInt64) {
			if err != nil {
				t.Fatal(err)
			}
			n++
		}
		return n
	}
	trims := func(now int64, times int) {
		for range times {
			if err := l.trim(now); err != nil {
				t.Fatal(err)
			}
		}
	}
	all := minutes()
	trims(clock.UnixNano()+2*3600*sec, 1)
	trims(clock.AddDate(20, 0, 0).UnixNano(), 4)
	if n := minutes(); all < 100 || n != all {
		t.Errorf("%d minutes of %d are left soon after a leap of 20 years", n, all)
	}
	trims(clock.AddDate(20, 0, 0).UnixNano(), 2)
	if n := minutes(); n >= all {
		t.Errorf("%d minutes of %d are left at 42 days, of 30", n, all)
	}
}

// What a restart puts through again is not counted again.
func TestLedgerCountsOnce(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	s := parsed(t, benchSite)
	l, shut := open(t, s, path, store.Options{})
	feed(l, 0, 100)
	feed(l, 40, 60) // late and repeated
	if before := l.accounts.engine.Snapshot().Tags[0].Tally; before.Repeated+before.Late == 0 {
		t.Fatal("nothing late or repeated: the course does not show anything")
	}
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	shut()
	l, shut = open(t, s, path, store.Options{})
	defer shut()
	if got := l.accounts.engine.Snapshot().Tags[0].Tally; got != (loads.Tally{}) {
		t.Errorf("tally %+v after a restart, want none", got)
	}
}

// The log tells where the accounts go on by other rules than those that they were kept by.
func TestLedgerTellsOfOtherRules(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	l, shut := open(t, parsed(t, benchSite), path, store.Options{})
	feed(l, 0, 100)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	shut()
	for _, tt := range []struct {
		text string
		want bool
	}{
		{benchSite, false},
		{strings.Replace(benchSite, "0.5 % of reading", "1 % of reading", 1), true},
	} {
		var log strings.Builder
		db, err := store.Open(path, store.Options{})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := openLedger(parsed(t, tt.text), db, Options{Log: slog.New(slog.NewTextHandler(&log, nil))}, clock); err != nil {
			t.Error(err)
		}
		if err := db.Close(); err != nil {
			t.Fatal(err)
		}
		if got := strings.Contains(log.String(), "have changed"); got != tt.want {
			t.Errorf("a change is told: %v, want %v\n%s", got, tt.want, &log)
		}
	}
}
