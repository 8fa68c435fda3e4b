package quality

import (
	"slices"
	"testing"
)

// Numbers stand in histories, so a change of one is a change of the past.
func TestMarksKeepTheirNumbers(t *testing.T) {
	for m, want := range map[Mark]uint8{
		None: 0, Maintenance: 1,
		Doubted: 65, LastUsable: 66, Substitute: 67, OffSpec: 68, BelowSpan: 69, AboveSpan: 70, Inaccurate: 71, Limited: 72,
		Implausible: 80, TooFast: 81, Stuck: 82, Spike: 83, Disagrees: 96, NotZero: 97, WrongOrder: 98,
		Rejected: 129, Failed: 130, FunctionCheck: 131, NoValue: 132, Offline: 133, StaleAtSource: 134, OutOfService: 135, Refused: 136,
	} {
		if uint8(m) != want {
			t.Errorf("%v is number %d, want %d", m, uint8(m), want)
		}
	}
}

func TestQualityAndWords(t *testing.T) {
	seen := map[string]Mark{}
	for m, w := range words {
		if other, twice := seen[w]; twice {
			t.Errorf("%d and %d both read %q", uint8(m), uint8(other), w)
		}
		seen[w] = m
	}
	for _, tt := range []struct {
		m    Mark
		q    Quality
		word string
	}{{None, Good, "good"}, {Maintenance, Good, "maintenance-due"}, {Stuck, Uncertain, "stuck"}, {Failed, Bad, "failure"}, {Mark(64 + 63), Uncertain, "uncertain-63"}} {
		if tt.m.Quality() != tt.q || tt.m.String() != tt.word {
			t.Errorf("mark %d: %v, %q; want %v, %q", uint8(tt.m), tt.m.Quality(), tt.m.String(), tt.q, tt.word)
		}
	}
}

func TestMarks(t *testing.T) {
	all := Marks()
	if len(all) != len(words)-1 || !slices.IsSorted(all) || slices.Contains(all, None) || !slices.Contains(all, OutOfService) {
		t.Errorf("marks %v", all)
	}
}

func TestWorse(t *testing.T) {
	for _, tt := range [][3]Mark{{None, None, None}, {None, Maintenance, Maintenance}, {Stuck, Spike, Stuck}, {Stuck, Failed, Failed}, {Failed, Stuck, Failed}, {Maintenance, Stuck, Stuck}} {
		if got := Worse(tt[0], tt[1]); got != tt[2] {
			t.Errorf("Worse(%v, %v) = %v, want %v", tt[0], tt[1], got, tt[2])
		}
	}
}
