package loads

import (
	"bytes"
	"encoding/gob"
	"os"
	"strings"
	"testing"
)

// A site that gains a load keeps the accounts of the others, and the new one
// begins at nothing.
func TestRestoreIntoAChangedPlant(t *testing.T) {
	cfg := plant(liquid)
	e := engine(t, cfg)
	e.Advance(Beat{at(0, 2, 350, 330), through(50)}, nil)
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}

	wider := plant(liquid)
	extra := wider.Loads[0]
	extra.Name = "annex"
	wider.Loads = append([]Load{extra}, wider.Loads...)
	next := engine(t, wider)
	if err := next.Restore(state); err != nil {
		t.Fatal(err)
	}
	next.Advance(Beat{nil, through(60)}, nil)
	s := next.Snapshot()
	near(t, "boiler", s.Loads[1].Given, 160e3*60, 1e-6)
	near(t, "annex", s.Loads[0].Given, 160e3*10, 1e-6)
}

// Another grid keeps the registers and goes on from the next point of its own.
func TestRestoreWithAnotherGrid(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(33)}, nil)
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	cfg := plant(liquid)
	cfg.Grid = 10 * second
	next := engine(t, cfg)
	if err := next.Restore(state); err != nil {
		t.Fatal(err)
	}
	next.Advance(Beat{nil, through(50)}, nil)
	near(t, "given", next.Snapshot().Loads[0].Given, 160e3*(33+10), 1e-6) // 40 to 50 s
}

// resumed returns an engine of cfg that goes on from the state of e.
func resumed(t *testing.T, e *Engine, cfg Config) *Engine {
	t.Helper()
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	next := engine(t, cfg)
	if err := next.Restore(state); err != nil {
		t.Fatal(err)
	}
	return next
}

// Time that waited for a bridge, or for a count, on the grid before is missing, and so is
// what lies before the first point of the new one; the open minute is told in full.
func TestUndecidedTimeIsMissingOnAnotherGrid(t *testing.T) {
	cfg := bridging()
	e := engine(t, cfg)
	e.Advance(Beat{at(0, 1, 350, 330), through(33)}, nil)
	accounted(t, e, 10, 0, 0, 23)
	cfg.Grid = 20 * second
	next := resumed(t, e, cfg)
	accounted(t, next, 10, 0, 30, 0)
	closed := next.Advance(Beat{at(40, 1, 350, 330), through(60)}, nil)
	l := accounted(t, next, 30, 0, 30, 0)
	if len(closed) != 1 || closed[0].Measured != 30*second || closed[0].Given != l.Given {
		t.Errorf("minutes %+v, want one with all of %g J", closed, l.Given)
	}
}

// A flow that is counted from now on, or no more, leaves nothing undecided behind: heat
// that waited was that of a unit of flow.
func TestUndecidedTimeIsMissingForAnotherKindOfFlow(t *testing.T) {
	rate, counted := bridging(), countingPlant()
	counted.Bridge = rate.Bridge
	e := engine(t, rate)
	e.Advance(Beat{at(0, 1, 350, 330), through(33)}, nil)
	accounted(t, resumed(t, e, counted), 10, 0, 23, 0)

	e = engine(t, counted)
	e.Advance(Beat{append(counts(0, 5), temps(0, 350, 330)...), through(33)}, nil)
	accounted(t, e, 0, 0, 0, 33)
	accounted(t, resumed(t, e, rate), 0, 0, 33, 0)
}

