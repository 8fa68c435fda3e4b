// Package parquet writes tables as Apache Parquet files, in row groups of bounded size, so
// that a table of any length takes the same memory.
//
// A file, by the format's own description (Apache Parquet 2.x, README and parquet.thrift;
// from memory, and held to an independent reader by a test), is
//
//	"PAR1"
//	row groups: of each column one data page of version 1, its header in Thrift's compact
//	  protocol, its body compressed with gzip: definition levels where there may be nulls,
//	  as one run or bits, and the values, plain
//	the footer: schema and places of all pages, in Thrift's compact protocol
//	the footer's length, 4 bytes, little-endian
//	"PAR1"
//
// Without its footer a file cannot be read, so that one that breaks off is not taken for whole.
package parquet

import (
	"bytes"
	"compress/gzip"
	"encoding/binary"
	"fmt"
	"io"
	"math"
)

// Kind is what a column holds.
type Kind uint8

const (
	Instant Kind = iota + 1 // Unix time in ns: int64, TIMESTAMP(NANOS, UTC)
	Truth                   // BOOLEAN
	Number                  // DOUBLE, or null
	Text                    // BYTE_ARRAY, STRING, or null
)

// Column is one column of a table.
type Column struct {
	Name string
	Kind Kind
}

// groupFields is how many fields wait in memory until they are written as one row group.
const groupFields = 1 << 18

const magic = "PAR1"

// Writer writes one file. Fields are added in the order of the columns, a row at a time, and
// [Writer.Close] ends the file.
type Writer struct {
	w       io.Writer
	err     error // the first of w
	at      int64 // bytes written
	columns []chunk
	next    int // column of the next field
	waiting int // rows in memory
	rows    int64
	groups  thrift // the row groups written
	count   int
	zip     *gzip.Writer
	packed  bytes.Buffer
}

// chunk is a column within the row group in the making.
type chunk struct {
	Column
	there  []bool // of a number or text: whether it is not null
	nulls  int
	values []byte
}

// NewWriter returns a writer of a file with these columns, of which there must be one or more.
func NewWriter(w io.Writer, columns []Column) *Writer {
	zip, _ := gzip.NewWriterLevel(io.Discard, gzip.BestSpeed) // a level that there is
	f := &Writer{w: w, zip: zip}
	for _, c := range columns {
		f.columns = append(f.columns, chunk{Column: c})
	}
	f.write([]byte(magic))
	return f
}

func (f *Writer) write(b []byte) {
	if f.err == nil {
		_, f.err = f.w.Write(b)
		f.at += int64(len(b))
	}
}

// field is the column of the next field, which must be of a kind.
func (f *Writer) field(kind Kind) *chunk {
	c := &f.columns[f.next]
	if c.Kind != kind {
		panic(fmt.Sprintf("parquet: a field of kind %d in column %q of kind %d", kind, c.Name, c.Kind))
	}
	f.next++
	return c
}

// Instant adds a time.
func (f *Writer) Instant(ns int64) {
	c := f.field(Instant)
	c.values = binary.LittleEndian.AppendUint64(c.values, uint64(ns))
}

// Truth adds a boolean.
func (f *Writer) Truth(b bool) {
	c := f.field(Truth)
	c.values = appendBit(c.values, f.waiting, b)
}

// appendBit adds bit i to bits that are packed from the least one on.
func appendBit(b []byte, i int, set bool) []byte {
	if i%8 == 0 {
		b = append(b, 0)
	}
	if set {
		b[i/8] |= 1 << (i % 8)
	}
	return b
}

// Number adds a number, which may be any.
func (f *Writer) Number(x float64) {
	c := f.field(Number)
	c.there = append(c.there, true)
	c.values = binary.LittleEndian.AppendUint64(c.values, math.Float64bits(x))
}

// Text adds a text in UTF-8.
func (f *Writer) Text(s string) {
	c := f.field(Text)
	c.there = append(c.there, true)
	c.values = append(binary.LittleEndian.AppendUint32(c.values, uint32(len(s))), s...)
}

// optional reports whether fields of the kind may be null.
func (k Kind) optional() bool { return k == Number || k == Text }

// Null adds an empty field of a column of numbers or texts.
func (f *Writer) Null() {
	c := &f.columns[f.next]
	if !c.Kind.optional() {
		panic(fmt.Sprintf("parquet: an empty field in column %q of kind %d", c.Name, c.Kind))
	}
	f.next++
	c.there = append(c.there, false)
	c.nulls++
}

// End ends a row, which must have all its fields.
func (f *Writer) End() error {
	if f.next != len(f.columns) {
		panic(fmt.Sprintf("parquet: a row of %d fields in %d columns", f.next, len(f.columns)))
	}
	f.next = 0
	f.rows++
	if f.waiting++; f.waiting*len(f.columns) >= groupFields {
		f.flush()
	}
	return f.err
}

// Close ends the file.
func (f *Writer) Close() error {
	f.flush()
	footer := f.footer()
	f.write(footer)
	f.write(binary.LittleEndian.AppendUint32(nil, uint32(len(footer))))
	f.write([]byte(magic))
	return f.err
}

// flush writes the rows in memory as a row group.
func (f *Writer) flush() {
	if f.waiting == 0 {
		return
	}
	var places thrift
	var total int64
	for i := range f.columns {
		c := &f.columns[i]
		begin := f.at
		size := f.page(c.body())
		total += size
		c.place(&places, f.waiting, begin, f.at, size)
		c.there, c.nulls, c.values = c.there[:0], 0, c.values[:0]
	}
	f.groups.list(1, typeStruct, len(f.columns)) // columns
	f.groups = append(f.groups, places...)
	f.groups.i64(1, 2, total) // total_byte_size
	f.groups.i64(2, 3, int64(f.waiting))
	f.groups.end()
	f.count++
	f.waiting = 0
}

// page writes a page with its header, and tells its bytes before compression.
func (f *Writer) page(body []byte) int64 {
	f.packed.Reset()
	f.zip.Reset(&f.packed)
	f.zip.Write(body) // into memory, which does not fail
	f.zip.Close()
	var h thrift
	h.i32(0, 1, dataPage)
	h.i32(1, 2, int32(len(body)))
	h.i32(2, 3, int32(f.packed.Len()))
	h.field(3, 5, typeStruct)
	h.i32(0, 1, int32(f.waiting))
	h.i32(1, 2, encodingPlain)
	h.i32(2, 3, encodingRLE) // of the definition levels
	h.i32(3, 4, encodingRLE) // of the repetition levels, of which there are none
	h.end()
	h.end()
	f.write(h)
	f.write(f.packed.Bytes())
	return int64(len(h) + len(body))
}

// body is a page before compression.
func (c *chunk) body() []byte {
	if !c.Kind.optional() {
		return c.values
	}
	var levels []byte
	switch n := len(c.there); {
	case c.nulls == 0: // a run of ones
		levels = append(binary.AppendUvarint(nil, uint64(n)<<1), 1)
	case c.nulls == n: // one of zeros
		levels = append(binary.AppendUvarint(nil, uint64(n)<<1), 0)
	default: // bits, in groups of eight
		levels = binary.AppendUvarint(nil, uint64(n+7)/8<<1|1)
		var bits []byte
		for i, there := range c.there {
			bits = appendBit(bits, i, there)
		}
		levels = append(levels, bits...)
	}
	b := binary.LittleEndian.AppendUint32(make([]byte, 0, 4+len(levels)+len(c.values)), uint32(len(levels)))
	return append(append(b, levels...), c.values...)
}
