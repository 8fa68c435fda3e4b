package store

import (
	"encoding/binary"
	"math"
	"slices"
	"testing"
)

// TestMarksCostNothing compares a tag that is marked now and then with the same without:
// where nothing is marked the bytes are those of the layout without marks, which has
// neither their code nor their bit, and a mark costs only where it changes.
func TestMarksCostNothing(t *testing.T) {
	plain := plant(1_760_000_000*second, 3600, 10)
	marked := make([]Beat, len(plain))
	changes, last := 0, map[uint32]uint8{}
	for i, b := range plain {
		marked[i] = Beat{Through: b.Through, Readings: slices.Clone(b.Readings)}
		for j, r := range b.Readings {
			plain[i].Readings[j].Mark = 0
			if r.Mark != last[r.Tag] {
				changes++
			}
			last[r.Tag] = r.Mark
		}
	}
	if changes < 50 {
		t.Fatalf("only %d changes of marks in the plant", changes)
	}
	without, with := appendRecord(nil, 1, plain, newMemory()), appendRecord(nil, 1, marked, newMemory())
	if more := len(with) - len(without); more != 2*changes {
		t.Errorf("journal: %d bytes more for %d changes of marks, want two each", more, changes)
	}
	column := func(beats []Beat) []byte {
		var all []Reading
		for _, b := range beats {
			for _, r := range b.Readings {
				if r.Tag == 3 {
					all = append(all, r)
				}
			}
		}
		return appendColumn(nil, columnOf(all), 0)
	}
	if b := column(plain); b[0]&columnMarked != 0 {
		t.Error("a column without marks says that it has some")
	}
	if more := len(column(marked)) - len(column(plain)); more > 3*changes/10 {
		t.Errorf("column: %d bytes more, of some %d changes of marks", more, changes/10)
	}
}

// TestNoValue seals readings of a source that says null for a day: they take no room for
// values, and those between them keep their form.
func TestNoValue(t *testing.T) {
	var all []Reading
	for i := range 8640 {
		r := Reading{Tag: 7, At: int64(i) * 10 * second, Value: 273.15 + float64(i%50)/100, Stamped: true}
		if i/720%2 == 0 {
			r.Value, r.Mark = math.NaN(), 132
		}
		all = append(all, r)
	}
	b := appendColumn(nil, columnOf(all), 0)
	if form(b[1]>>4) != formCelsius {
		t.Errorf("form %d, want that of the values that there are", b[1]>>4)
	}
	var got []Reading
	err := parseColumn(b, uint64(len(all)), 0, 7, func(r Reading) bool { got = append(got, r); return true })
	if err != nil || !sameBeats([]Beat{{Readings: got}}, []Beat{{Readings: all}}) {
		t.Fatalf("not read again as written: %v", err)
	}
	var some []Reading
	for _, r := range all {
		if r.Mark == 0 {
			some = append(some, r)
		}
	}
	if n := len(appendColumn(nil, columnOf(some), 0)); len(b) > n+250 {
		t.Errorf("%d bytes with 4320 readings of no value, %d without them", len(b), n)
	}
}

// TestEarlyRegisters reads registers from before uncertain time was kept.
func TestEarlyRegisters(t *testing.T) {
	for loads := range 40 {
		var want []Register
		var b []byte
		for i := range loads {
			r := Register{Load: uint32(i), Given: 1, Taken: 2, Measured: 3, Missing: 4, Bridged: 5, BridgedGiven: 6, BridgedTaken: float64(i)}
			b = binary.LittleEndian.AppendUint32(b, r.Load)
			floats := r.floats()
			for _, f := range floats[:earlyRegisterFloats] {
				b = binary.LittleEndian.AppendUint64(b, math.Float64bits(*f))
			}
			want = append(want, r)
		}
		b = binary.LittleEndian.AppendUint32(b, checksum(keyRegisters, b))
		if got, err := parseRegisters(b); err != nil || !slices.Equal(got, want) {
			t.Fatalf("%d loads: %v, %v", loads, got, err)
		}
		for i := range want {
			want[i].Uncertain = 0.5
		}
		if got, err := parseRegisters(appendRegisters(nil, want)); err != nil || !slices.Equal(got, want) {
			t.Fatalf("%d loads, written anew: %v, %v", loads, got, err)
		}
	}
}
