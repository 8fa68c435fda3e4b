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

// The state was written by the release before bridges and counters, after 10 minutes and
// 34 s at 160 kW, with a flow of 3 kg/s waiting at 639 s.
func TestRestoreOfVersion1(t *testing.T) {
	state, err := os.ReadFile("testdata/state-version-1.gob")
	if err != nil {
		t.Fatal(err)
	}
	e := engine(t, plant(liquid))
	if err := e.Restore(state); err != nil {
		t.Fatal(err)
	}
	closed := e.Advance(Beat{at(640, 3, 350, 330), through(700)}, nil)
	l := accounted(t, e, 700, 0, 0, 0)
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
