package parquet

import "encoding/binary"

// thrift is a message in Thrift's compact protocol (Apache Thrift, "Thrift compact protocol
// encoding"). A field is told by how far its number is above the one before.
type thrift []byte

const (
	typeTrue   = 1
	typeI32    = 5
	typeI64    = 6
	typeBinary = 8
	typeList   = 9
	typeStruct = 12
)

// field begins field number id after number before.
func (t *thrift) field(before, id, kind int) { *t = append(*t, byte((id-before)<<4|kind)) }

func (t *thrift) i32(before, id int, x int32) {
	t.field(before, id, typeI32)
	*t = binary.AppendVarint(*t, int64(x))
}

func (t *thrift) i64(before, id int, x int64) {
	t.field(before, id, typeI64)
	*t = binary.AppendVarint(*t, x)
}

func (t *thrift) text(before, id int, s string) {
	t.field(before, id, typeBinary)
	t.bytes(s)
}

func (t *thrift) bytes(s string) { *t = append(binary.AppendUvarint(*t, uint64(len(s))), s...) }

// list begins the first field of a struct, a list of n of a kind.
func (t *thrift) list(id, kind, n int) {
	t.field(0, id, typeList)
	t.length(kind, n)
}

func (t *thrift) length(kind, n int) {
	if n < 15 {
		*t = append(*t, byte(n<<4|kind))
		return
	}
	*t = binary.AppendUvarint(append(*t, byte(15<<4|kind)), uint64(n))
}

// end ends a struct.
func (t *thrift) end() { *t = append(*t, 0) }
