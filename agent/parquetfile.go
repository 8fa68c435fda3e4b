package agent

import (
	"bytes"
	"fmt"
	"io"
	"strconv"
	"time"

	"heatreeve/agent/parquet"
)

const parquetFormat = "parquet"

// truthColumn is the one column of booleans, and these are those of text.
const (
	truthColumn   = "stamped"
	qualityColumn = "quality"
	reasonColumn  = "reason"
)

// parquetFile turns the lines of a CSV export, as [rows] writes them, into a Parquet file:
// the first column is an instant, stamped is a boolean, quality and reason are text, and all
// others are numbers. Text and numbers are null where the field is empty. It is not whole until it is closed.
type parquetFile struct {
	to      io.Writer
	w       *parquet.Writer // nil before the line of names
	columns []parquet.Column
	line    []byte // what has come of the line under way
}

func newParquetFile(to io.Writer) *parquetFile { return &parquetFile{to: to} }

func (f *parquetFile) Write(p []byte) (n int, err error) {
	for n < len(p) {
		i := bytes.IndexByte(p[n:], '\n')
		if i < 0 {
			f.line = append(f.line, p[n:]...)
			return len(p), nil
		}
		f.line = append(f.line, p[n:n+i]...)
		if err := f.take(bytes.TrimSuffix(f.line, []byte("\r"))); err != nil {
			return n, err
		}
		f.line = f.line[:0]
		n += i + 1
	}
	return n, nil
}

// take takes a line: that of names, or a row.
func (f *parquetFile) take(line []byte) error {
	if f.w == nil {
		f.begin(line)
		return nil
	}
	if n := 1 + bytes.Count(line, []byte(",")); n != len(f.columns) {
		return fmt.Errorf("a row of %d fields in %d columns: that is no export", n, len(f.columns))
	}
	column := 0
	for field := range bytes.SplitSeq(line, []byte(",")) {
		if err := f.field(f.columns[column].Kind, field); err != nil {
			return fmt.Errorf("%s: %w", f.columns[column].Name, err)
		}
		column++
	}
	return f.w.End()
}

func (f *parquetFile) begin(names []byte) {
	for name := range bytes.SplitSeq(names, []byte(",")) {
		c := parquet.Column{Name: string(name), Kind: parquet.Number}
		switch {
		case len(f.columns) == 0:
			c.Kind = parquet.Instant
		case c.Name == truthColumn:
			c.Kind = parquet.Truth
		case c.Name == qualityColumn || c.Name == reasonColumn:
			c.Kind = parquet.Text
		}
		f.columns = append(f.columns, c)
	}
	f.w = parquet.NewWriter(f.to, f.columns)
}

// field adds the next field of a row.
func (f *parquetFile) field(kind parquet.Kind, text []byte) error {
	switch {
	case kind == parquet.Instant:
		t, err := time.Parse(time.RFC3339, string(text))
		if err != nil {
			return err
		}
		f.w.Instant(t.UnixNano())
	case kind == parquet.Truth:
		b, err := strconv.ParseBool(string(text))
		if err != nil {
			return err
		}
		f.w.Truth(b)
	case len(text) == 0:
		f.w.Null()
	case kind == parquet.Text:
		f.w.Text(string(text))
	default:
		x, err := strconv.ParseFloat(string(text), 64)
		if err != nil {
			return err
		}
		f.w.Number(x)
	}
	return nil
}

// close ends the file.
func (f *parquetFile) close() error {
	if f.w == nil {
		return nil
	}
	return f.w.Close()
}
