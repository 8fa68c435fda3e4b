package parquet

import (
	"bytes"
	"compress/gzip"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"strings"
	"testing"
)

// message reads a struct of Thrift's compact protocol into its fields by number. It knows
// only what these files are made of.
type message struct{ rest []byte }

func (m *message) uvarint() uint64 {
	x, n := binary.Uvarint(m.rest)
	m.rest = m.rest[n:]
	return x
}

func (m *message) value(kind byte) any {
	switch kind {
	case typeTrue:
		return true
	case typeI32, typeI64:
		x, n := binary.Varint(m.rest)
		m.rest = m.rest[n:]
		return x
	case typeBinary:
		n := m.uvarint()
		s := string(m.rest[:n])
		m.rest = m.rest[n:]
		return s
	case typeList:
		head := m.rest[0]
		m.rest = m.rest[1:]
		n := uint64(head >> 4)
		if n == 15 {
			n = m.uvarint()
		}
		list := []any{}
		for range n {
			list = append(list, m.value(head&15))
		}
		return list
	}
	return m.fields()
}

func (m *message) fields() map[int]any {
	all, id := map[int]any{}, 0
	for {
		head := m.rest[0]
		m.rest = m.rest[1:]
		if head == 0 {
			return all
		}
		id += int(head >> 4)
		all[id] = m.value(head & 15)
	}
}

// footerOf reads the footer of a file.
func footerOf(t *testing.T, b []byte) map[int]any {
	t.Helper()
	n := len(b)
	if n < 12 || string(b[:4]) != "PAR1" || string(b[n-4:]) != "PAR1" {
		t.Fatalf("%d bytes that are no Parquet file", n)
	}
	size := int(binary.LittleEndian.Uint32(b[n-8:]))
	m := message{b[n-8-size : n-8]}
	footer := m.fields()
	if len(m.rest) != 0 {
		t.Fatalf("%d bytes of the footer are left", len(m.rest))
	}
	return footer
}

// pages returns the bodies of the pages of each column, and of each row group its rows.
func pages(t *testing.T, b []byte) (bodies [][][]byte, rows []int64) {
	t.Helper()
	for _, g := range footerOf(t, b)[4].([]any) {
		group := g.(map[int]any)
		rows = append(rows, group[3].(int64))
		var columns [][]byte
		for _, c := range group[1].([]any) {
			meta := c.(map[int]any)[3].(map[int]any)
			begin := meta[9].(int64)
			m := message{b[begin : begin+meta[7].(int64)]}
			header := m.fields()
			if int64(len(m.rest)) != header[3].(int64) || header[5].(map[int]any)[1] != group[3] || meta[5] != group[3] {
				t.Fatalf("a page of %d bytes under %v in %v", len(m.rest), header, meta)
			}
			z, err := gzip.NewReader(bytes.NewReader(m.rest))
			if err != nil {
				t.Fatal(err)
			}
			body, err := io.ReadAll(z)
			if err != nil || int64(len(body)) != header[2].(int64) {
				t.Fatalf("%d bytes, %v; want %v", len(body), err, header[2])
			}
			columns = append(columns, body)
		}
		bodies = append(bodies, columns)
	}
	return bodies, rows
}

