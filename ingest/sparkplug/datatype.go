package sparkplug

import (
	"fmt"
	"math"
)

// Datatype is that of a metric: Sparkplug 3.0, chapter 6, enumeration DataType.
type Datatype uint8

// The datatypes that a number can have, and Boolean.
const (
	Unknown  Datatype = 0
	Int8     Datatype = 1
	Int16    Datatype = 2
	Int32    Datatype = 3
	Int64    Datatype = 4
	UInt8    Datatype = 5
	UInt16   Datatype = 6
	UInt32   Datatype = 7
	UInt64   Datatype = 8
	Float    Datatype = 9
	Double   Datatype = 10
	Boolean  Datatype = 11
	DateTime Datatype = 13
)

var datatypeNames = [...]string{
	"Unknown", "Int8", "Int16", "Int32", "Int64", "UInt8", "UInt16", "UInt32", "UInt64", "Float", "Double", "Boolean",
	"String", "DateTime", "Text", "UUID", "DataSet", "Bytes", "File", "Template", "PropertySet", "PropertySetList",
	"Int8Array", "Int16Array", "Int32Array", "Int64Array", "UInt8Array", "UInt16Array", "UInt32Array", "UInt64Array",
	"FloatArray", "DoubleArray", "BooleanArray", "StringArray", "DateTimeArray",
}

// String returns the standard's name, such as "Int16".
func (d Datatype) String() string {
	if int(d) < len(datatypeNames) {
		return datatypeNames[d]
	}
	return fmt.Sprintf("Datatype(%d)", uint8(d))
}

// Numeric tells whether a value of the datatype is a number.
func (d Datatype) Numeric() bool { return d >= Int8 && d <= Double }

// datatypeOf keeps a datatype that came as a varint; what the standard does not know is
// Unknown.
func datatypeOf(v uint64) Datatype {
	if v < uint64(len(datatypeNames)) {
		return Datatype(v)
	}
	return Unknown
}

// number is the value of m as a number, by the datatype that its birth told. Integers
// come as unsigned ones of 32 or 64 bits in two's complement and are extended by the
// sign of their own width: 0xFFFFFFD8 as Int32 is −40, and so are 0xFFFFFFD8 and 0xD8 as
// Int8. Some publishers write a 32-bit integer into the 64-bit field; both are read.
func (m *Metric) number(d Datatype) (float64, Wrong) {
	switch m.field {
	case fieldFloat:
		return ofFloat(float64(math.Float32frombits(uint32(m.bits))), d)
	case fieldDouble:
		return ofFloat(math.Float64frombits(m.bits), d)
	case fieldInt, fieldLong:
		return m.integer(d)
	case fieldBool:
		return m.truth(d)
	case fieldNone:
		return math.NaN(), Missing
	}
	return math.NaN(), NotNumber
}

// truth is 1 for true and 0 for false.
func (m *Metric) truth(d Datatype) (float64, Wrong) {
	if d != Unknown && d != Boolean {
		return math.NaN(), Mismatch
	}
	return float64(m.bits & 1), Right
}

func ofFloat(x float64, d Datatype) (float64, Wrong) {
	switch {
	case d != Unknown && d != Float && d != Double:
		return x, Mismatch
	case math.IsNaN(x) || math.IsInf(x, 0):
		return x, NotFinite
	}
	return x, Right
}

func (m *Metric) integer(d Datatype) (float64, Wrong) {
	v := m.bits
	if m.field == fieldInt && v>>31 == 1 && (d == Int8 || d == Int16 || d == Int32 || d == Int64) {
		v |= 0xFFFFFFFF << 32
	}
	switch d {
	case Int8:
		return signed(v, 8)
	case Int16:
		return signed(v, 16)
	case Int32:
		return signed(v, 32)
	case Int64:
		return float64(int64(v)), Right
	case UInt8:
		return unsigned(v, 8)
	case UInt16:
		return unsigned(v, 16)
	case UInt32:
		return unsigned(v, 32)
	case UInt64:
		return float64(v), Right
	case Unknown:
		return math.NaN(), NoDatatype
	}
	return math.NaN(), Mismatch
}

// signed takes the lowest bits of v with their sign; what stands above them must be
// nothing, or that sign.
func signed(v uint64, bits uint) (float64, Wrong) {
	shift := 64 - bits
	x := int64(v<<shift) >> shift
	if v>>bits != 0 && v != uint64(x) && v != uint64(x)&math.MaxUint32 {
		return math.NaN(), Mismatch
	}
	return float64(x), Right
}

func unsigned(v uint64, bits uint) (float64, Wrong) {
	if v>>bits != 0 {
		return math.NaN(), Mismatch
	}
	return float64(v), Right
}
