package store

import (
	"encoding/binary"
	"fmt"
	"maps"
	"math"
	"slices"
	"sort"

	bolt "go.etcd.io/bbolt"
)

const (
	// minuteFloats is how many floats a minute record holds.
	minuteFloats = 12

	// loadsAKey is how many loads share a key: those whose numbers are alike but
	// for the remainder by it. With many more, values become so large that bbolt,
	// which keeps two keys and more in each page, leaves pages half empty.
	loadsAKey = 8
)

// floats lists the fields in the order in which they are stored.
func (m *Minute) floats() [minuteFloats]*float64 {
	return [minuteFloats]*float64{
		&m.Measured, &m.Missing, &m.Given, &m.Taken,
		&m.Duty, &m.DutyMin, &m.DutyMax, &m.DutyUncertainty,
		&m.Flow, &m.Inlet, &m.Outlet, &m.Pressure,
	}
}

// minuteLike tells of which floats of a minute are alike.
var minuteLike = forerunners{-1, -1, -1, -1, -1, 4, 4, -1, -1, -1, 9, -1}

// minuteKey is the key of a load's minute, and of its hour likewise.
func minuteKey(start int64, load uint32) []byte {
	return binary.BigEndian.AppendUint32(timeKey(start), load/loadsAKey)
}

// timeKey orders as t does.
func timeKey(t int64) []byte { return binary.BigEndian.AppendUint64(nil, uint64(t)^1<<63) }

// appendMinutes writes the minutes of one key, sorted by load.
func appendMinutes(b []byte, key []byte, all []Minute) []byte {
	begin := len(b)
	for _, m := range all {
		fields := m.floats()
		b = appendFloats(append(b, byte(m.Load%loadsAKey)), fields[:], minuteLike)
	}
	return binary.LittleEndian.AppendUint32(b, checksum(key, b[begin:]))
}

func anyLoad(uint32) bool { return true }

// parseMinutes adds to all the minutes under one key, of the loads that are wanted.
func parseMinutes(all []Minute, key, value []byte, want func(load uint32) bool) ([]Minute, error) {
	n := len(value) - 4
	if len(key) != 12 || n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(key, value[:n]) {
		return all, errRecord
	}
	start := int64(binary.BigEndian.Uint64(key) ^ 1<<63)
	block := binary.BigEndian.Uint32(key[8:])
	for p := (parser{rest: value[:n]}); len(p.rest) > 0; {
		rest := p.take(1)[0]
		load := block*loadsAKey + uint32(rest)
		counts, body := p.floats(minuteFloats)
		if p.bad || rest >= loadsAKey || block > math.MaxUint32/loadsAKey {
			return all, errRecord
		}
		if want(load) {
			m := Minute{Load: load, Start: start}
			if fields := m.floats(); !parseFloats(counts, body, fields[:], minuteLike) {
				return all, errRecord
			}
			all = append(all, m)
		}
	}
	return all, nil
}

// putMinutes replaces the minutes of the same load and start.
func putMinutes(tx *bolt.Tx, changed []Minute) error {
	bucket := tx.Bucket(bucketMinutes)
	bucket.FillPercent = appendFill
	byKey := map[string][]Minute{}
	for _, m := range changed {
		key := minuteKey(m.Start, m.Load)
		all, ok := byKey[string(key)]
		if !ok {
			if old := bucket.Get(key); old != nil {
				var err error
				if all, err = parseMinutes(nil, key, old, anyLoad); err != nil {
					return fmt.Errorf("%w: minute with key % x: %w", ErrDamaged, key, err)
				}
			}
		}
		i := sort.Search(len(all), func(i int) bool { return all[i].Load >= m.Load })
		if i == len(all) || all[i].Load != m.Load {
			all = slices.Insert(all, i, m)
		}
		all[i] = m
		byKey[string(key)] = all
	}
	for _, key := range slices.Sorted(maps.Keys(byKey)) {
		if err := bucket.Put([]byte(key), appendMinutes(nil, []byte(key), byKey[key])); err != nil {
			return err
		}
	}
	return nil
}
