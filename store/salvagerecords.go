package store

import (
	"bytes"
	"cmp"
	"encoding/binary"
	"log/slog"
	"maps"
	"slices"

	bolt "go.etcd.io/bbolt"
)

func discard() *slog.Logger { return slog.New(slog.DiscardHandler) }

// value returns the first that any state has under a key of a bucket and that is good.
func (z *salvage) value(bucket string, key []byte, good func([]byte) bool) []byte {
	for _, t := range z.trees {
		if v, ok := t.values[bucket+"/"+string(key)]; ok && good(v) {
			return v
		}
	}
	return nil
}

// hourMark is the mark of the hours, or one by which any may have lost minutes.
func (z *salvage) hourMark(tx *bolt.Tx) hourMark {
	v := z.value("meta", keyHours, func(v []byte) bool {
		return len(v) == 20 && binary.LittleEndian.Uint32(v[16:]) == checksum(keyHours, v[:16])
	})
	if v == nil {
		m, _ := readHourMark(tx)
		if first, ok := firstMinute(tx); ok {
			m.trimmed = hourAfter(hourOf(first))
		}
		return m
	}
	return hourMark{int64(binary.LittleEndian.Uint64(v)), int64(binary.LittleEndian.Uint64(v[8:]))}
}

// refit writes groups and blocks under new numbers.
type refit struct {
	raw        *rawFile
	tx         *bolt.Tx
	report     *Report
	next       uint64 // new number of the next record
	passed     uint64 // old number of the last record that was taken or is lost
	latest     int64  // of what was taken
	checkpoint uint64 // old number
	before     uint64 // how many records that were taken it stands for
	lostAfter  bool   // one that it does not stand for is lost
	blockLast  bool
	tags       map[uint32]bool // that were met
}

// records writes the groups, blocks, names, registers and the state.
func (z *salvage) records() error {
	r := &refit{raw: z.raw, report: z.report, next: 1, tags: map[uint32]bool{}}
	state := z.value("state", keyCheckpoint, func(v []byte) bool {
		n := len(v) - 4
		return n >= 9 && v[0] <= 1 && binary.LittleEndian.Uint32(v[n:]) == checksum(keyCheckpoint, v[:n])
	})
	if state != nil {
		r.checkpoint = binary.LittleEndian.Uint64(state[1:])
	}
	r.lostAfter = z.unsure
	for _, name := range z.chosen() {
		var from [][]byte
		for _, of := range z.groups {
			from = append(from, of[name]...)
		}
		err := z.db.Update(func(tx *bolt.Tx) error {
			r.tx = tx
			return r.candidate([]byte(name), from)
		})
		if err != nil {
			return err
		}
	}
	return z.db.Update(func(tx *bolt.Tx) error {
		r.tx = tx
		if err := r.openGroup(z.trees); err != nil {
			return err
		}
		return z.rest(r, state)
	})
}

// chosen returns the names of groups and blocks that do not overlap, in order: those of the
// newest state, and others only for what these leave out.
func (z *salvage) chosen() []string {
	var all []string
	number := func(name string) uint64 { return binary.BigEndian.Uint64([]byte(name)) }
	for _, of := range z.groups {
		for _, name := range slices.Sorted(maps.Keys(of)) {
			s, err := parseName([]byte(name))
			i, taken := slices.BinarySearchFunc(all, s.first, func(name string, first uint64) int { return cmp.Compare(number(name), first) })
			if err != nil || taken || s.last < s.first || i < len(all) && number(all[i]) <= s.last {
				continue
			}
			if i > 0 {
				if before, err := parseName([]byte(all[i-1])); err != nil || before.last >= s.first {
					continue
				}
			}
			all = slices.Insert(all, i, name)
		}
	}
	return all
}

// candidate writes a group or block from wherever it can be read best.
func (r *refit) candidate(name []byte, from [][]byte) error {
	s, err := parseName(name)
	if err != nil {
		return err
	}
	r.gap(s.first, r.latest, s.earliest)
	r.passed = s.last
	var best []byte
	sealed, most := false, int64(-1)
	for _, header := range from {
		b := r.raw.newWalk().records(header)
		kept := keptOfBlock(name, b)
		isBlock := kept >= 0
		if !isBlock {
			kept = keptOfGroup(s, b)
		}
		if kept > most {
			best, sealed, most = b, isBlock, kept
		}
		if kept == int64(s.readings) && b != nil {
			break
		}
	}
	if sealed {
		return r.block(s, name, best)
	}
	return r.group(s, best)
}

