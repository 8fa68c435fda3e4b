package demo

import (
	"fmt"
	"io"
	"time"

	"heatreeve/agent/view"
)

// DisplayOptions say where and how often the table is shown.
type DisplayOptions struct {
	Terminal bool // draw over the last table; otherwise each goes below the last
	// Width is asked before each table; nil is 80 columns.
	Width func() int
	// Every is the least time between two tables; zero is 0.2 s in a terminal
	// and 10 s elsewhere.
	Every time.Duration
	// Table is how each is drawn, but for its width.
	Table TableOptions
}

// Display shows the table of the loads over and over. It is for one goroutine.
type Display struct {
	w     io.Writer
	o     DisplayOptions
	shown time.Time
	lines int // of the table on the terminal
}

// NewDisplay returns a display on w that shows nothing yet.
func NewDisplay(w io.Writer, o DisplayOptions) *Display {
	if o.Width == nil {
		o.Width = func() int { return usualWidth }
	}
	if o.Every == 0 {
		o.Every = 10 * time.Second
		if o.Terminal {
			o.Every = 200 * time.Millisecond
		}
	}
	return &Display{w: w, o: o}
}

// Show shows s, unless the last table is too recent.
func (d *Display) Show(s *view.Snapshot) error {
	now := time.Now()
	if !d.shown.IsZero() && now.Sub(d.shown) < d.o.Every {
		return nil
	}
	d.shown = now
	o := d.o.Table
	o.Width = d.o.Width()
	if d.o.Terminal && d.lines > 0 {
		// Up to the first line of the last table, and clear from there on.
		if _, err := fmt.Fprintf(d.w, "\x1b[%dA\r\x1b[J", d.lines); err != nil {
			return err
		}
	}
	lines := tableLines(s, o)
	d.lines = len(lines)
	if !d.o.Terminal {
		lines = append(lines, "")
	}
	return write(d.w, lines)
}
