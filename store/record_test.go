package store

import (
	"encoding/binary"
	"fmt"
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// bitsOf turns beats into numbers that compare by the bit: NaN is equal to
// itself and 0 is not -0.
func bitsOf(beats []Beat) (all []uint64) {
	for _, b := range beats {
		all = append(all, uint64(b.Through), uint64(len(b.Readings)))
		for _, r := range b.Readings {
			stamped := uint64(0)
			if r.Stamped {
				stamped = 1
			}
			all = append(all, uint64(r.Tag), uint64(r.At), math.Float64bits(r.Value), stamped, uint64(r.Mark))
		}
	}
	return all
}

func sameBeats(a, b []Beat) bool { return slices.Equal(bitsOf(a), bitsOf(b)) }

// Values that the coding could get wrong, beside any others.
var (
	hardInstants = []int64{0, 1, -1, math.MinInt64, math.MaxInt64, 999_999, 1_000_000, -1_000_000, -999_999}
	hardValues   = []float64{0, math.Copysign(0, -1), math.NaN(), math.Float64frombits(0x7ff0000000000001),
		math.Float64frombits(0xfff8dead0000beef), math.Inf(1), math.Inf(-1), 5e-324, math.MaxFloat64, 293.15}
)

var anyInstant = rapid.OneOf(
	rapid.SampledFrom(hardInstants),
	rapid.Int64(),
	rapid.Map(rapid.Int64Range(0, 1000), func(ms int64) int64 { return 1_760_000_000*second + ms*millisecond }),
)

var anyValue = rapid.OneOf(
	rapid.SampledFrom(hardValues),
	rapid.Map(rapid.Uint64(), math.Float64frombits),
	rapid.Map(rapid.IntRange(0, 10_000), func(i int) float64 { return 273.15 + float64(i)/100 }),
)

var anyReading = rapid.Custom(func(t *rapid.T) Reading {
	return Reading{
		Tag: rapid.OneOf(rapid.Uint32Range(0, 4), rapid.Uint32()).Draw(t, "tag"),
		At:  anyInstant.Draw(t, "at"), Value: anyValue.Draw(t, "value"), Stamped: rapid.Bool().Draw(t, "stamped"),
		Mark: anyMark.Draw(t, "mark"),
	}
})

// anyMark is mostly 0, as marks are.
var anyMark = rapid.OneOf(rapid.Just(uint8(0)), rapid.Just(uint8(0)), rapid.SampledFrom([]uint8{66, 132}), rapid.Uint8())

var anyBeat = rapid.Custom(func(t *rapid.T) Beat {
	return Beat{Through: anyInstant.Draw(t, "through"), Readings: rapid.SliceOfN(anyReading, 0, 8).Draw(t, "readings")}
})

// TestRecordRoundTrip writes runs of records that share a memory and reads them
// back to the bit.
func TestRecordRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		all := rapid.SliceOfN(rapid.SliceOfN(anyBeat, 1, 5), 1, 8).Draw(t, "records")
		first := rapid.Uint64Range(1, math.MaxUint64-10).Draw(t, "first")
		var b []byte
		m := newMemory()
		for i, beats := range all {
			b = appendRecord(b, first+uint64(i), beats, m)
		}
		p, m := parser{rest: b}, newMemory()
		for i, want := range all {
			got, err := p.record(first+uint64(i), m)
			if err != nil || !sameBeats(got, want) {
				t.Fatalf("record %d: %v, %v; want %v", i, got, err, want)
			}
		}
		if len(p.rest) != 0 {
			t.Fatalf("%d bytes are left", len(p.rest))
		}
	})
}

// TestRecordRefusesChange flips every bit of two records: none may pass, nor may
// one in the other's place.
func TestRecordRefusesChange(t *testing.T) {
	m := newMemory()
	one := appendRecord(nil, 1, plant(1000*second, 10, 20), m)
	two := appendRecord(nil, 2, plant(1010*second, 10, 20), m)
	for i := range len(one) * 8 {
		b := slices.Clone(one)
		b[i/8] ^= 1 << (i % 8)
		p := parser{rest: b}
		if beats, err := p.record(1, newMemory()); err == nil {
			t.Fatalf("bit %d flipped: read as %v", i, beats)
		}
	}
	p := parser{rest: two}
	if _, err := p.record(1, newMemory()); err == nil {
		t.Error("record 2 was read as record 1")
	}
}

// FuzzRecord puts any bytes under a checksum that fits: what is read from them must
// be written and read again as the same.
func FuzzRecord(f *testing.F) {
	for _, beats := range [][]Beat{plant(0, 3, 12), plant(1_760_000_000*second, 10, 50), {{Through: -1}}} {
		b := appendRecord(nil, 1, beats, newMemory())
		n, k := binary.Uvarint(b)
		f.Add(b[k : k+int(n)])
	}
	f.Add([]byte{1, 0, 1, 0xff, 1, 1, 1, 1, 1})
	f.Fuzz(func(t *testing.T, body []byte) {
		b := binary.AppendUvarint(nil, uint64(len(body)))
		b = append(b, body...)
		b = binary.LittleEndian.AppendUint32(b, checksum(sequenceKey(1), body))
		p := parser{rest: b}
		beats, err := p.record(1, newMemory())
		if err != nil {
			return
		}
		p = parser{rest: appendRecord(nil, 1, beats, newMemory())}
		again, err := p.record(1, newMemory())
		if err != nil || !sameBeats(again, beats) {
			t.Fatalf("%v was read again as %v, %v", beats, again, err)
		}
	})
}

