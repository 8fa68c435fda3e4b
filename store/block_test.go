package store

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// siValue is a decimal as it comes in SI units by any of the forms, or any value.
var siValue = rapid.Custom(func(t *rapid.T) float64 {
	x := float64(rapid.Int64Range(-100_000, 100_000).Draw(t, "n")) / 100
	switch rapid.IntRange(0, 5).Draw(t, "form") {
	case 0:
		return x + 273.15
	case 1:
		return x / 3600
	case 2:
		return x * (1.0 / 3600)
	case 3:
		return anyValue.Draw(t, "any")
	case 4:
		return 1e5*x + 101_325
	}
	return x
})

// anyColumn mixes runs of one kind, which a form fits, with runs of any values.
var anyColumn = rapid.Custom(func(t *rapid.T) (all []Reading) {
	value := rapid.OneOf(anyValue, siValue, rapid.Map(rapid.IntRange(-50, 50), func(n int) float64 { return float64(n)/10 + 273.15 }))
	for _, r := range rapid.SliceOfN(anyReading, 1, 60).Draw(t, "readings") {
		r.Tag, r.Value = 7, value.Draw(t, "value")
		all = append(all, r)
	}
	return all
})

func columnOf(all []Reading) *column {
	c := &column{}
	for _, r := range all {
		c.add(r)
	}
	return c
}

// TestColumnRoundTrip writes readings of any bits as a column and reads the same.
func TestColumnRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		want := anyColumn.Draw(t, "column")
		origin := anyInstant.Draw(t, "origin")
		b := appendColumn([]byte("before"), columnOf(want), origin)[len("before"):]
		var got []Reading
		err := parseColumn(b, uint64(len(want)), origin, 7, func(r Reading) bool {
			got = append(got, r)
			return true
		})
		if err != nil || !sameBeats([]Beat{{Readings: got}}, []Beat{{Readings: want}}) {
			t.Fatalf("%v, %v\nwant %v", got, err, want)
		}
	})
}

// TestForms finds the form of decimals that came in common units.
func TestForms(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for _, tt := range []struct {
		what  string
		si    func(x float64) float64
		form  form
		k     int
		exact bool
	}{
		{"kg/s", func(x float64) float64 { return x }, formDecimal, 2, true},
		{"°C", func(x float64) float64 { return x + 273.15 }, formCelsius, 2, true},
		{"m3/h", func(x float64) float64 { return x / 3600 }, formHourly, 2, true},
		{"m3/h by a factor", func(x float64) float64 { return x * perHour }, formPerHour, 2, true},
		{"barg", func(x float64) float64 { return 1e5*x + 100_900 }, formDecimal, 0, false},
		{"°F", func(x float64) float64 { return (x + 459.67) * 5 / 9 }, formHourly, 0, false},
		{"noise", func(x float64) float64 { return math.Exp(x / 100) }, formBits, 0, true},
	} {
		c := &column{}
		for i := range 300 {
			c.add(Reading{At: int64(i), Value: tt.si(float64(4000+rng.IntN(2000)) / 100)})
		}
		h, whole := c.head()
		if h.form != tt.form || h.k != tt.k {
			t.Errorf("%s: form %d with %d digits, want %d with %d", tt.what, h.form, h.k, tt.form, tt.k)
		}
		for i, n := range whole {
			if off := h.off(n, c.bits[i]); off != 0 && tt.exact || off > nearby || off < -nearby {
				t.Fatalf("%s: value %d is %d floats off", tt.what, i, off)
			}
		}
	}
}

// TestBlock finds each tag's readings in a block, none in one with any bit changed
// that matters to it, and none under another name.
func TestBlock(t *testing.T) {
	want := map[uint32][]Reading{}
	cols := columns{}
	s := newSpan(5)
	for _, b := range plant(1_760_000_000*second, 600, 40) {
		s.add([]Beat{b})
		for _, r := range b.Readings {
			r.Tag *= 1000
			cols.add(r)
			want[r.Tag] = append(want[r.Tag], r)
		}
	}
	w := packed(cols, s)
	name, block := s.name(), w.block()
	read := func(name, block []byte, tag uint32) (got []Reading, err error) {
		err = eachReading(name, block, tag, func(r Reading) bool { got = append(got, r); return true })
		return got, err
	}
	for tag, readings := range want {
		if got, err := read(name, block, tag); err != nil || !slices.Equal(got, readings) {
			t.Fatalf("tag %d: %v, %v; want %v", tag, got, err, readings)
		}
	}
	if got, err := read(name, block, 17); err != nil || got != nil {
		t.Errorf("a tag that is not there: %v, %v", got, err)
	}
	told := 0
	for i := range block {
		b := slices.Clone(block)
		b[i] ^= 4
		for _, tag := range []uint32{0, 39_000} {
			if got, err := read(name, b, tag); err != nil {
				told++
			} else if !slices.Equal(got, want[tag]) {
				t.Fatalf("byte %d changed: %v", i, got)
			}
		}
	}
	if told < 100 {
		t.Errorf("only %d changes were told", told)
	}
	other := s
	other.first--
	if got, err := read(other.name(), block, 0); err == nil {
		t.Errorf("under another name: %v", got)
	}
}

// FuzzColumn reads any bytes as a column: what comes out is written and read again as
// the same.
func FuzzColumn(f *testing.F) {
	for _, all := range [][]Reading{
		{{At: 5, Value: 1}}, {{At: 0, Value: 293.15}, {At: 10, Value: 293.16}, {At: 20, Value: math.NaN()}},
	} {
		f.Add(appendColumn(nil, columnOf(all), 0), byte(len(all)))
	}
	f.Fuzz(func(t *testing.T, b []byte, count byte) {
		var all []Reading
		keep := func(r Reading) bool { all = append(all, r); return true }
		if err := parseColumn(b, uint64(count), 3, 1, keep); err != nil || count == 0 {
			return
		}
		want := slices.Clone(all)
		all = nil
		err := parseColumn(appendColumn(nil, columnOf(want), 9), uint64(count), 9, 1, keep)
		if err != nil || !sameBeats([]Beat{{Readings: all}}, []Beat{{Readings: want}}) {
			t.Fatalf("%v, %v\nwant %v", all, err, want)
		}
	})
}

// FuzzColumnFloats writes any floats, as they stand in the bytes, and reads them back.
func FuzzColumnFloats(f *testing.F) {
	f.Add(make([]byte, 64))
	f.Add([]byte("\x00\x00\x00\x00\x00\x00\xf8\x7f\x01\x00\x00\x00\x00\x00\xf8\x7f"))
	f.Fuzz(func(t *testing.T, b []byte) {
		var want, got []Reading
		for at := int64(0); len(b) >= 8; at, b = at+10, b[8:] {
			want = append(want, Reading{At: at, Value: math.Float64frombits(binary.LittleEndian.Uint64(b))})
		}
		if want == nil {
			return
		}
		err := parseColumn(appendColumn(nil, columnOf(want), 0), uint64(len(want)), 0, 0, func(r Reading) bool {
			got = append(got, r)
			return true
		})
		if err != nil || !sameBeats([]Beat{{Readings: got}}, []Beat{{Readings: want}}) {
			t.Fatalf("%v, %v\nwant %v", got, err, want)
		}
	})
}

// packed puts columns in a block for what s covers.
func packed(cols columns, s span) *blockWriter {
	w := newBlockWriter(headKey(s.name()))
	for _, tag := range cols.tags() {
		w.add(tag, uint64(len(cols[tag].at)), appendColumn(nil, cols[tag], s.earliest))
	}
	return w
}
