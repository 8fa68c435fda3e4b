package store

import (
	"cmp"
	"maps"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// model is a history kept in plain slices and maps, to compare with.
type model struct {
	beats     []Beat
	mark      int // beats that the checkpoint stands for
	state     []byte
	minutes   map[[2]int64]Minute // by load and start
	registers map[uint32]Register
	events    map[[2]int64]Event // by At and Number
}

func (m *model) commit(b Batch) {
	m.beats = append(m.beats, b.Beats...)
	for _, x := range b.Minutes {
		m.minutes[[2]int64{int64(x.Load), x.Start}] = x.kept()
	}
	for _, r := range b.Registers {
		m.registers[r.Load] = r
	}
	for _, e := range b.Events {
		m.events[[2]int64{e.At, int64(e.Number)}] = e.kept()
	}
	if b.Checkpoint != nil {
		m.state, m.mark = b.Checkpoint, len(m.beats)
	}
}

var anyRegister = rapid.Custom(func(t *rapid.T) Register {
	r := Register{Load: rapid.Uint32Range(0, 40).Draw(t, "load")}
	for _, f := range r.floats() {
		*f = anyValue.Draw(t, "float")
	}
	return r
})

var anyEvent = rapid.Custom(func(t *rapid.T) Event {
	instant := rapid.OneOf(rapid.Int64Range(-5, 5), rapid.Int64())
	return Event{
		At: instant.Draw(t, "at"), Until: instant.Draw(t, "until"), Number: rapid.Uint64Range(0, 3).Draw(t, "number"),
		Kind: rapid.String().Draw(t, "kind"), Subject: rapid.String().Draw(t, "subject"), Text: rapid.String().Draw(t, "text"),
	}
})

var anyBatch = rapid.Custom(func(t *rapid.T) Batch {
	b := Batch{
		Beats:     rapid.SliceOfN(anyBeat, 0, 12).Draw(t, "beats"),
		Minutes:   rapid.SliceOfN(anyMinute, 0, 4).Draw(t, "minutes"),
		Registers: rapid.SliceOfN(anyRegister, 0, 4).Draw(t, "registers"),
		Events:    rapid.SliceOfN(anyEvent, 0, 3).Draw(t, "events"),
	}
	if rapid.IntRange(0, 3).Draw(t, "with checkpoint") == 0 {
		b.Checkpoint = rapid.SliceOfN(rapid.Byte(), 0, 40).Draw(t, "checkpoint")
		if b.Checkpoint == nil {
			b.Checkpoint = []byte{}
		}
	}
	return b
})

// TestModel commits any batches to a store and to a model, reopens the store now
// and then, and compares all that can be read. Groups are kept small so that many are closed.
func TestModel(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		dir, err := os.MkdirTemp("", "heatreeve-store")
		if err != nil {
			t.Fatal(err)
		}
		defer os.RemoveAll(dir)
		path := filepath.Join(dir, "history.db")
		group := rapid.SampledFrom([]int{100, 3000, 8000}).Draw(t, "group")
		enough := rapid.SampledFrom([]int{1, 40, 1 << 16}).Draw(t, "enough")
		m := model{minutes: map[[2]int64]Minute{}, registers: map[uint32]Register{}, events: map[[2]int64]Event{}}
		for range rapid.IntRange(1, 4).Draw(t, "openings") {
			s, err := Open(path, Options{})
			if err != nil {
				t.Fatal(err)
			}
			s.groupBytes, s.sealing.enough, s.beatAge = group, enough, 1
			s.minuteSealing.after = 0
			for _, b := range rapid.SliceOfN(anyBatch, 0, 15).Draw(t, "batches") {
				if err := s.Commit(b); err != nil {
					t.Fatal(err)
				}
				m.commit(b)
			}
			m.compare(t, s)
			if err := s.Close(); err != nil {
				t.Fatal(err)
			}
		}
	})
}

func (m *model) compare(t *rapid.T, s *Store) {
	state, ok, err := s.Checkpoint()
	if err != nil || ok != (m.state != nil) || !slices.Equal(state, m.state) {
		t.Fatalf("Checkpoint() = % x, %v, %v; want % x", state, ok, err, m.state)
	}
	if got := drain(t, s.Since()); !sameBeats(got, m.beats[m.mark:]) {
		t.Fatalf("Since: %v\nwant %v", got, m.beats[m.mark:])
	}
	if got := drain(t, s.Readings(1, math.MinInt64, math.MaxInt64)); !sameBeats([]Beat{{Readings: got}}, []Beat{{Readings: m.readings(1)}}) {
		t.Fatalf("Readings: %v\nwant %v", got, m.readings(1))
	}
	got := drain(t, s.Minutes(2, -3, 4))
	var want []Minute
	for start := int64(-3); start < 4; start++ {
		if x, ok := m.minutes[[2]int64{2, start}]; ok {
			want = append(want, x)
		}
	}
	if !sameMinutes(got, want) {
		t.Fatalf("Minutes: %v\nwant %v", got, want)
	}
	m.compareHours(t, s)
	m.compareEvents(t, s)
	registers, err := s.Registers()
	var all []Register
	for _, load := range slices.Sorted(maps.Keys(m.registers)) {
		all = append(all, m.registers[load])
	}
	if err != nil || !slices.Equal(appendRegisters(nil, registers), appendRegisters(nil, all)) {
		t.Fatalf("Registers() = %v, %v; want %v", registers, err, all)
	}
}

func (m *model) compareEvents(t *rapid.T, s *Store) {
	for _, span := range [][2]int64{{math.MinInt64, math.MaxInt64}, {-2, 3}, {0, 0}} {
		var want []Event
		for _, e := range m.events {
			if before, after := e.At < span[0], e.At >= span[1]; !after && (!before || e.Until == 0 || e.Until > span[0]) {
				want = append(want, e)
			}
		}
		slices.SortFunc(want, func(a, b Event) int { return cmp.Or(cmp.Compare(a.At, b.At), cmp.Compare(a.Number, b.Number)) })
		if got := drain(t, s.Events(span[0], span[1])); !slices.Equal(got, want) {
			t.Fatalf("Events(%v): %+v\nwant %+v", span, got, want)
		}
	}
}

func (m *model) readings(tag uint32) (all []Reading) {
	for _, b := range m.beats {
		for _, r := range b.Readings {
			if r.Tag == tag && r.At < math.MaxInt64 {
				all = append(all, r)
			}
		}
	}
	return all
}

// drain collects what seq yields; an error ends the test.
func drain[T any](t interface{ Fatal(...any) }, seq func(func(T, error) bool)) (all []T) {
	for x, err := range seq {
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, x)
	}
	return all
}
