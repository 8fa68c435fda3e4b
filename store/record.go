package store

import (
	"encoding/binary"
	"errors"
	"hash/crc32"
	"math"
	"math/bits"
)

var errRecord = errors.New("record is not as it was written")

// millisecond is the unit in which differences of time are usually whole.
const millisecond = 1_000_000

const (
	controlTag     = 1 << 7
	controlTime    = 1 << 6
	controlStamped = 1 << 5
	controlBytes   = 1<<5 - 1

	// markCode stands in the place of a value's code where the mark is not that of the
	// tag's reading before: the mark follows, and then the code.
	markCode = controlBytes
)

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// checksum covers a record's key as well as its bytes, so that a record found in
// another's place does not pass.
func checksum(key, b []byte) uint32 {
	return crc32.Update(crc32.Checksum(key, castagnoli), castagnoli, b)
}

func sequenceKey(seq uint64) []byte { return binary.BigEndian.AppendUint64(nil, seq) }

// appendRecord adds the record of beats, numbered seq, to b and takes it into m.
func appendRecord(b []byte, seq uint64, beats []Beat, m *memory) []byte {
	body := binary.AppendUvarint(nil, uint64(len(beats)))
	for _, beat := range beats {
		body = appendInstant(body, beat.Through-m.through.foreseen())
		m.through.learn(beat.Through)
		body = binary.AppendUvarint(body, uint64(len(beat.Readings)))
		for _, r := range beat.Readings {
			body = appendReading(body, r, m)
		}
	}
	b = binary.AppendUvarint(b, uint64(len(body)))
	b = append(b, body...)
	return binary.LittleEndian.AppendUint32(b, checksum(sequenceKey(seq), body))
}

func appendReading(b []byte, r Reading, m *memory) []byte {
	var control byte
	if r.Tag != m.foreseenTag() {
		control |= controlTag
	}
	t := m.of(r.Tag)
	late := r.At - t.rhythm.foreseen()
	if late != 0 {
		control |= controlTime
	}
	if r.Stamped != m.stamped {
		control |= controlStamped
	}
	word := math.Float64bits(r.Value) ^ t.bits
	code, shift, count := valueCode(word)
	if r.Mark != t.mark {
		b = append(b, control|markCode)
	} else {
		b = append(b, control|code)
	}
	if control&controlTag != 0 {
		b = binary.AppendUvarint(b, uint64(r.Tag))
	}
	if control&controlTime != 0 {
		b = appendInstant(b, late)
	}
	if r.Mark != t.mark {
		b = append(b, r.Mark, code)
	}
	for word >>= shift; count > 0; count-- {
		b = append(b, byte(word))
		word >>= 8
	}
	m.learn(t, r)
	return b
}

// valueCode says which bytes of word are written: count of them, after shifting
// word right by shift.
func valueCode(word uint64) (code byte, shift, count int) {
	if word == 0 {
		return 0, 0, 0
	}
	leading := bits.LeadingZeros64(word) / 8
	if leading == 0 {
		return 1, 0, 8
	}
	trailing := bits.TrailingZeros64(word) / 8
	count = 8 - leading - trailing
	return codeOf[leading][count], trailing * 8, count
}

// appendInstant writes a difference of time in nanoseconds.
func appendInstant(b []byte, d int64) []byte {
	q, r := d/millisecond, d%millisecond
	if r < 0 {
		q, r = q-1, r+millisecond
	}
	u := zigzag(q) << 1
	if r == 0 {
		return binary.AppendUvarint(b, u)
	}
	return binary.AppendUvarint(binary.AppendUvarint(b, u|1), uint64(r))
}

func zigzag(x int64) uint64   { return uint64(x)<<1 ^ uint64(x>>63) }
func unzigzag(u uint64) int64 { return int64(u>>1) ^ -int64(u&1) }
