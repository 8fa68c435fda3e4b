package sparkplug

import (
	"math"

	"google.golang.org/protobuf/encoding/protowire"
)

// message builds payloads for tests, by the field numbers of the standard.
type message struct{ b []byte }

func at(ms uint64) *message { return new(message).varint(payloadTimestamp, ms) }

func (m *message) varint(num protowire.Number, v uint64) *message {
	m.b = protowire.AppendVarint(protowire.AppendTag(m.b, num, protowire.VarintType), v)
	return m
}

func (m *message) bytes(num protowire.Number, v []byte) *message {
	m.b = protowire.AppendBytes(protowire.AppendTag(m.b, num, protowire.BytesType), v)
	return m
}

func (m *message) seq(n uint64) *message { return m.varint(payloadSeq, n) }

// with adds a metric.
func (m *message) with(metric *message) *message { return m.bytes(payloadMetrics, metric.b) }

func named(name string) *message { return new(message).bytes(metricName, []byte(name)) }

func (m *message) alias(n uint64) *message { return m.varint(metricAlias, n) }

func (m *message) kind(d Datatype) *message { return m.varint(metricDatatype, uint64(d)) }

func (m *message) stamped(ms uint64) *message { return m.varint(metricTimestamp, ms) }

func (m *message) double(x float64) *message {
	m.b = protowire.AppendFixed64(protowire.AppendTag(m.b, protowire.Number(fieldDouble), protowire.Fixed64Type), math.Float64bits(x))
	return m
}

func (m *message) float(x float32) *message {
	m.b = protowire.AppendFixed32(protowire.AppendTag(m.b, protowire.Number(fieldFloat), protowire.Fixed32Type), math.Float32bits(x))
	return m
}

func (m *message) integer(v uint64) *message { return m.varint(protowire.Number(fieldInt), v) }
func (m *message) long(v uint64) *message    { return m.varint(protowire.Number(fieldLong), v) }

// rated adds the property Quality behind another one.
func (m *message) rated(q uint64) *message {
	other := new(message).varint(1, uint64(Double))
	mine := new(message).varint(1, uint64(Int32)).varint(propertyInt, q)
	set := new(message).bytes(setKeys, []byte("scale")).bytes(setKeys, []byte(qualityKey)).bytes(setValues, other.b).bytes(setValues, mine.b)
	return m.bytes(metricProperties, set.b)
}

func bdSeq(n uint64) *message { return named(bdSeqName).kind(Int64).long(n) }