// gap tells that the records before first are lost.
func (r *refit) gap(first uint64, from, to int64) {
	switch {
	case r.passed == 0:
		r.report.Earlier = int64(first - 1)
	case first > r.passed+1:
		r.lose(r.passed+1, first-1, from, to)
	}
}

// lose counts records by their old numbers.
func (r *refit) lose(first, last uint64, from, to int64) {
	r.report.LostBatches.add(int64(last-first+1), min(from, to), max(from, to))
	r.lostAfter = r.lostAfter || last > r.checkpoint
}

// keptOfBlock counts the readings of a block that can be read, -1 where none can.
func keptOfBlock(name, block []byte) int64 {
	p := parser{rest: block}
	all, err := p.places(headKey(name))
	if err != nil || block == nil {
		return -1
	}
	kept := int64(0)
	for _, at := range all {
		if p.column(headKey(name), at) != nil {
			kept += int64(at.count)
		}
	}
	return kept
}

func keptOfGroup(s span, b []byte) (kept int64) {
	c := chunk{span: s, records: b}
	_ = c.each(func(_ uint64, beats []Beat) bool { // what cannot be read is counted by the caller
		for _, beat := range beats {
			kept += int64(len(beat.Readings))
		}
		return true
	})
	return kept
}

// block writes the columns of a block that can be read.
func (r *refit) block(old span, name, block []byte) error {
	s := old
	s.first, s.last = r.next, r.next+old.last-old.first
	p := parser{rest: block}
	all, err := p.places(headKey(name))
	if err != nil {
		return err
	}
	s.readings = uint32(keptOfBlock(name, block))
	w := newBlockWriter(headKey(s.name()))
	for _, at := range all {
		if b := p.column(headKey(name), at); b != nil {
			w.add(at.tag, at.count, b)
			r.tags[at.tag] = true
		}
	}
	r.report.LostReadings.add(int64(old.readings)-int64(s.readings), old.earliest, old.latest)
	r.took(s, old.last)
	r.blockLast = true
	return putRecords(r.tx.Bucket(bucketSealed), s.name(), w.block())
}

// took counts what is written.
func (r *refit) took(s span, oldLast uint64) {
	n := int64(s.last - s.first + 1)
	r.report.Batches.add(n, s.earliest, s.latest)
	r.report.Readings.add(int64(s.readings), s.earliest, s.latest)
	r.next, r.latest = s.last+1, s.latest
	if oldLast <= r.checkpoint {
		r.before = s.last
	}
}

// group writes the records of a group up to the first that cannot be read.
func (r *refit) group(old span, records []byte) error {
	g := newOpenGroup(r.next)
	last := old.first - 1
	c := chunk{span: old, records: records}
	_ = c.each(func(seq uint64, beats []Beat) bool { // what cannot be read is counted below
		r.add(g, beats)
		if last = seq; seq <= r.checkpoint {
			r.before = g.last
		}
		return true
	})
	if last < old.last {
		r.lose(last+1, old.last, old.earliest, old.latest)
	}
	r.report.LostReadings.add(max(0, int64(old.readings)-int64(g.readings)), old.earliest, old.latest)
	return r.put(g, last)
}

func (r *refit) add(g *openGroup, beats []Beat) {
	g.tail = appendRecord(g.tail, g.last+1, beats, g.memory)
	g.span.add(beats)
	for _, b := range beats {
		for _, x := range b.Readings {
			r.tags[x.Tag] = true
		}
	}
}

func (r *refit) put(g *openGroup, oldLast uint64) error {
	if g.last < g.first {
		return nil
	}
	r.took(g.span, oldLast)
	r.blockLast = false
	return putRecords(r.tx.Bucket(bucketJournal), g.name(), g.tail)
}

