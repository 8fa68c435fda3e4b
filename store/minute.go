package store

import (
	"encoding/binary"
	"math"
	"math/bits"
)

const (
	// loadsAKey is how many loads share a key: those whose numbers are alike but
	// for the remainder by it. With many more, values become so large that bbolt,
	// which keeps two keys and more in each page, leaves pages half empty.
	loadsAKey = 8

	// How many floats a minute has of each kind.
	minuteSums  = 4
	minuteMeans = 8
	minuteRare  = 7

	expectedFloats = 2 // of a minute, or of an hour

	// What the first byte of a record holds beside the remainder of the load's number.
	shapeShort    = 1 << 3 // a minute of this layout, not of the first
	shapeRare     = 1 << 4 // floats follow that are 0 in most records
	shapeParts    = 1 << 5 // the parts of the uncertainty follow
	shapeDoubt    = 1 << 6 // Uncertain follows
	shapeExpected = 1 << 7 // Expected and ExpectedError follow
)

// sums lists the fields that are told in full.
func (m *Minute) sums() [minuteSums]told {
	return [...]told{{float: &m.Measured}, {float: &m.Missing}, {float: &m.Given}, {float: &m.Taken}}
}

// means lists the fields of which a float32 is told, all of them after Duty, which
// resembles duty.
func (m *Minute) means(duty *float64) [minuteMeans]told {
	return [...]told{{&m.Duty, duty, true}, {&m.DutyMin, &m.Duty, true}, {&m.DutyMax, &m.Duty, true}, {&m.DutyUncertainty, nil, true},
		{&m.Flow, nil, true}, {&m.Inlet, nil, true}, {&m.Outlet, &m.Inlet, true}, {&m.Pressure, nil, true}}
}

// rare lists the fields that are 0 in most minutes.
func (m *Minute) rare() [minuteRare]told {
	return [...]told{{float: &m.Bridged}, {float: &m.BridgedGiven}, {float: &m.BridgedTaken}, {float: &m.Latent},
		{float: &m.Witness}, {float: &m.Compared}, {&m.Content, nil, true}}
}

// uncertain lists the field that shapeDoubt tells of.
func (m *Minute) uncertain() [1]told { return [1]told{{float: &m.Uncertain, like: &m.Measured}} }

// expected lists the fields that shapeExpected tells of.
func (m *Minute) expected() [expectedFloats]told {
	return [...]told{{&m.Expected, nil, true}, {&m.ExpectedError, nil, true}}
}

func (m *Minute) shares() shares { return shares{&m.Systematic, &m.Random} }

// kept returns what of m is kept.
func (m Minute) kept() Minute {
	means, rare, expected := m.means(nil), m.rare(), m.expected()
	keep(means[:])
	keep(rare[:])
	keep(expected[:])
	for i, x := range m.Systematic {
		m.Systematic[i] = roundPart(x)
	}
	root := roundPart(math.Sqrt(m.Random))
	m.Random = root * root
	return m
}

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
		b = appendMinute(b, m.kept())
	}
	return binary.LittleEndian.AppendUint32(b, checksum(key, b[begin:]))
}

func appendMinute(b []byte, m Minute) []byte {
	shape := len(b)
	b = append(b, byte(m.Load%loadsAKey)|shapeShort)
	sums, rare := m.sums(), m.rare()
	b = appendFloats(b, sums[:])
	foretold := foretoldDuty(m.Given, m.Taken, m.Measured)
	means := m.means(&foretold)
	b = appendFloats(b, means[:])
	if !allZero(rare[:]) {
		b[shape] |= shapeRare
		b = appendFloats(b, rare[:])
	}
	m.Random = math.Sqrt(m.Random)
	if which := m.shares().present(); which != 0 {
		b[shape] |= shapeParts
		b = binary.AppendUvarint(b, which)
		for _, f := range m.shares().of(which) {
			code, _ := partCode(*f.float)
			b = binary.LittleEndian.AppendUint16(b, code)
		}
	}
	if doubt := m.uncertain(); !allZero(doubt[:]) {
		b[shape] |= shapeDoubt
		b = appendFloats(b, doubt[:])
	}
	if expected := m.expected(); !allZero(expected[:]) {
		b[shape] |= shapeExpected
		b = appendFloats(b, expected[:])
	}
	return b
}

func anyLoad(uint32) bool { return true }

// recordsOf checks the key and the value of minutes or hours, and returns the first load
// that the key may hold and a parser of the records. It is not ok where the checksum
// does not fit.
func recordsOf(key, value []byte) (first uint32, p parser, ok bool) {
	n := len(value) - 4
	if len(key) != 12 || n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(key, value[:n]) {
		return 0, p, false
	}
	block := binary.BigEndian.Uint32(key[8:])
	return block * loadsAKey, parser{rest: value[:n]}, block <= math.MaxUint32/loadsAKey
}

// parseMinutes adds to all the minutes under one key, of the loads that are wanted.
func parseMinutes(all []Minute, key, value []byte, want func(load uint32) bool) ([]Minute, error) {
	first, p, ok := recordsOf(key, value)
	if !ok {
		return all, errRecord
	}
	for len(p.rest) > 0 {
		all = append(all, Minute{Start: keyTime(key), Load: first})
		m := &all[len(all)-1]
		p.minute(m, want)
		if p.bad || !want(m.Load) {
			all = all[:len(all)-1]
		}
		if p.bad {
			return all, errRecord
		}
	}
	return all, nil
}

// minute takes a minute off the front, and reads it if its load is wanted. m has the
// number of the first load of its key.
func (p *parser) minute(m *Minute, want func(load uint32) bool) {
	shape := p.take(1)[0]
	m.Load += uint32(shape % loadsAKey)
	if shape&shapeShort == 0 {
		p.firstMinute(m, shape)
		return
	}
	sums, means := p.floats(minuteSums), p.floats(minuteMeans)
	var rare, doubt, expected coded
	if shape&shapeRare != 0 {
		rare = p.floats(minuteRare)
	}
	var which uint64
	var parts []byte
	if shape&shapeParts != 0 {
		which = p.which()
		parts = p.take(2 * uint64(bits.OnesCount64(which)))
	}
	if shape&shapeDoubt != 0 {
		doubt = p.floats(1)
	}
	if shape&shapeExpected != 0 {
		expected = p.floats(expectedFloats)
	}
	if p.bad || !want(m.Load) {
		return
	}
	sumFields := m.sums()
	sums.read(sumFields[:])
	foretold := foretoldDuty(m.Given, m.Taken, m.Measured)
	meanFields := m.means(&foretold)
	means.read(meanFields[:])
	if shape&shapeRare != 0 {
		rareFields := m.rare()
		rare.read(rareFields[:])
	}
	if shape&shapeDoubt != 0 {
		doubtField := m.uncertain()
		doubt.read(doubtField[:])
	}
	if shape&shapeExpected != 0 {
		expectedFields := m.expected()
		expected.read(expectedFields[:])
	}
	for i, f := range m.shares().of(which) {
		*f.float = partValue(binary.LittleEndian.Uint16(parts[2*i:]))
	}
	m.Random *= m.Random
}

// firstMinute takes the rest of a minute of the first layout off the front.
func (p *parser) firstMinute(m *Minute, shape byte) {
	floats := p.floats(minuteSums + minuteMeans)
	if p.bad = p.bad || shape >= loadsAKey; p.bad {
		return
	}
	var all [minuteSums + minuteMeans]told
	sums, means := m.sums(), m.means(nil)
	copy(all[:], sums[:])
	for i, f := range means {
		f.single = false
		all[minuteSums+i] = f
	}
	floats.read(all[:])
}
