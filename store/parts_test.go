package store

import (
	"encoding/binary"
	"math"
	"math/bits"
	"math/rand/v2"
	"slices"
	"strconv"
	"testing"

	"pgregory.net/rapid"
)

// TestPartPrecision tells parts of every size that can be told to a part in a thousand,
// and others as what [Minute] says.
func TestPartPrecision(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	worst := 0.0
	for range 200_000 {
		x := math.Exp2(-16+62.9*rng.Float64()) * float64(1-2*rng.IntN(2))
		got := roundPart(x)
		worst = max(worst, math.Abs(got/x-1))
		if again := roundPart(got); again != got {
			t.Fatalf("%v is kept as %v, and that as %v", x, got, again)
		}
	}
	if worst > 1.0/1000 || worst < 1.0/2000 {
		t.Errorf("parts are kept to %v", worst)
	}
	for x, want := range map[float64]float64{0: 0, 1e-6: 0, -1e-6: 0, 1e15: math.Inf(1), -1e15: math.Inf(-1), math.Inf(-1): math.Inf(-1)} {
		if got := roundPart(x); got != want {
			t.Errorf("%v is kept as %v, want %v", x, got, want)
		}
	}
	if got := roundPart(math.NaN()); !math.IsInf(got, 0) {
		t.Errorf("NaN is kept as %v", got)
	}
}

// TestMeansAreSingle keeps means to a part in ten million, and the decimals that people
// write to the digit.
func TestMeansAreSingle(t *testing.T) {
	for _, x := range []float64{353.15, 101_325, 643_212.5, 3.801, 0.01, -12.75, 1.2e9, 0} {
		m := Minute{Inlet: x}.kept()
		if math.Abs(m.Inlet-x) > math.Abs(x)/1e7 || strconv.FormatFloat(m.Inlet, 'g', -1, 32) != strconv.FormatFloat(x, 'g', -1, 64) {
			t.Errorf("%v is kept as %v", x, m.Inlet)
		}
	}
}

// appendFirst writes a minute as the first layout had it.
func appendFirst(b []byte, m Minute) []byte {
	b = append(b, byte(m.Load%loadsAKey))
	begin := len(b)
	b = append(b, make([]byte, 6)...)
	sums, means := m.sums(), m.means(nil)
	for i, f := range slices.Concat(sums[:], means[:]) {
		f.single = false
		word := f.word(*f.float) ^ f.forerunner()
		count := 8 - bits.TrailingZeros64(word)/8
		b[begin+i/2] |= byte(count) << (4 * (i % 2))
		b = append(b, binary.BigEndian.AppendUint64(nil, word)[:count]...)
	}
	return b
}

// TestFirstLayoutMinutes reads minutes of the first layout, also beside others under one
// key: of what was told then all bits are there, and the rest is zero.
func TestFirstLayoutMinutes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		old, beside := anyMinute.Draw(t, "old"), anyMinute.Draw(t, "beside")
		old.Load, beside.Load, beside.Start = 3, 4, old.Start
		key := minuteKey(old.Start, old.Load)
		value := appendMinute(appendFirst(nil, old), beside.kept())
		value = binary.LittleEndian.AppendUint32(value, checksum(key, value))
		got, err := parseMinutes(nil, key, value, anyLoad)
		for _, f := range old.rare() {
			*f.float = 0
		}
		old.Systematic, old.Random, old.Uncertain = [Shares]float64{}, 0, 0
		old.Expected, old.ExpectedError = 0, 0
		if want := []Minute{old, beside.kept()}; err != nil || !sameMinutes(got, want) {
			t.Fatalf("%+v, %v; want %+v", got, err, want)
		}
	})
}

// TestShapes reads minutes and hours whose first byte says what no writer says.
func TestShapes(t *testing.T) {
	key := minuteKey(hourNanos, 0)
	for name, b := range map[string][]byte{
		"minute": appendMinutes(nil, key, []Minute{{Start: hourNanos, Duty: 5}}),
		"hour":   appendHours(nil, key, []Hour{{Start: hourNanos, Duty: 5}}),
	} {
		good := b[0]
		for shape := range 256 {
			b = slices.Clone(b[:len(b)-4])
			b[0] = byte(shape)
			b = binary.LittleEndian.AppendUint32(b, checksum(key, b))
			parse := func(b []byte) (err error) {
				if name == "minute" {
					_, err = parseMinutes(nil, key, b, anyLoad)
				} else {
					_, err = parseHours(nil, key, b, anyLoad)
				}
				return err
			}
			first := name == "minute" && shape < loadsAKey // which the same bytes may be as well
			if err := parse(b); !first && (err == nil) != (byte(shape)&^7 == good&^7) {
				t.Errorf("%s with first byte %#x: %v", name, shape, err)
			}
		}
	}
}

// TestUntoldParts sums minutes with and without parts: what the parts leave out is told
// apart.
func TestUntoldParts(t *testing.T) {
	s := newStore(t, Options{})
	const start = 480_000 * hourNanos
	commit(t, s, Batch{Minutes: []Minute{
		{Load: 1, Start: start, Measured: 60, DutyUncertainty: 2},
		{Load: 1, Start: start + 60*second, Measured: 60, DutyUncertainty: 3, Systematic: [Shares]float64{1: 180}},
		{Load: 1, Start: start + hourNanos},
	}})
	found, _ := hourOfLoad(s, 1, start)
	if len(found) != 1 || found[0].HeatUncertainty != 300 || found[0].Untold != 120 || found[0].Systematic[1] != 180 {
		t.Errorf("the hour is %+v", found)
	}
}