// openGroup writes what the open group holds in the state in which most of it can be read.
// Where another state tells of records after these, one is counted as lost.
func (r *refit) openGroup(trees []*salvagedTree) error {
	var best *openGroup
	told := uint64(0) // number of the last record that any state tells of
	for _, t := range trees {
		g := newOpenGroup(r.passed + 1)
		var b []byte
		for i, f := range t.recent {
			if t.first[i] > r.passed {
				if len(b) == 0 {
					g = newOpenGroup(t.first[i])
				}
				b = append(b, r.raw.newWalk().records(f)...)
			}
		}
		for i := range tails {
			b = append(b, t.values[string(bucketTail(i))+"/"+string(keyRecords)]...)
		}
		told = max(told, g.last+recordsIn(b))
		_ = g.replay(b) // up to what cannot be read
		g.tail = b
		if best == nil || g.last > best.last {
			best = g
		}
	}
	if best == nil {
		r.lostAfter = true
		return nil
	}
	if len(best.tail) > 0 {
		r.gap(best.first, r.latest, r.latest)
	}
	g := newOpenGroup(r.next)
	p, m := parser{rest: best.tail}, newMemory()
	for seq := best.first; len(p.rest) > 0; seq++ {
		beats, err := p.record(seq, m)
		if err != nil {
			break
		}
		r.add(g, beats)
		if seq <= r.checkpoint {
			r.before = g.last
		}
	}
	if told > best.last {
		r.lose(best.last+1, best.last+1, r.latest, max(r.latest, g.latest)) // and any that follow
		r.lostAfter = true
	}
	r.lostAfter = r.lostAfter || best.last < r.checkpoint
	return r.put(g, best.last)
}

// recordsIn counts records by their lengths, whatever is in them.
func recordsIn(b []byte) (n uint64) {
	for p := (parser{rest: b}); len(p.rest) > 0 && !p.bad; n++ {
		p.take(p.uvarint())
		p.take(4)
	}
	return n
}

// rest writes names, registers, and the state if the records that follow it are whole.
func (z *salvage) rest(r *refit, state []byte) error {
	names := z.value("names", keyNames, func(v []byte) bool { _, err := parseNames(v); return err == nil })
	if names == nil {
		names = z.names
	}
	z.report.Names = names != nil
	if names == nil {
		names = z.reserved(r)
	}
	registers := z.registers()
	z.report.Registers = registers != nil
	if registers == nil {
		registers = appendRegisters(nil, nil)
	}
	if r.blockLast {
		g := newOpenGroup(r.next) // what follows a block is a group, whose beats can be read
		r.add(g, []Beat{{Through: r.latest}})
		if err := putRecords(r.tx.Bucket(bucketJournal), g.name(), g.tail); err != nil {
			return err
		}
		r.next, r.before = g.last+1, g.last
	}
	mark := checkpoint{set: false, seq: r.next - 1}
	z.report.State = state != nil && (!r.lostAfter || r.checkpoint == 0)
	if z.report.State && state[0] == 1 {
		mark = checkpoint{true, r.before, state[9 : len(state)-4]}
	} else if z.report.State {
		mark.seq = 0
	}
	if err := putCheckpoint(r.tx, mark); err != nil {
		return err
	}
	if err := r.tx.Bucket(bucketNames).Put(keyNames, bytes.Clone(names)); err != nil {
		return err
	}
	return r.tx.Bucket(bucketRegisters).Put(keyRegisters, bytes.Clone(registers))
}

// reserved are names in the place of lost ones, so that no number is given again to
// something else.
func (z *salvage) reserved(r *refit) []byte {
	greatest := uint32(0)
	for tag := range r.tags {
		greatest = max(greatest, tag)
	}
	c := r.tx.Bucket(bucketMinutes).Cursor()
	for k, v := c.Seek(keyFirstMinute); k != nil; k, v = c.Next() {
		all, _ := parseMinutes(nil, k, v, anyLoad)
		for _, m := range all {
			greatest = max(greatest, m.Load)
		}
	}
	blocks := minuteBlocks(r.tx)
	c = blocks.Cursor()
	for k, _ := c.First(); k != nil; k, _ = c.Next() {
		all, _, _ := minutePlaces(k, blocks.Bucket(k).Get(keyRecords)) // as it was written
		for _, at := range all {
			greatest = max(greatest, at.tag)
		}
	}
	c = r.tx.Bucket(bucketHours).Cursor()
	for k, v := c.Seek(keyFirstMinute); k != nil; k, v = c.Next() {
		all, _ := parseHours(nil, k, v, anyLoad)
		for _, h := range all {
			greatest = max(greatest, h.Load)
		}
	}
	registers, _ := parseRegisters(z.registers())
	for _, x := range registers {
		greatest = max(greatest, x.Load)
	}
	return appendNames(nil, []named{{greatest, "lost", "names up to this number"}})
}

func (z *salvage) registers() []byte {
	var all []byte
	for _, floats := range []int{earlyRegisterFloats, firstRegisterFloats} {
		z.value("registers", keyRegisters, func(v []byte) bool {
			known, err := parseRegistersOf(v, floats)
			if err == nil && all == nil {
				all = appendRegisters(nil, known)
			}
			return err == nil
		})
	}
	return all
}
