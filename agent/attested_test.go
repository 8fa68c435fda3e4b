package agent

import (
	"math"
	"path/filepath"
	"testing"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/ingest"
	"heatreeve/store"
)

// attestedBench is the bench with a heat meter, in a zone off UTC by three quarters of an hour, and
// a load without one.
const attestedBench = `
site: Bench
timezone: Asia/Kathmandu
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
tags:
  TI: {topic: a, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  TO: {topic: b, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}
  FT: {topic: c, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading}
  ET: {topic: d, unit: kWh, value: /v, time: /ts, accuracy: 2 % of reading, counts: {}}
loads:
  main:
    stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 3 barg, gives: heat}
    witness: ET` + annex

// midnight is by the clock of Kathmandu, which is 5 h 45 min ahead of UTC.
var midnight = time.Date(2023, 11, 15, 18, 15, 0, 0, time.UTC)

// fromMinute is when the meter begins, before midnight.
const fromMinute = -200

// attendMeter puts minutes from midnight on through, with a meter that counts 100 kW.
func attendMeter(l *ledger, from, until int) {
	for m := from; m < until; m++ {
		at := midnight.Add(time.Duration(m) * time.Minute).UnixNano()
		l.beat([]ingest.Reading{
			{Tag: 0, At: at, Value: 350, Stamped: true}, {Tag: 1, At: at, Value: 340, Stamped: true}, {Tag: 2, At: at, Value: 2, Stamped: true},
			{Tag: 3, At: at, Value: 1e9 + 6e6*float64(m-fromMinute), Stamped: true},
		}, at)
	}
}

// The sums of a day begin at midnight of the site, and are those of the report of the day, to
// which a restart in it makes no difference.
func TestAttestedToday(t *testing.T) {
	s := parsed(t, attestedBench)
	path := filepath.Join(t.TempDir(), "h.db")
	l, shut := open(t, s, path, store.Options{})
	now := func() int64 { return l.accounts.engine.Through() }
	if w := l.attested.at(0, now()); w != nil {
		t.Errorf("before the first reading: %+v", w)
	}
	attendMeter(l, fromMinute, 0)
	if w := l.attested.at(0, now()); w == nil || !w.Told || math.Abs(w.Counted-6e6*197) > 6e6*3 {
		t.Errorf("after 200 minutes: %+v, want some 197 times 6 MJ", w)
	}
	attendMeter(l, 0, 1)
	if w := l.attested.at(0, now()); w == nil || w.Told || w.Counted != 0 || w.Served != 0 {
		t.Errorf("at midnight: %+v, want nothing", w)
	}
	attendMeter(l, 1, 150)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	before := *l.attested.at(0, now())
	shut()

	l, shut = open(t, s, path, store.Options{})
	defer shut()
	after := *l.attested.at(0, now())
	if !(before.Counted > 140*6e6) || math.Abs(after.Counted-before.Counted) > 1e-9*before.Counted || math.Abs(after.Served-before.Served) > 1e-9*before.Served {
		t.Errorf("%+v before a restart and %+v after it", before, after)
	}
	attendMeter(l, 150, 160)
	w := l.attested.at(0, now())
	// The report of the day, by the same clock.
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	h := historyIn(t, l.store, "Asia/Kathmandu")
	h.through = now
	r, err := h.report(t.Context(), answer.Query{From: "2023-11-16", By: "day", Loads: []string{"main"}})
	if err != nil {
		t.Fatal(err)
	}
	told := r.Loads[0].Total.Witness
	if told == nil || math.Abs(told.Counted-w.Counted) > 1e-9*w.Counted || math.Abs(told.Served-w.Served) > 1e-9*w.Served || math.Abs(told.Deviation-w.Deviation) > 1e-9 {
		t.Errorf("the metrics say %+v, the report %+v", w, told)
	}
	if l.attested.at(1, now()) != nil {
		t.Error("a load without a witness has one")
	}
}

// A minute of the day before, which was decided on late, is not of today.
func TestAttestedLate(t *testing.T) {
	a := &attested{zone: time.UTC, has: []bool{true}, sums: make([]account.Amounts, 1)}
	day := time.Date(2026, 3, 1, 0, 0, 0, 0, time.UTC).UnixNano()
	a.add(0, day+5*minute, 10, 9)
	a.add(0, day-minute, 1000, 1000)
	if w := a.at(0, day+6*minute); w.Counted != 10 || w.Served != 9 || math.Abs(w.Deviation+0.1) > 1e-12 {
		t.Errorf("%+v, want 10 and 9", w)
	}
}