// FuzzParsers gives any bytes to all that reads the file: nothing may panic, and
// what passes must be written and read again as the same.
func FuzzParsers(f *testing.F) {
	key := minuteKey(60, 33)
	f.Add(key, appendMinutes(nil, key, []Minute{{Start: 60, Load: 33, Duty: 5}, {Start: 60, Load: 40, Given: 1}}))
	f.Add(key, []byte("\x01\x02\x00\x00\x00\x00\x00\x3f\xf0"))
	hour := minuteKey(hourNanos, 33)
	hours := appendHours(nil, hour, []Hour{{Load: 33, Start: hourNanos, Minutes: 60, Duty: 5}})
	f.Add(hour, hours[:len(hours)-4])
	f.Add([]byte{}, appendRegisters(nil, []Register{{Load: 3, Given: 1}}))
	f.Add((&span{first: 1, last: 2}).name(), []byte{})
	f.Add([]byte{}, make([]byte, 24))
	f.Fuzz(func(t *testing.T, key, value []byte) {
		if all, err := parseRegisters(value); err == nil {
			again, err := parseRegisters(appendRegisters(nil, all))
			if err != nil || !slices.Equal(appendRegisters(nil, again), appendRegisters(nil, all)) {
				t.Errorf("registers %+v were read again as %+v, %v", all, again, err)
			}
		}
		if s, err := parseName(key); err == nil && !slices.Equal(s.name(), key) {
			t.Errorf("group %+v is % x, was % x", s, s.name(), key)
		}
		p := parser{rest: value}
		for p.rest != nil {
			if _, err := p.record(1, newMemory()); err != nil {
				break
			}
		}
		// Under a checksum that fits, the inside of a minute and an hour is reached.
		if len(key) == 12 {
			value = binary.LittleEndian.AppendUint32(slices.Clone(value), checksum(key, value))
			if all, err := parseMinutes(nil, key, value, anyLoad); err == nil {
				again, err := parseMinutes(nil, key, appendMinutes(nil, key, all), anyLoad)
				for i, m := range all {
					all[i] = m.kept() // a minute of the first layout has more digits
				}
				if err != nil || !sameMinutes(again, all) {
					t.Errorf("minutes %+v were read again as %+v, %v", all, again, err)
				}
			}
			if all, err := parseHours(nil, key, value, anyLoad); err == nil {
				again, err := parseHours(nil, key, appendHours(nil, key, all), anyLoad)
				if err != nil || !slices.Equal(appendHours(nil, key, again), appendHours(nil, key, all)) || len(again) != len(all) {
					t.Errorf("hours %+v were read again as %+v, %v", all, again, err)
				}
			}
		}
	})
}

func sameMinutes(a, b []Minute) bool {
	return slices.EqualFunc(a, b, func(a, b Minute) bool { return minuteBits(a) == minuteBits(b) })
}

// floatsOf lists all floats of a minute.
func floatsOf(m *Minute) (all []*float64) {
	sums, means, rare := m.sums(), m.means(nil), m.rare()
	for _, f := range slices.Concat(sums[:], means[:], rare[:]) {
		all = append(all, f.float)
	}
	for i := range m.Systematic {
		all = append(all, &m.Systematic[i])
	}
	return append(all, &m.Random, &m.Uncertain, &m.Expected, &m.ExpectedError)
}

// minuteBits is a minute as numbers that compare by the bit.
func minuteBits(m Minute) string {
	all := []uint64{uint64(m.Start), uint64(m.Load)}
	for _, f := range floatsOf(&m) {
		all = append(all, math.Float64bits(*f))
	}
	return fmt.Sprintf("%x", all)
}

var anyMinute = rapid.Custom(func(t *rapid.T) Minute {
	m := Minute{Load: rapid.OneOf(rapid.Uint32Range(0, 3), rapid.SampledFrom([]uint32{31, 32, math.MaxUint32})).Draw(t, "load"), Start: rapid.OneOf(rapid.SampledFrom(hardInstants), rapid.Int64Range(-5, 5)).Draw(t, "start")}
	some := rapid.Uint64().Draw(t, "which")
	for i, f := range floatsOf(&m) {
		if some>>i&1 != 0 {
			*f = anyValue.Draw(t, "float")
		}
	}
	return m
})

func TestMinuteRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		want := anyMinute.Draw(t, "minute")
		key := minuteKey(want.Start, want.Load)
		got, err := parseMinutes(nil, key, appendMinutes(nil, key, []Minute{want}), anyLoad)
		if err != nil || !sameMinutes(got, []Minute{want.kept()}) {
			t.Fatalf("%+v, %v; want %+v", got, err, want)
		}
	})
}
