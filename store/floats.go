package store

import (
	"math"
	"math/bits"
)

// forerunners gives, for each float of a record, the place of the earlier one that
// it is likely to resemble, or -1.
type forerunners []int

// appendFloats writes floats: for each a 4-bit count, low half of a byte first, then
// of each the bytes that are left when zero bytes at the low end are taken off.
func appendFloats(b []byte, fields []*float64, like forerunners) []byte {
	begin := len(b)
	for range (len(fields) + 1) / 2 {
		b = append(b, 0)
	}
	for i, f := range fields {
		word := math.Float64bits(*f)
		if j := like[i]; j >= 0 {
			word ^= math.Float64bits(*fields[j])
		}
		count := 8 - bits.TrailingZeros64(word)/8
		b[begin+i/2] |= byte(count) << (4 * (i % 2))
		for ; count > 0; count-- {
			b = append(b, byte(word>>56))
			word <<= 8
		}
	}
	return b
}

// floats takes n floats off the front, still in their coding.
func (p *parser) floats(n int) (counts, body []byte) {
	counts = p.take(uint64(n+1) / 2)
	size := 0
	for _, c := range counts {
		size += int(c&15) + int(c>>4)
	}
	return counts, p.take(uint64(size))
}

// parseFloats reads the floats from their counts and bytes.
func parseFloats(counts, body []byte, fields []*float64, like forerunners) bool {
	for i, f := range fields {
		count := int(counts[i/2] >> (4 * (i % 2)) & 15)
		if count > 8 {
			return false
		}
		var word uint64
		for k, c := range body[:count] {
			word |= uint64(c) << (56 - 8*k)
		}
		body = body[count:]
		if j := like[i]; j >= 0 {
			word ^= math.Float64bits(*fields[j])
		}
		*f = math.Float64frombits(word)
	}
	return true
}
