package store

import (
	"math"
	"testing"
)

// TestBeforeExpected opens a file that was written when no record told what was expected: its
// minutes, sealed or not, and its hours come as they were, with nothing expected, and go on
// beside those that tell it.
func TestBeforeExpected(t *testing.T) {
	s := openStore(t, unpacked(t, "layout3.db.gz"), Options{})
	s.minuteSealing.after = 0
	const begin, minutes = 480_000 * 60, 760
	if blocks, keys := sealedCount(t, s); blocks != 4 || keys == 0 {
		t.Fatalf("the file has %d blocks and %d keys of minutes", blocks, keys)
	}
	for round := range int64(2) {
		for _, load := range []uint32{2, 12} {
			all := drain(t, s.Minutes(load, math.MinInt64, math.MaxInt64))
			if len(all) != minutes+int(400*round) {
				t.Fatalf("load %d has %d minutes", load, len(all))
			}
			for i, m := range all {
				want := wave(load, (begin+int64(i))*60*second)
				if i < minutes {
					want.Expected, want.ExpectedError = 0, 0
				}
				if m != want.kept() {
					t.Fatalf("minute %d of load %d is\n%+v, want\n%+v", i, load, m, want)
				}
			}
			hours := drain(t, s.Hours(load, math.MinInt64, math.MaxInt64))
			if h := hours[3]; h.Minutes != 60 || h.Duty != 61 || h.Expected != 0 || h.ExpectedError != 0 {
				t.Errorf("an hour from before is %+v", h)
			}
			if h := hours[len(hours)-2]; round == 1 && (h.Expected != 122 || h.ExpectedError != 15.25) {
				t.Errorf("an hour from after is %+v", h)
			}
		}
		for m := int64(minutes); round == 0 && m < minutes+400; m++ {
			at := (begin + m) * 60 * second
			commit(t, s, Batch{Minutes: []Minute{wave(2, at), wave(12, at)}})
		}
	}
}

// What a wave's minute of which nothing is expected, and a column of six hours of them, took
// before records told what was expected, as the code of then printed it.
const plainMinuteBytes, plainColumnBytes = 68, 16_271

// TestNothingExpected writes the records of a load of which nothing is expected in as many bytes
// as before, and a constant in the bytes of two numbers a column.
func TestNothingExpected(t *testing.T) {
	const start, minutes = 80_000 * sealedSpan, 360
	var plain, told []Minute
	for i := range int64(minutes) {
		m := wave(1, start+i*60*second)
		m.Uncertain, m.Expected, m.ExpectedError = 0, 0, 0
		plain = append(plain, m.kept())
		m.Expected, m.ExpectedError = 640e3, 6.4e3
		told = append(told, m.kept())
	}
	key := minuteKey(start, 1)
	if n, with := len(appendMinutes(nil, key, plain[:1])), len(appendMinutes(nil, key, told[:1])); with-n > 9 {
		t.Errorf("a minute takes %d bytes, and %d with what was expected", n, with)
	} else if n != plainMinuteBytes {
		t.Errorf("a minute of which nothing is expected takes %d bytes, and took %d", n, plainMinuteBytes)
	}
	n, with := len(appendMinuteColumn(nil, plain, start)), len(appendMinuteColumn(nil, told, start))
	if with-n > 18 {
		t.Errorf("a column takes %d bytes, and %d with what was expected", n, with)
	}
	if n > plainColumnBytes {
		t.Errorf("a column of which nothing is expected takes %d bytes, and took %d", n, plainColumnBytes)
	}
}
