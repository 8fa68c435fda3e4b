package sparkplug

import (
	"fmt"
	"math"

	"google.golang.org/protobuf/encoding/protowire"
)

// Field numbers: Sparkplug 3.0, chapter 6, of the messages Payload and Payload.Metric.
const (
	payloadTimestamp = 1
	payloadMetrics   = 2
	payloadSeq       = 3

	metricName       = 1
	metricAlias      = 2
	metricTimestamp  = 3
	metricDatatype   = 4
	metricHistorical = 5
	metricTransient  = 6
	metricNull       = 7
	metricProperties = 9
)

// field says in which field of a metric its value stands.
type field uint8

const (
	fieldNone   field = 0
	fieldInt    field = 10 // of 32 bits
	fieldLong   field = 11 // of 64 bits
	fieldFloat  field = 12
	fieldDouble field = 13
	fieldBool   field = 14
	fieldLast   field = 19 // those up to here hold texts, bytes and nested values
)

// Payload is a payload, of which the metrics are read one by one. The zero value reads
// as one without metrics. It points into the bytes that it was opened on.
type Payload struct {
	Timestamp uint64 // ms since 1970 UTC, when it was sent; only with Stamped
	Stamped   bool
	Seq       uint64 // only with Numbered
	Numbered  bool

	rest []byte
}

// Open reads what a payload says beside its metrics, and leaves its first metric to
// [Payload.Next]. The error tells what is no payload.
func (p *Payload) Open(b []byte) error {
	*p = Payload{rest: b}
	if len(b) > MaxPayload {
		return fmt.Errorf("has %d bytes; at most %d are read", len(b), MaxPayload)
	}
	for len(b) > 0 {
		num, typ, n := protowire.ConsumeTag(b)
		if n < 0 {
			return malformed("payload", protowire.ParseError(n))
		}
		b = b[n:]
		if n = p.field(num, typ, b); n < 0 {
			return malformed("payload", protowire.ParseError(n))
		}
		b = b[n:]
	}
	return nil
}

func malformed(what string, err error) error {
	return fmt.Errorf("is no Sparkplug B %s: %w", what, err)
}

func (p *Payload) field(num protowire.Number, typ protowire.Type, b []byte) int {
	switch {
	case num == payloadTimestamp && typ == protowire.VarintType:
		v, n := protowire.ConsumeVarint(b)
		p.Timestamp, p.Stamped = v, true
		return n
	case num == payloadSeq && typ == protowire.VarintType:
		v, n := protowire.ConsumeVarint(b)
		p.Seq, p.Numbered = v, true
		return n
	}
	return skip(num, typ, b)
}

// skip passes over a field that is not read. Groups, which nest and which the standard
// does not have, are refused.
func skip(num protowire.Number, typ protowire.Type, b []byte) int {
	if typ == protowire.StartGroupType || typ == protowire.EndGroupType {
		return groups
	}
	return protowire.ConsumeFieldValue(num, typ, b)
}

// groups is what protowire returns for a wire type that there is not.
var groups = protowire.ConsumeFieldValue(1, protowire.Type(7), nil)

// Next reads the next metric into m, and reports false where there is none, or an error.
// m points into the payload.
func (p *Payload) Next(m *Metric) (ok bool, err error) {
	for len(p.rest) > 0 {
		num, typ, n := protowire.ConsumeTag(p.rest)
		if n < 0 {
			return false, malformed("payload", protowire.ParseError(n))
		}
		p.rest = p.rest[n:]
		if num != payloadMetrics || typ != protowire.BytesType {
			if n = skip(num, typ, p.rest); n < 0 {
				return false, malformed("payload", protowire.ParseError(n))
			}
			p.rest = p.rest[n:]
			continue
		}
		body, n := protowire.ConsumeBytes(p.rest)
		if n < 0 {
			return false, malformed("payload", protowire.ParseError(n))
		}
		p.rest = p.rest[n:]
		return true, m.read(body)
	}
	return false, nil
}

// Metric is one metric of a payload, as it came.
type Metric struct {
	Name       []byte // nil: none
	Alias      uint64 // only with Aliased
	Timestamp  uint64 // ms since 1970 UTC, of acquisition; only with Stamped
	Quality    int64  // of the property of that name; only with Rated
	Datatype   Datatype
	Aliased    bool
	Stamped    bool
	Rated      bool
	Historical bool // of the past, and not the value of now
	Transient  bool // not to be stored
	Null       bool // there is no value

	field      field
	bits       uint64
	properties []byte // as they came; nil: none
}

func (m *Metric) read(b []byte) error {
	*m = Metric{}
	for len(b) > 0 {
		num, typ, n := protowire.ConsumeTag(b)
		if n < 0 {
			return malformed("metric", protowire.ParseError(n))
		}
		b = b[n:]
		switch typ {
		case protowire.VarintType:
			n = m.varint(num, b)
		case protowire.BytesType:
			n = m.bytes(num, b)
		default:
			n = m.fixed(num, typ, b)
		}
		if n < 0 {
			return malformed("metric", protowire.ParseError(n))
		}
		b = b[n:]
	}
	return nil
}

func (m *Metric) varint(num protowire.Number, b []byte) int {
	v, n := protowire.ConsumeVarint(b)
	switch num {
	case metricAlias:
		m.Alias, m.Aliased = v, true
	case metricTimestamp:
		m.Timestamp, m.Stamped = v, true
	case metricDatatype:
		m.Datatype = datatypeOf(v)
	case metricHistorical:
		m.Historical = v != 0
	case metricTransient:
		m.Transient = v != 0
	case metricNull:
		m.Null = v != 0
	case protowire.Number(fieldInt):
		m.field, m.bits = fieldInt, v&math.MaxUint32 // protocol buffers cut a uint32 to its width
	case protowire.Number(fieldLong):
		m.field, m.bits = fieldLong, v
	case protowire.Number(fieldBool):
		m.field, m.bits = fieldBool, v
	}
	return n
}

func (m *Metric) bytes(num protowire.Number, b []byte) int {
	v, n := protowire.ConsumeBytes(b)
	switch {
	case n < 0:
	case num == metricName:
		m.Name = v
	case num == metricProperties:
		m.properties = v
		if q, ok, sound := qualityOf(v); !sound {
			return groups
		} else if ok {
			m.Quality, m.Rated = q, true
		}
	case num > protowire.Number(fieldBool) && num <= protowire.Number(fieldLast):
		m.field = field(num)
	}
	return n
}

func (m *Metric) fixed(num protowire.Number, typ protowire.Type, b []byte) int {
	switch {
	case num == protowire.Number(fieldFloat) && typ == protowire.Fixed32Type:
		v, n := protowire.ConsumeFixed32(b)
		m.field, m.bits = fieldFloat, uint64(v)
		return n
	case num == protowire.Number(fieldDouble) && typ == protowire.Fixed64Type:
		v, n := protowire.ConsumeFixed64(b)
		m.field, m.bits = fieldDouble, v
		return n
	}
	return skip(num, typ, b)
}