// A small file to the byte of its pages: levels as a run where all are there or none is, as
// bits where some are, values plain.
func TestPages(t *testing.T) {
	var b bytes.Buffer
	w := NewWriter(&b, []Column{{"at", Instant}, {"yes", Truth}, {"all", Number}, {"some", Number}, {"none", Number}, {"word", Text}})
	for i := range int64(10) {
		w.Instant(-i)
		w.Truth(i%3 == 0)
		w.Number(math.Inf(1))
		if i%2 == 0 {
			w.Number(float64(i))
		} else {
			w.Null()
		}
		w.Null()
		if i < 9 {
			w.Text([]string{"good", "", "bad"}[i%3])
		} else {
			w.Null()
		}
		if err := w.End(); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	bodies, rows := pages(t, b.Bytes())
	if len(bodies) != 1 || rows[0] != 10 {
		t.Fatalf("row groups of %v rows", rows)
	}
	column := bodies[0]
	for i := range 10 {
		if at := int64(binary.LittleEndian.Uint64(column[0][8*i:])); at != -int64(i) {
			t.Errorf("instant %d is %d", i, at)
		}
	}
	if !bytes.Equal(column[1], []byte{0b01001001, 0b10}) {
		t.Errorf("booleans %b", column[1])
	}
	if want := strings.Repeat("\x04\x00\x00\x00good\x00\x00\x00\x00\x03\x00\x00\x00bad", 3); string(column[5]) != "\x03\x00\x00\x00\x05\xff\x01"+want {
		t.Errorf("texts of which all but one are there: % x", column[5])
	}
	if !bytes.HasPrefix(column[2], []byte{2, 0, 0, 0, 10 << 1, 1}) || len(column[2]) != 6+80 {
		t.Errorf("numbers that are all there: % x", column[2])
	}
	if !bytes.HasPrefix(column[3], []byte{3, 0, 0, 0, 2<<1 | 1, 0b01010101, 0b01}) || len(column[3]) != 7+40 || math.Float64frombits(binary.LittleEndian.Uint64(column[3][7+8*4:])) != 8 {
		t.Errorf("numbers of which some are there: % x", column[3])
	}
	if !bytes.Equal(column[4], []byte{2, 0, 0, 0, 10 << 1, 0}) {
		t.Errorf("numbers of which none is there: % x", column[4])
	}
}

// The schema names the columns in their order, and says what the first one counts.
func TestSchema(t *testing.T) {
	var b bytes.Buffer
	columns := []Column{{"at", Instant}}
	for range 20 {
		columns = append(columns, Column{"x", Number})
	}
	if err := NewWriter(&b, append(columns, Column{"ok", Truth})).Close(); err != nil {
		t.Fatal(err)
	}
	footer := footerOf(t, b.Bytes())
	schema := footer[2].([]any)
	element := func(i int) map[int]any { return schema[i].(map[int]any) }
	if len(schema) != 23 || element(0)[5] != int64(22) || footer[3] != int64(0) || len(footer[4].([]any)) != 0 {
		t.Errorf("%d elements, root %v, %v rows", len(schema), element(0), footer[3])
	}
	if at := element(1); at[4] != "at" || at[1] != int64(2) || at[3] != int64(required) || at[10].(map[int]any)[8].(map[int]any)[1] != true {
		t.Errorf("the instant: %v", at)
	}
	if x := element(2); x[4] != "x" || x[1] != int64(5) || x[3] != int64(optional) {
		t.Errorf("a number: %v", x)
	}
	if ok := element(22); ok[4] != "ok" || ok[1] != int64(0) || ok[3] != int64(required) {
		t.Errorf("a boolean: %v", ok)
	}
}

// Row groups have as many rows as their columns allow, and the rows of all add up.
func TestRowGroups(t *testing.T) {
	const n = 3*groupFields/2 + 17
	var b bytes.Buffer
	w := NewWriter(&b, []Column{{"at", Instant}, {"x", Number}})
	for i := range int64(n) {
		w.Instant(i)
		w.Number(float64(i) / 3)
		if err := w.End(); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	bodies, rows := pages(t, b.Bytes())
	if len(rows) != 4 || rows[0] != groupFields/2 || rows[3] != 17 || footerOf(t, b.Bytes())[3] != int64(n) {
		t.Fatalf("row groups of %v rows", rows)
	}
	for i := range n {
		x := bodies[i/(groupFields/2)][1]
		if got := math.Float64frombits(binary.LittleEndian.Uint64(x[len(x)-8*int(rows[i/(groupFields/2)])+8*(i%(groupFields/2)):])); got != float64(i)/3 {
			t.Fatalf("row %d is %v", i, got)
		}
	}
}

type full struct{ room int }

var errFull = errors.New("no space left")

func (f *full) Write(b []byte) (int, error) {
	if f.room -= len(b); f.room < 0 {
		return 0, errFull
	}
	return len(b), nil
}

// Wherever what it writes to ends, a row or the close says so.
func TestFull(t *testing.T) {
	for room := range 200 {
		w := NewWriter(&full{room}, []Column{{"at", Instant}})
		w.Instant(1)
		err := w.End()
		if !errors.Is(errors.Join(err, w.Close()), errFull) && room < 100 {
			t.Errorf("room for %d bytes: %v", room, err)
		}
	}
}
