package store

import (
	"encoding/binary"
	"math"
	"math/bits"
)

// minuteFloats is how many floats a minute record holds.
const minuteFloats = 12

// floats lists the fields in the order in which they are stored.
func (m *Minute) floats() [minuteFloats]*float64 {
	return [minuteFloats]*float64{
		&m.Measured, &m.Missing, &m.Given, &m.Taken,
		&m.Duty, &m.DutyMin, &m.DutyMax, &m.DutyUncertainty,
		&m.Flow, &m.Inlet, &m.Outlet, &m.Pressure,
	}
}

// forerunner gives, for each float, the place of the one that it is likely to
// resemble, or -1.
var forerunner = [minuteFloats]int{-1, -1, -1, -1, -1, 4, 4, -1, -1, -1, 9, -1}

func minuteKey(start int64, load uint32) []byte {
	return binary.BigEndian.AppendUint32(timeKey(start), load)
}

// timeKey orders as t does.
func timeKey(t int64) []byte { return binary.BigEndian.AppendUint64(nil, uint64(t)^1<<63) }

func appendMinute(b []byte, m Minute) []byte {
	begin := len(b)
	b = append(b, make([]byte, minuteFloats/2)...)
	fields := m.floats()
	for i, f := range fields {
		word := math.Float64bits(*f)
		if j := forerunner[i]; j >= 0 {
			word ^= math.Float64bits(*fields[j])
		}
		count := 8 - bits.TrailingZeros64(word)/8
		b[begin+i/2] |= byte(count) << (4 * (i % 2))
		for ; count > 0; count-- {
			b = append(b, byte(word>>56))
			word <<= 8
		}
	}
	return binary.LittleEndian.AppendUint32(b, checksum(minuteKey(m.Start, m.Load), b[begin:]))
}

func parseMinute(key, value []byte) (Minute, error) {
	if len(key) != 12 || len(value) < minuteFloats/2+4 {
		return Minute{}, errRecord
	}
	body, sum := value[:len(value)-4], value[len(value)-4:]
	if binary.LittleEndian.Uint32(sum) != checksum(key, body) {
		return Minute{}, errRecord
	}
	m := Minute{
		Start: int64(binary.BigEndian.Uint64(key) ^ 1<<63),
		Load:  binary.BigEndian.Uint32(key[8:]),
	}
	p := parser{rest: body[minuteFloats/2:]}
	fields := m.floats()
	for i, f := range fields {
		count := body[i/2] >> (4 * (i % 2)) & 15
		if count > 8 {
			return Minute{}, errRecord
		}
		var word uint64
		for k, c := range p.take(uint64(count)) {
			word |= uint64(c) << (56 - 8*k)
		}
		if j := forerunner[i]; j >= 0 {
			word ^= math.Float64bits(*fields[j])
		}
		*f = math.Float64frombits(word)
	}
	if p.bad || len(p.rest) != 0 {
		return Minute{}, errRecord
	}
	return m, nil
}
