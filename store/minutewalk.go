package store

import (
	"encoding/binary"
	"maps"
	"math"
	"slices"

	bolt "go.etcd.io/bbolt"
)

// minuteWalk goes through all minutes, in stretches of an hour or, where there are blocks, of
// what is left of their span, since all of a block must be read for any part of it.
type minuteWalk struct {
	store      *Store
	tx         *bolt.Tx
	cursor     *bolt.Cursor
	key, value []byte // the next under a key of its own; nil at the end
	at         int64  // all before is passed
	end        bool   // nothing comes after
	blocks     *bolt.Cursor
	span       int64 // the next that has blocks, at or after the one that holds at
	sealed     bool  // there is one

	passed int     // keys, or as many minutes as they hold on average
	torn   []error // what could not be read
}

func (s *Store) newMinuteWalk(tx *bolt.Tx, from int64) *minuteWalk {
	w := &minuteWalk{store: s, tx: tx, cursor: tx.Bucket(bucketMinutes).Cursor(), blocks: minuteBlocks(tx).Cursor()}
	w.to(from)
	return w
}

// to goes on at an instant.
func (w *minuteWalk) to(at int64) {
	w.at = at
	if w.key == nil || keyTime(w.key) < at {
		w.key, w.value = w.cursor.Seek(minuteKey(at, 0))
	}
	k, _ := w.blocks.Seek(minuteKey(spanOf(at), 0))
	if w.sealed = len(k) == 12; w.sealed {
		w.span = keyTime(k)
	}
	switch {
	case w.key == nil && !w.sealed:
		w.end = true
	case w.key == nil:
		w.at = max(at, w.span)
	case !w.sealed:
		w.at = keyTime(w.key)
	default:
		w.at = min(keyTime(w.key), max(at, w.span))
	}
}

// start is that of the hour with which the next stretch begins.
func (w *minuteWalk) start() int64 { return hourOf(w.at) }

// stretch calls f with the minutes of the next stretch of the loads that are wanted, those of
// each load by start, and torn with a load of each key of which some cannot be read. A
// stretch does not go beyond the hours before until.
func (w *minuteWalk) stretch(until int64, want func(load uint32) bool, f func(*Minute), torn func(load uint32)) {
	from, to := w.at, hourAfter(w.start())
	if w.sealed && spanOf(from) == w.span {
		to = max(to, min(until, spanAfter(w.span)))
		w.both(from, lastBefore(to), want, f, torn)
	} else {
		w.keys(lastBefore(to), want, f, torn)
	}
	if to == math.MaxInt64 {
		w.end = true
		return
	}
	w.to(to)
}

// keys is stretch where nothing is sealed.
func (w *minuteWalk) keys(last int64, want func(load uint32) bool, f func(*Minute), torn func(load uint32)) {
	var found []Minute
	for ; w.key != nil && keyTime(w.key) <= last; w.key, w.value = w.cursor.Next() {
		w.passed++
		if !wantsAny(w.key, want) {
			continue
		}
		var err error
		if found, err = parseMinutes(found[:0], w.key, w.value, want); err != nil {
			w.tell(torn, firstLoad(w.key), w.store.damage("minutes", w.key, err))
		}
		for i := range found {
			f(&found[i])
		}
	}
}

// both is stretch within a span of blocks.
func (w *minuteWalk) both(from, last int64, want func(load uint32) bool, f func(*Minute), torn func(load uint32)) {
	loads := map[uint32]bool{} // the first under each key
	for _, k := range sealedKeys(w.tx, w.span) {
		loads[firstLoad(k)] = wantsAny(k, want)
	}
	for ; w.key != nil && keyTime(w.key) <= last; w.key, w.value = w.cursor.Next() {
		w.passed++
		loads[firstLoad(w.key)] = wantsAny(w.key, want)
	}
	var found []Minute
	for _, load := range slices.Sorted(maps.Keys(loads)) {
		if !loads[load] {
			continue
		}
		var faults []error
		found, faults = w.store.spanMinutes(w.tx, found[:0], load, from, last, want, ofLoads(want))
		w.tell(torn, load, faults...)
		for i := range found {
			f(&found[i])
		}
		w.passed += len(found) / loadsAKey
	}
}

func (w *minuteWalk) tell(torn func(load uint32), load uint32, faults ...error) {
	if len(faults) > 0 {
		torn(load)
	}
	w.torn = append(w.torn, faults...)
}

// firstLoad is the first load that a key of minutes may hold.
func firstLoad(key []byte) uint32 {
	if len(key) != 12 {
		return 0
	}
	return binary.BigEndian.Uint32(key[8:]) * loadsAKey
}

// wantsAny tells whether any load is wanted that the key of minutes may hold.
func wantsAny(key []byte, want func(load uint32) bool) bool {
	if len(key) != 12 {
		return true
	}
	first := firstLoad(key)
	for load := first; load-first < loadsAKey; load++ {
		if want(load) {
			return true
		}
	}
	return false
}
