package store

import (
	"encoding/binary"
	"math"
)

// How many floats an hour has of each kind, beside the parts.
const (
	hourSums  = 8
	hourMeans = 8
	hourRare  = 5
)

// sums lists the fields that are told in full.
func (h *Hour) sums() [hourSums]told {
	return [...]told{{float: &h.Measured}, {float: &h.Bridged}, {float: &h.Missing}, {float: &h.Latent},
		{float: &h.Given}, {float: &h.Taken}, {float: &h.Mass}, {float: &h.HeatUncertainty}}
}

// means lists the fields of which a float32 is told, all of them after Duty, which
// resembles duty.
func (h *Hour) means(duty *float64) [hourMeans]told {
	return [...]told{{&h.Duty, duty, true}, {&h.DutyMin, &h.Duty, true}, {&h.DutyMax, &h.Duty, true}, {&h.Demand, &h.Duty, true},
		{&h.Inlet, nil, true}, {&h.Outlet, &h.Inlet, true}, {&h.Pressure, nil, true}, {&h.Content, nil, true}}
}

// rare lists the fields that are 0 in most hours.
func (h *Hour) rare() [hourRare]told {
	return [...]told{{float: &h.BridgedGiven}, {float: &h.BridgedTaken}, {float: &h.Witness}, {float: &h.Compared},
		{float: &h.Untold, like: &h.HeatUncertainty}}
}

// uncertain lists the field that shapeDoubt tells of.
func (h *Hour) uncertain() [1]told { return [1]told{{float: &h.Uncertain, like: &h.Measured}} }

// expected lists the fields that shapeExpected tells of.
func (h *Hour) expected() [expectedFloats]told {
	return [...]told{{&h.Expected, nil, true}, {&h.ExpectedError, nil, true}}
}

func (h *Hour) shares() shares { return shares{&h.Systematic, &h.Random} }

// kept returns what of h is kept.
func (h Hour) kept() Hour {
	means, expected := h.means(nil), h.expected()
	keep(means[:])
	keep(expected[:])
	return h
}

// appendHours writes the hours of one key, sorted by load.
func appendHours(b []byte, key []byte, all []Hour) []byte {
	begin := len(b)
	for _, h := range all {
		b = appendHour(b, h.kept())
	}
	return binary.LittleEndian.AppendUint32(b, checksum(key, b[begin:]))
}

func appendHour(b []byte, h Hour) []byte {
	shape := len(b)
	b = append(b, byte(h.Load%loadsAKey))
	b = binary.AppendUvarint(b, uint64(h.Minutes))
	sums, rare := h.sums(), h.rare()
	b = appendFloats(b, sums[:])
	foretold := foretoldDuty(h.Given, h.Taken, h.Measured)
	means := h.means(&foretold)
	b = appendFloats(b, means[:])
	if !allZero(rare[:]) {
		b[shape] |= shapeRare
		b = appendFloats(b, rare[:])
	}
	if which := h.shares().present(); which != 0 {
		b[shape] |= shapeParts
		b = binary.AppendUvarint(b, which)
		b = appendFloats(b, h.shares().of(which))
	}
	if doubt := h.uncertain(); !allZero(doubt[:]) {
		b[shape] |= shapeDoubt
		b = appendFloats(b, doubt[:])
	}
	if expected := h.expected(); !allZero(expected[:]) {
		b[shape] |= shapeExpected
		b = appendFloats(b, expected[:])
	}
	return b
}

// parseHours adds to all the hours under one key, of the loads that are wanted.
func parseHours(all []Hour, key, value []byte, want func(load uint32) bool) ([]Hour, error) {
	first, p, ok := recordsOf(key, value)
	if !ok {
		return all, errRecord
	}
	for len(p.rest) > 0 {
		all = append(all, Hour{Start: keyTime(key), Load: first})
		h := &all[len(all)-1]
		p.hour(h, want)
		if p.bad || !want(h.Load) {
			all = all[:len(all)-1]
		}
		if p.bad {
			return all, errRecord
		}
	}
	return all, nil
}

// hour takes an hour off the front, and reads it if its load is wanted. h has the number of the first load of its key.
func (p *parser) hour(h *Hour, want func(load uint32) bool) {
	shape := p.take(1)[0]
	h.Load += uint32(shape % loadsAKey)
	minutes := p.uvarint()
	h.Minutes = uint32(minutes)
	sums, means := p.floats(hourSums), p.floats(hourMeans)
	var rare, shares, doubt, expected coded
	var parts []told
	if shape&shapeRare != 0 {
		rare = p.floats(hourRare)
	}
	if shape&shapeParts != 0 {
		parts = h.shares().of(p.which())
		shares = p.floats(len(parts))
	}
	if shape&shapeDoubt != 0 {
		doubt = p.floats(1)
	}
	if shape&shapeExpected != 0 {
		expected = p.floats(expectedFloats)
	}
	if p.bad = p.bad || shape&shapeShort != 0 || minutes > math.MaxUint32; p.bad || !want(h.Load) {
		return
	}
	sumFields := h.sums()
	sums.read(sumFields[:])
	foretold := foretoldDuty(h.Given, h.Taken, h.Measured)
	meanFields := h.means(&foretold)
	means.read(meanFields[:])
	if shape&shapeRare != 0 {
		rareFields := h.rare()
		rare.read(rareFields[:])
	}
	shares.read(parts)
	if shape&shapeDoubt != 0 {
		doubtField := h.uncertain()
		doubt.read(doubtField[:])
	}
	if shape&shapeExpected != 0 {
		expectedFields := h.expected()
		expected.read(expectedFields[:])
	}
}
