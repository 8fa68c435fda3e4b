package store

import (
	"math"
	"math/bits"
)

// told is a float of a record, and the one before it that it is likely to resemble. Of
// a single one the nearest float32 is told.
type told struct {
	float, like *float64
	single      bool
}

// word is a float's bits as they are told, beginning with the high ones.
func (f told) word(x float64) uint64 {
	if f.single {
		return uint64(math.Float32bits(float32(x))) << 32
	}
	return math.Float64bits(x)
}

func (f told) forerunner() uint64 {
	if f.like == nil {
		return 0
	}
	return f.word(*f.like)
}

func (f told) set(word uint64) {
	if f.single {
		*f.float = float64(math.Float32frombits(uint32(word >> 32)))
		return
	}
	*f.float = math.Float64frombits(word)
}

// appendFloats writes floats, each as the bytes of XOR its forerunner that are left when
// zero bytes at the low end are taken off, and one at the high end if it is zero. What
// these are comes first, in 4 bits a float, low half of a byte first: up to 8 how
// many bytes there are, above that 8 more than there are after the zero byte.
func appendFloats(b []byte, fields []told) []byte {
	begin := len(b)
	for range (len(fields) + 1) / 2 {
		b = append(b, 0)
	}
	for i, f := range fields {
		word := f.word(*f.float) ^ f.forerunner()
		count := 8 - bits.TrailingZeros64(word)/8
		code := count
		if count > 1 && word>>56 == 0 {
			word <<= 8
			count--
			code = 8 + count
		}
		b[begin+i/2] |= byte(code) << (4 * (i % 2))
		for ; count > 0; count-- {
			b = append(b, byte(word>>56))
			word <<= 8
		}
	}
	return b
}

// floatBytes is how many bytes of a float there are by its 4 bits.
func floatBytes(code byte) int {
	if code > 8 {
		return int(code) - 8
	}
	return int(code)
}

// coded are floats still in their coding.
type coded struct{ counts, body []byte }

// floats takes n floats off the front.
func (p *parser) floats(n int) (c coded) {
	c.counts = p.take(uint64(n+1) / 2)
	size := 0
	for _, two := range c.counts {
		size += floatBytes(two&15) + floatBytes(two>>4)
	}
	c.body = p.take(uint64(size))
	return c
}

// keep rounds floats to what is told of them.
func keep(fields []told) {
	for _, f := range fields {
		f.set(f.word(*f.float))
	}
}

// read sets the floats, which are as many as were taken.
func (c coded) read(fields []told) {
	body := c.body
	for i, f := range fields {
		code := c.counts[i/2] >> (4 * (i % 2)) & 15
		shift := 56
		if code > 8 {
			shift -= 8
		}
		var word uint64
		for range floatBytes(code) {
			word |= uint64(body[0]) << shift
			body = body[1:]
			shift -= 8
		}
		f.set(word ^ f.forerunner())
	}
}

func allZero(fields []told) bool {
	for _, f := range fields {
		if math.Float64bits(*f.float) != 0 {
			return false
		}
	}
	return true
}

// foretoldDuty is what mean duty follows from heat and measured time, where it is in
// the load's service; 0 where nothing follows.
func foretoldDuty(given, taken, measured float64) float64 {
	if d := math.Abs(given-taken) / measured; measured > 0 && d < math.Inf(1) {
		return d
	}
	return 0
}
