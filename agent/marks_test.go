package agent

import (
	"math"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/ingest"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// doubtful is a course with readings that their source doubts, a bad one without a value,
// and one that is as far off as a loose wire.
func doubtful(l *ledger, from, until int64) {
	for s := from; s < until; s++ {
		at := clock.UnixNano() + s*sec
		var in []ingest.Reading
		if s%10 == 0 {
			in = []ingest.Reading{
				{Tag: 0, At: at, Value: 350 + float64(s%3)/10, Stamped: true},
				{Tag: 1, At: at, Value: 330, Stamped: true},
				{Tag: 2, At: at, Value: 2, Stamped: true},
			}
			switch s % 300 {
			case 100, 110, 120:
				in[0].Mark = quality.OffSpec
			case 150:
				in[1].Value, in[1].Mark = math.NaN(), quality.NoValue
			case 200:
				in[0].Value = 380
			}
		}
		l.beat(in, at-5*sec)
	}
}

// What sources say of their readings is kept with them, and judged again as it was after a
// restart; the tests remember what came before it.
func TestMarksOutliveARestart(t *testing.T) {
	text := strings.Replace(benchSite, "accuracy: IEC 60751 A}", "accuracy: IEC 60751 A, resolution: 0.1 K, spikes: set aside, stuck: 30 min}", 1)
	s := parsed(t, text)
	whole, shut := open(t, s, filepath.Join(t.TempDir(), "h.db"), store.Options{})
	doubtful(whole, 0, 906)
	want := whole.registers()[0]
	shut()
	// Three times: 30 s and the 10 s of a spike are uncertain, and 10 s missing.
	if want.Uncertain != 120*sec || want.Missing != 30*sec || want.Measured != 870*sec {
		t.Fatalf("registers %+v", want)
	}

	path := filepath.Join(t.TempDir(), "h.db")
	at := int64(0)
	for cut := int64(7); cut < 900; cut += 61 {
		l, shut := open(t, s, path, store.Options{})
		doubtful(l, at, cut)
		if err := l.commit(clock, cut%2 == 0); err != nil {
			t.Fatal(err)
		}
		at = cut
		shut()
	}
	l, shut := open(t, s, path, store.Options{})
	defer shut()
	doubtful(l, at, 906)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	if got := l.registers()[0]; got != want {
		t.Errorf("registers %+v, want %+v", got, want)
	}
	uncertain := 0.0
	for m, err := range l.store.Minutes(l.loadIDs[0], 0, math.MaxInt64) {
		if err != nil {
			t.Fatal(err)
		}
		uncertain += m.Uncertain
	}
	kept, err := l.totals()
	if err != nil || uncertain != 120 || kept[0].Uncertain != 120 {
		t.Errorf("minutes tell %g s uncertain, the register %g s, %v; want 120", uncertain, kept[0].Uncertain, err)
	}
	marks := map[quality.Mark]int{}
	for r, err := range l.store.Readings(l.tagIDs[1], 0, math.MaxInt64) {
		if err != nil {
			t.Fatal(err)
		}
		if marks[quality.Mark(r.Mark)]++; r.Mark != 0 && !math.IsNaN(r.Value) {
			t.Errorf("a reading without a value is %g", r.Value)
		}
	}
	if marks[quality.NoValue] != 3 {
		t.Errorf("the history has readings with marks %v, want three without a value", marks)
	}
}
