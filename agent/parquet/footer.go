package parquet

// Numbers of the format (parquet.thrift).
const (
	dataPage      = 0
	encodingPlain = 0
	encodingRLE   = 3
	codecGzip     = 2

	required, optional = 0, 1

	convertedUTF8 = 0

	formatVersion = 1
)

// physical is the format's type of the values of a kind.
func (k Kind) physical() int32 { return [...]int32{Instant: 2, Truth: 0, Number: 5, Text: 6}[k] }

// place adds the ColumnChunk of a column whose page lies from begin to end, and has a size
// before compression.
func (c *chunk) place(t *thrift, rows int, begin, end, size int64) {
	t.i64(0, 2, begin) // file_offset
	t.field(2, 3, typeStruct)
	t.i32(0, 1, c.Kind.physical())
	t.field(1, 2, typeList)
	t.length(typeI32, 2)
	*t = append(*t, encodingPlain<<1, encodingRLE<<1)
	t.field(2, 3, typeList)
	t.length(typeBinary, 1)
	t.bytes(c.Name)
	t.i32(3, 4, codecGzip)
	t.i64(4, 5, int64(rows))
	t.i64(5, 6, size)      // uncompressed
	t.i64(6, 7, end-begin) // compressed
	t.i64(7, 9, begin)     // data_page_offset
	t.end()
	t.end()
}

// footer is the FileMetaData.
func (f *Writer) footer() []byte {
	var t thrift
	t.i32(0, 1, formatVersion)
	t.field(1, 2, typeList)
	t.length(typeStruct, 1+len(f.columns))
	t.text(0, 4, "table")
	t.i32(4, 5, int32(len(f.columns)))
	t.end()
	for _, c := range f.columns {
		c.schema(&t)
	}
	t.i64(2, 3, f.rows)
	t.field(3, 4, typeList)
	t.length(typeStruct, f.count)
	t = append(t, f.groups...)
	t.text(4, 6, "heatreeve")
	t.end()
	return t
}

// schema adds the SchemaElement of a column.
func (c *Column) schema(t *thrift) {
	repetition := int32(required)
	if c.Kind.optional() {
		repetition = optional
	}
	t.i32(0, 1, c.Kind.physical())
	t.i32(1, 3, repetition)
	t.text(3, 4, c.Name)
	switch c.Kind {
	case Text:
		t.i32(4, 6, convertedUTF8)
		t.field(6, 10, typeStruct) // logicalType
		t.field(0, 1, typeStruct)  // STRING
		t.end()
		t.end()
	case Instant:
		t.field(4, 10, typeStruct) // logicalType
		t.field(0, 8, typeStruct)  // TIMESTAMP
		t.field(0, 1, typeTrue)    // isAdjustedToUTC
		t.field(1, 2, typeStruct)  // unit
		t.field(0, 3, typeStruct)  // NANOS
		t.end()
		t.end()
		t.end()
		t.end()
	}
	t.end()
}
