package agent

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"
	"strconv"
	"time"
)

// Progress is how far an export has come.
type Progress struct {
	Rows      int64
	First, At time.Time // of the first row, and of the last
	Until     time.Time // to where it can go
	Note      string    // what is to know about all of it; may be empty
}

// Extract writes what s selects of a history to w: of a data folder, or of a copy of its
// file. Where an agent runs on the folder, it is asked. tell hears of each piece
// that has been written. What is wrong with s is a [*QueryError]. After any other
// error what was written is not the whole.
func Extract(ctx context.Context, data string, s Selection, w io.Writer, tell func(Progress)) error {
	if err := s.check(); err != nil {
		return err
	}
	m := &meter{w: w, tell: tell, json: s.Format == "json"}
	err := m.exportAs(s, func(s Selection) error {
		return reach(data, func(a address) error { return m.ask(ctx, a, s) }, func(h history) error { return m.read(ctx, h, s) })
	})
	if err != nil && ctx.Err() != nil {
		return fmt.Errorf("stopped after %d rows, what was written is not the whole: %w", m.Rows, context.Cause(ctx))
	}
	return err
}

// exportAs has an export made, and Parquet of it where that is wanted: a file that has its end
// only where all rows have come.
func (m *meter) exportAs(s Selection, export func(Selection) error) error {
	if s.Format != parquetFormat {
		return export(s)
	}
	file := newParquetFile(m.w)
	m.w, s.Format = file, "csv"
	err := export(s)
	if m.ended {
		err = errors.Join(err, file.close())
	}
	return err
}

// read exports from a file.
func (m *meter) read(ctx context.Context, h history, s Selection) error {
	x, err := h.export(s)
	if err != nil {
		return err
	}
	m.Until, m.Note = x.until(), x.note
	if err := x.write(ctx, m); err != nil {
		return err
	}
	m.ended = true
	return x.whole()
}

// ask has the agent at a export.
func (m *meter) ask(ctx context.Context, a address, s Selection) error {
	return a.get(ctx, exportPath, s.values(), func(resp *http.Response) error { return m.take(a, resp) })
}

// take passes the agent's answer on.
func (m *meter) take(a address, resp *http.Response) (err error) {
	if resp.StatusCode != http.StatusOK {
		body, err := io.ReadAll(io.LimitReader(resp.Body, rowsAPiece))
		if err != nil {
			return fmt.Errorf("agent at %s: %w", a.hostPort, err)
		}
		return refusal(resp.StatusCode, body)
	}
	if m.Until, err = time.Parse(time.RFC3339, resp.Header.Get(untilHeader)); err != nil {
		return fmt.Errorf("agent at %s: its export tells no end: %w", a.hostPort, err)
	}
	m.Note = resp.Header.Get(noteHeader)
	if _, err := io.CopyBuffer(m, resp.Body, make([]byte, rowsAPiece)); err != nil {
		if m.fault != nil {
			return m.fault
		}
		return fmt.Errorf("agent at %s: its export breaks off after %d rows: %w", a.hostPort, m.Rows, err)
	}
	if n := resp.Trailer.Get(rowsTrailer); n != strconv.FormatInt(m.Rows, 10) {
		return fmt.Errorf("agent at %s: its export has %d rows, and should have %q", a.hostPort, m.Rows, n)
	}
	m.ended = true
	if damage := resp.Trailer.Get(damageTrailer); damage != "" {
		return errors.New(damage)
	}
	return nil
}

// mostLine bounds what is kept of a row; the longest that there is takes some 500 bytes. A
// piece may end with as much of a row.
const mostLine = rowsAPiece

// meter passes an export on and sees from its lines how far it is.
type meter struct {
	Progress
	w     io.Writer
	tell  func(Progress)
	json  bool
	named bool   // the line of names has passed
	line  []byte // what has come of the line under way
	fault error  // of w, or of the rows
	ended bool   // all rows have passed
}

func (m *meter) Write(p []byte) (n int, err error) {
	if n, m.fault = m.w.Write(p); m.fault != nil {
		return n, m.fault
	}
	before := m.Rows
	for rest := p; ; {
		i := bytes.IndexByte(rest, '\n')
		if i < 0 {
			if len(m.line)+len(rest) > mostLine {
				m.fault = fmt.Errorf("a row of more than %d bytes after %d rows: that is no export", mostLine, m.Rows)
				return n, m.fault
			}
			m.line = append(m.line, rest...)
			break
		}
		m.row(rest[:i], bytes.IndexByte(rest[i+1:], '\n') < 0)
		rest = rest[i+1:]
	}
	if m.Rows > before {
		m.tell(m.Progress)
	}
	return n, nil
}

// row takes a line, of which end may be only its end. Of the first row and of the last of
// a piece the time is read.
func (m *meter) row(end []byte, last bool) {
	if !m.json && !m.named {
		m.named, m.line = true, m.line[:0]
		return
	}
	m.Rows++
	if last || m.Rows == 1 {
		line := append(m.line, end...)
		if at, ok := lineTime(line); ok {
			m.At = at
			if m.Rows == 1 {
				m.First = at
			}
		}
	}
	m.line = m.line[:0]
}

// lineTime is the time that a row begins with.
func lineTime(line []byte) (time.Time, bool) {
	if len(line) > 0 && line[0] == '{' {
		_, line, _ = bytes.Cut(line, []byte(`":"`))
	}
	if i := bytes.IndexAny(line, `",`); i >= 0 {
		line = line[:i]
	}
	t, err := time.Parse(time.RFC3339, string(line))
	return t, err == nil
}
