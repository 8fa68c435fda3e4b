package fluidtest

import (
	"encoding/csv"
	"fmt"
	"io/fs"
	"math"
	"strconv"
	"testing"
)

// Row is a line of a table of figures to check against, by the names of its columns.
type Row struct {
	t     testing.TB
	table string
	line  int
	cells map[string]string
}

// Rows reads a table: comma-separated, a heading, lines that start with # left out. A table
// that cannot be read, or has no row, ends the test; so does asking a row for what it has not.
func Rows(t testing.TB, dir fs.FS, name string) []Row {
	t.Helper()
	file, err := dir.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	c := csv.NewReader(file)
	c.Comment = '#'
	lines, err := c.ReadAll()
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	if len(lines) < 2 {
		t.Fatalf("%s: no rows below a heading", name)
	}
	var out []Row
	for k, line := range lines[1:] {
		r := Row{t, name, k + 1, map[string]string{}}
		for i, column := range lines[0] {
			r.cells[column] = line[i]
		}
		if len(r.cells) != len(line) {
			t.Fatalf("%s: a column of the same name twice in %q", name, lines[0])
		}
		out = append(out, r)
	}
	return out
}

// Text is what stands in a column, which must be one of the table's.
func (r Row) Text(column string) string {
	r.t.Helper()
	cell, ok := r.cells[column]
	if !ok {
		r.t.Fatalf("%s, row %d: no column %q", r.table, r.line, column)
	}
	return cell
}

// Has tells whether anything stands in a column, which must be one of the table's.
func (r Row) Has(column string) bool {
	r.t.Helper()
	return r.Text(column) != ""
}

// Number is the figure in a column. NaN and infinities, which no comparison would catch, are
// none.
func (r Row) Number(column string) float64 {
	r.t.Helper()
	cell := r.Text(column)
	v, err := strconv.ParseFloat(cell, 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		r.t.Fatalf("%s, row %d: %q in column %q is no figure", r.table, r.line, cell, column)
	}
	return v
}

// Printed is the figure in a column, or NaN where nothing is printed.
func (r Row) Printed(column string) float64 {
	r.t.Helper()
	if !r.Has(column) {
		return math.NaN()
	}
	return r.Number(column)
}

// String names the row in a message.
func (r Row) String() string { return fmt.Sprintf("%s, row %d %q", r.table, r.line, r.cells) }