// A reading is not taken for one of something else: here a flow of 3 kg/s for a register
// at 3 kg, and a register in litres for one in cubic metres.
func TestRestoreOfATagThatMeansSomethingElse(t *testing.T) {
	before := plant(liquid)
	inLitres, inTonnes := countingPlant(), countingPlant()
	inLitres.Tags[flow].Meaning, inTonnes.Tags[flow].Meaning = "0.001", "1"
	for _, tt := range []struct {
		name          string
		before, after Config
	}{{"a flow before", before, countingPlant()}, {"another unit before", inLitres, inTonnes}} {
		tt.after.Tags[flow].Counter, tt.before.Tags[flow].Name = &Counter{}, "QT"
		e := engine(t, tt.before)
		e.Advance(Beat{append(counts(0, 3), temps(0, 350, 330)...), through(2)}, nil)
		next := resumed(t, e, tt.after)
		if !next.Renewed(flow) || next.Renewed(inlet) {
			t.Errorf("%s: renewed %v and %v, want the flow alone", tt.name, next.Renewed(flow), next.Renewed(inlet))
		}
		taken := next.Snapshot().Loads[0].Given
		next.Advance(Beat{append(counts(10, 12345), temps(10, 350, 330)...), through(11)}, nil)
		next.Advance(Beat{counts(20, 12355), through(21)}, nil)
		near(t, tt.name+": given", next.Snapshot().Loads[0].Given-taken, 10*80e3, 1e-6)
	}
}

// The states were written by the release before bridges and counters, and by that before
// marks, after 10 minutes and 34 s at 160 kW, with a flow of 3 kg/s waiting at 639 s.
func TestRestoreOfEarlierVersions(t *testing.T) {
	for _, file := range []string{"testdata/state-version-1.gob", "testdata/state-version-2.gob"} {
		state, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		goOn(t, state)
	}
}

func goOn(t *testing.T, state []byte) {
	t.Helper()
	e := engine(t, plant(liquid))
	if err := e.Restore(state); err != nil {
		t.Fatal(err)
	}
	closed := e.Advance(Beat{at(640, 3, 350, 330), through(700)}, nil)
	l := accounted(t, e, 700, 0, 0, 0)
	if l.Uncertain != 0 {
		t.Errorf("%d ns are uncertain, want none", l.Uncertain)
	}
	near(t, "given", l.Given, 160e3*639+240e3*61, 1e-6)
	if len(closed) != 1 || closed[0].Measured != minute {
		t.Fatalf("minutes %+v, want the whole of the eleventh", closed)
	}
	near(t, "given in the eleventh minute", closed[0].Given, 160e3*39+240e3*21, 1e-6)
	near(t, "mean of an hour", l.Means[2].Duty, (160e3*639+240e3*61)/700, 1e-6)
}

// Parts of the uncertainty that this program does not know yet, or no more, read as
// nothing.
func TestSharesOfFewerParts(t *testing.T) {
	full := Shares{1, 2, 3}
	b, err := full.GobEncode()
	if err != nil {
		t.Fatal(err)
	}
	var got Shares
	if err := got.GobDecode(b); err != nil || got != full {
		t.Errorf("%v, %v; want %v", got, err, full)
	}
	if err := got.GobDecode(b[:16]); err != nil || got != (Shares{1, 2}) {
		t.Errorf("%v, %v; want the first two", got, err)
	}
	for _, bad := range [][]byte{b[:15], append(b, b[:8]...)} {
		if err := got.GobDecode(bad); err == nil {
			t.Errorf("%d bytes are taken, want an error", len(bad))
		}
	}
}

func TestRestoreRefusesWhatItDoesNotKnow(t *testing.T) {
	var other bytes.Buffer
	if err := gob.NewEncoder(&other).Encode(saved{Version: 99}); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		state []byte
		want  string
	}{{nil, "0 bytes"}, {[]byte("rubbish"), "7 bytes"}, {other.Bytes(), "version 99"}} {
		err := engine(t, plant(liquid)).Restore(tt.state)
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("Restore(%q) = %v, want an error with %q", tt.state, err, tt.want)
		}
	}
}

func TestSetRegisters(t *testing.T) {
	e := engine(t, plant(liquid))
	e.SetRegisters(0, Totals{Given: 5e9, Taken: 1e6, Measured: 3 * minute, Missing: minute})
	e.Advance(Beat{at(0, 2, 350, 330), through(1)}, nil)
	l := e.Snapshot().Loads[0]
	near(t, "given", l.Given, 5e9+160e3, 1e-6)
	near(t, "taken", l.Taken, 1e6, 0)
	if l.Measured != 3*minute+second || l.Missing != minute {
		t.Errorf("measured %d, missing %d", l.Measured, l.Missing)
	}
}
