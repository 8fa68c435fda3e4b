package agent

import (
	"bufio"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
)

// rowsAPiece is the size of the pieces that rows are written in.
const rowsAPiece = 32 << 10

// rows writes lines of equal columns as CSV (RFC 4180) under one line of their names, or
// as JSON with an object a line. The line of names comes with the first row.
type rows struct {
	w       *bufio.Writer
	columns []string
	json    bool
	count   int64
	line    []byte
	column  int
}

func newRows(w io.Writer, json bool, columns []string) *rows {
	return &rows{w: bufio.NewWriterSize(w, rowsAPiece), columns: columns, json: json}
}

// next makes room for the next field of the row.
func (r *rows) next() {
	switch {
	case r.json && r.column == 0:
		r.line = append(r.line[:0], '{')
	case r.column == 0:
		r.line = r.line[:0]
	default:
		r.line = append(r.line, ',')
	}
	if r.json {
		r.line = append(strconv.AppendQuote(r.line, r.columns[r.column]), ':')
	}
	r.column++
}

// instant adds a time in UTC by layout.
func (r *rows) instant(ns int64, layout string) {
	r.next()
	if r.json {
		r.line = append(r.line, '"')
	}
	r.line = time.Unix(0, ns).UTC().AppendFormat(r.line, layout)
	if r.json {
		r.line = append(r.line, '"')
	}
}

// number adds x with as many digits as lead back to it; one that is not finite is none.
func (r *rows) number(x float64) { r.float(x, 64) }

// mean adds x as number does, with the digits that lead back to its float32, which is
// what the history keeps of a mean.
func (r *rows) mean(x float64) { r.float(x, 32) }

func (r *rows) float(x float64, bits int) {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		r.none()
		return
	}
	r.next()
	form := byte('f')
	if a := math.Abs(x); a != 0 && a < 1e-6 || a >= 1e21 {
		form = 'e'
	}
	r.line = strconv.AppendFloat(r.line, x, form, -1, bits)
}

// meanIf adds x as mean does, or an empty field.
func (r *rows) meanIf(there bool, x float64) {
	if !there {
		r.none()
		return
	}
	r.mean(x)
}

func (r *rows) truth(b bool) {
	r.next()
	r.line = strconv.AppendBool(r.line, b)
}

// word adds a text that needs no quotes, or an empty field.
func (r *rows) word(s string) {
	if s == "" {
		r.none()
		return
	}
	r.next()
	if r.json {
		r.line = strconv.AppendQuote(r.line, s)
		return
	}
	r.line = append(r.line, s...)
}

// none adds an empty field, null in JSON.
func (r *rows) none() {
	r.next()
	if r.json {
		r.line = append(r.line, "null"...)
	}
}

// end writes the row.
func (r *rows) end() error {
	if r.count == 0 && !r.json {
		if _, err := r.w.WriteString(strings.Join(r.columns, ",") + "\r\n"); err != nil {
			return err
		}
	}
	if r.json {
		r.line = append(r.line, "}\n"...)
	} else {
		r.line = append(r.line, "\r\n"...)
	}
	r.column = 0
	r.count++
	_, err := r.w.Write(r.line)
	return err
}

func (r *rows) flush() error { return r.w.Flush() }
