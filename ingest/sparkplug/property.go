package sparkplug

import (
	"google.golang.org/protobuf/encoding/protowire"

	"heatreeve/ingest/quality"
)

// Field numbers: Sparkplug 3.0, chapter 6, of PropertySet and PropertyValue.
const (
	setKeys   = 1
	setValues = 2

	propertyNull = 2
	propertyInt  = 3
	propertyLong = 4
	propertyText = 8
)

// qualityKey is the property of a metric that tells its quality: Sparkplug 3.0, chapter 6.
const qualityKey = "Quality"

// qualityOf finds the property Quality in a property set; the values stand in the order of
// the keys. Sound is false where the bytes are no property set.
func qualityOf(set []byte) (q int64, ok, sound bool) {
	place := -1
	keys := 0
	for b := set; len(b) > 0; {
		num, v, n := member(b)
		if n < 0 {
			return 0, false, false
		}
		if num == setKeys {
			if place < 0 && string(v) == qualityKey {
				place = keys
			}
			keys++
		}
		b = b[n:]
	}
	if place < 0 {
		return 0, false, true
	}
	for b, values := set, 0; len(b) > 0; {
		num, v, n := member(b)
		if num == setValues {
			if values == place {
				return integerProperty(v)
			}
			values++
		}
		b = b[n:]
	}
	return 0, false, true
}

// member reads one field of a message; v is set for one with a length.
func member(b []byte) (num protowire.Number, v []byte, n int) {
	num, typ, head := protowire.ConsumeTag(b)
	if head < 0 {
		return 0, nil, head
	}
	if typ != protowire.BytesType {
		if n = skip(num, typ, b[head:]); n < 0 {
			return 0, nil, n
		}
		return 0, nil, head + n
	}
	v, n = protowire.ConsumeBytes(b[head:])
	if n < 0 {
		return 0, nil, n
	}
	return num, v, head + n
}

func integerProperty(b []byte) (q int64, ok, sound bool) {
	for len(b) > 0 {
		num, typ, n := protowire.ConsumeTag(b)
		if n < 0 {
			return 0, false, false
		}
		b = b[n:]
		if typ != protowire.VarintType {
			if n = skip(num, typ, b); n < 0 {
				return 0, false, false
			}
			b = b[n:]
			continue
		}
		v, n := protowire.ConsumeVarint(b)
		if n < 0 {
			return 0, false, false
		}
		switch num {
		case propertyNull:
			if v != 0 {
				return 0, false, true
			}
		case propertyInt:
			q, ok = int64(int32(v)), true
		case propertyLong:
			q, ok = int64(v), true
		}
		b = b[n:]
	}
	return q, ok, true
}

// mark is what a metric says of its own value: without the property it is good, and with
// a number that the standard does not know uncertain.
func (m *Metric) mark() quality.Mark {
	if m.Null {
		return quality.NoValue
	}
	if !m.Rated {
		return quality.None
	}
	if mark, ok := quality.Sparkplug(m.Quality); ok {
		return mark
	}
	return quality.Doubted
}

// texts calls tell with the key of each property that is a text, and with that. They point
// into the set; of one that is none it reads as far as it can.
func texts(set []byte, tell func(key, text []byte)) {
	var keys, values [][]byte
	for b := set; len(b) > 0; {
		num, v, n := member(b)
		if n < 0 {
			break
		}
		switch num {
		case setKeys:
			keys = append(keys, v)
		case setValues:
			values = append(values, v)
		}
		b = b[n:]
	}
	for i := range min(len(keys), len(values)) {
		for b := values[i]; len(b) > 0; {
			num, v, n := member(b)
			if n < 0 {
				break
			}
			if num == propertyText && v != nil {
				tell(keys[i], v)
			}
			b = b[n:]
		}
	}
}
