package store

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// anyColumnOfMinutes are minutes of one load by start, at a minute's distance or at any.
var anyColumnOfMinutes = rapid.Custom(func(t *rapid.T) []Minute {
	all := rapid.SliceOfNDistinct(anyMinute, 1, 40, func(m Minute) int64 { return m.Start }).Draw(t, "minutes")
	regular := rapid.Bool().Draw(t, "regular")
	slices.SortFunc(all, byStart)
	for i := range all {
		all[i].Load = 7
		if regular {
			all[i].Start = int64(i) * 60 * second
		}
		if rapid.IntRange(0, 9).Draw(t, "as it is") > 0 { // otherwise as one of the first layout, with more digits
			all[i] = all[i].kept()
		}
	}
	return all
})

// TestMinuteColumnRoundTrip writes minutes of any bits as a column and reads the same.
func TestMinuteColumnRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		want := anyColumnOfMinutes.Draw(t, "minutes")
		origin := anyInstant.Draw(t, "origin")
		got, err := parseMinuteColumn(nil, appendMinuteColumn(nil, want, origin), uint64(len(want)), origin, 7)
		if err != nil || !sameMinutes(got, want) {
			t.Fatalf("%+v, %v; want %+v", got, err, want)
		}
	})
}

// TestFigures sets each float of a minute alone: each is a figure, and no figure is another.
func TestFigures(t *testing.T) {
	var m Minute
	fields := floatsOf(&m)
	if len(fields) != len(figures) {
		t.Fatalf("%d figures for %d floats", len(figures), len(fields))
	}
	seen := map[*float64]bool{}
	for _, f := range figures {
		at := f.of(&m)
		if !slices.Contains(fields, at) || seen[at] {
			t.Errorf("a figure is no float of a minute, or one twice")
		}
		seen[at] = true
		if len(f.likes) >= 1<<likeBits {
			t.Errorf("%d likes cannot be told", len(f.likes))
		}
	}
}

const blockMinutes = 8

// blockOfMinutes is a block of so many minutes of loads 16 to 18 each, and its key.
func blockOfMinutes() (key, block []byte, want map[uint32][]Minute) {
	const start = 80_000 * sealedSpan
	rng := rand.New(rand.NewPCG(1, 4))
	key, want = minuteKey(start, 16), map[uint32][]Minute{}
	w := newBlockWriter(key)
	for load := uint32(16); load <= 18; load++ {
		for i := range int64(blockMinutes) {
			want[load] = append(want[load], measured(rng, load, start+i*60*second).kept())
		}
		w.add(load, blockMinutes, appendMinuteColumn(nil, want[load], start))
	}
	return key, w.block(), want
}

// TestMinuteBlock changes each byte of a block: loads that it does not matter to come as they
// were, others not at all. Under another key nothing comes.
func TestMinuteBlock(t *testing.T) {
	key, block, want := blockOfMinutes()
	if got, err := parseMinuteBlock(nil, key, block, anyLoad); err != nil || len(got) != 3*blockMinutes {
		t.Fatalf("%d minutes, %v", len(got), err)
	}
	for i := range block {
		b := slices.Clone(block)
		b[i] ^= 1 << (i % 8)
		whole := 0
		for load, minutes := range want {
			got, err := parseMinuteBlock(nil, key, b, func(l uint32) bool { return l == load })
			switch {
			case err == nil && sameMinutes(got, minutes):
				whole++
			case err == nil || len(got) > 0:
				t.Fatalf("byte %d changed: load %d has %d minutes, %v", i, load, len(got), err)
			}
		}
		if whole == len(want) || whole != 0 && whole != len(want)-1 {
			t.Fatalf("byte %d changed: %d loads of %d can be read", i, whole, len(want))
		}
	}
	for _, other := range [][]byte{minuteKey(80_001*sealedSpan, 16), minuteKey(80_000*sealedSpan, 24), key[:8]} {
		if got, err := parseMinuteBlock(nil, other, block, anyLoad); err == nil || len(got) > 0 {
			t.Errorf("under the key % x there are %d minutes, %v", other, len(got), err)
		}
	}
}

// FuzzMinuteColumn reads any bytes as a column of minutes: nothing may panic or take more
// memory than a column has, and what is read is written and read again as the same.
func FuzzMinuteColumn(f *testing.F) {
	_, _, want := blockOfMinutes()
	f.Add(appendMinuteColumn(nil, want[17], 0), uint64(blockMinutes), int64(0))
	f.Add(appendMinuteColumn(nil, []Minute{{Start: 5, Load: 7}}, 5), uint64(1), int64(5))
	f.Add([]byte{9, 0}, uint64(1<<60), int64(math.MinInt64))
	f.Fuzz(func(t *testing.T, column []byte, count uint64, origin int64) {
		got, err := parseMinuteColumn(nil, column, count, origin, 7)
		if err != nil || len(got) == 0 {
			return
		}
		again, err := parseMinuteColumn(nil, appendMinuteColumn(nil, got, origin), count, origin, 7)
		if err != nil || !sameMinutes(again, got) {
			t.Errorf("%+v was read again as %+v, %v", got, again, err)
		}
	})
}

// FuzzMinuteBlock gives any bytes as a block whose head has a checksum that fits.
func FuzzMinuteBlock(f *testing.F) {
	key, block, _ := blockOfMinutes()
	f.Add(key, block[:60], block[60:])
	f.Add(key, []byte{1, 16, 1, 4}, []byte{})
	f.Fuzz(func(t *testing.T, key, head, body []byte) {
		block := binary.LittleEndian.AppendUint32(slices.Clone(head), checksum(key, head))
		got, _ := parseMinuteBlock(nil, key, append(block, body...), anyLoad)
		for _, m := range got {
			if m.Load/loadsAKey != binary.BigEndian.Uint32(key[8:]) {
				t.Errorf("load %d under the key % x", m.Load, key)
			}
		}
	})
}
