package store

import (
	"math"
	"math/bits"
)

// A part of an uncertainty takes 16 bits: the sign, 6 bits e and 9 bits m stand for
// (1 + m/512)·2^(e-partBias), which tells it to a part in a thousand. What is less than
// the least is 0, and the greatest of them stands for anything greater and for what is
// no number, and is read as infinite.
const (
	partBias     = 16
	partGreatest = 1<<15 - 1
)

// partCode returns ok false for a part that is told as 0.
func partCode(x float64) (code uint16, ok bool) {
	const drop = 52 - 9
	b := math.Float64bits(x)
	magnitude := int64((b&^(1<<63) + 1<<(drop-1)) >> drop)
	magnitude -= (1023 - partBias) << 9
	switch {
	case magnitude < 0:
		return 0, false
	case magnitude > partGreatest:
		magnitude = partGreatest
	}
	return uint16(magnitude) | uint16(b>>63)<<15, true
}

func partValue(code uint16) float64 {
	magnitude := uint64(code &^ (1 << 15))
	b := (magnitude + (1023-partBias)<<9) << (52 - 9)
	if magnitude == partGreatest {
		b = math.Float64bits(math.Inf(1))
	}
	return math.Float64frombits(b | uint64(code>>15)<<63)
}

// roundPart is what is kept of a part.
func roundPart(x float64) float64 {
	code, ok := partCode(x)
	if !ok {
		return 0
	}
	return partValue(code)
}

// shares are the parts of an uncertainty and its random variance, or the root of that.
type shares struct {
	systematic *[Shares]float64
	random     *float64
}

// present tells by bits which of them are not 0: bit 0 the random one, bit 1 + i the i-th
// of the systematic ones.
func (s shares) present() (which uint64) {
	if *s.random != 0 {
		which = 1
	}
	for i, x := range s.systematic {
		if x != 0 {
			which |= 2 << i
		}
	}
	return which
}

// of lists those that bits say are there.
func (s shares) of(which uint64) []told {
	all := make([]told, 0, bits.OnesCount64(which))
	if which&1 != 0 {
		all = append(all, told{float: s.random})
	}
	for i := range s.systematic {
		if which&(2<<i) != 0 {
			all = append(all, told{float: &s.systematic[i]})
		}
	}
	return all
}

// which takes off the front the bits that tell what is present.
func (p *parser) which() uint64 {
	which := p.uvarint()
	if which >= 2<<Shares {
		p.bad = true
	}
	return which
}
