package demo

import (
	"fmt"
	"io"
	"strings"
	"time"

	"heatreeve/agent/view"
)

// TableOptions say how a table of the loads is drawn.
type TableOptions struct {
	Width  int            // columns of the terminal, 0 is 80; what does not fit is left out
	Colour bool           // colour the verdicts, whose word says the same
	Zone   *time.Location // of the plant's time; nil is UTC
	Notice string         // stands at the bottom
}

const usualWidth = 80

// tableLines draws the loads of a snapshot, one a line, and below them why a load is
// blind or what to bear in mind with its duty, how the broker does, and the notice. No line is wider than the
// width. Uncertainties are expanded, k = 2, with two digits (JCGM 100:2008,
// 7.2.6), and the figures go as far.
func tableLines(s *view.Snapshot, o TableOptions) []string {
	if o.Width <= 0 {
		o.Width = usualWidth
	}
	if o.Zone == nil {
		o.Zone = time.UTC
	}
	lines := []string{fit(heading(s, o.Zone), o.Width), ""}
	lines = append(lines, grid(s, o)...)
	lines = append(lines, "")
	for i := range s.Loads {
		lines = append(lines, remarks(&s.Loads[i], o.Width)...)
	}
	for i := range s.Exchangers {
		if x, ok := s.Told(i); ok {
			lines = append(lines, wrap(exchangerLine(x, o.Zone), o.Width)...)
		}
	}
	for _, l := range s.Warnings.Listed() {
		if l.End != 0 {
			continue // over, and not yet acknowledged: heatreeve warnings lists it
		}
		lines = append(lines, wrap(warningLine(&l, o.Zone), o.Width)...)
	}
	for _, line := range standing(s) {
		lines = append(lines, fit(line, o.Width))
	}
	return append(lines, wrap(o.Notice, o.Width)...)
}

// remarks say why a load is blind, or what to bear in mind with its duty.
func remarks(l *view.Load, width int) []string {
	f := &l.Figure
	if !f.Measured() {
		return []string{fit(fmt.Sprintf("%s is blind: %s", l.Name, f.Reason), width)}
	}
	var lines []string
	if d := f.Doubt(); d != "" {
		lines = append(lines, fit(l.Name+": "+d, width))
	}
	if f.Note != "" {
		lines = append(lines, wrap(l.Name+", "+f.Note, width)...)
	}
	return lines
}

func heading(s *view.Snapshot, zone *time.Location) string {
	if s.At == 0 {
		return s.Site + ", waiting for the first readings"
	}
	return s.Site + ", " + time.Unix(0, s.At).In(zone).Format("Mon 2 Jan 2006 15:04:05 MST")
}

func write(w io.Writer, lines []string) error {
	_, err := io.WriteString(w, strings.Join(lines, "\n")+"\n")
	return err
}
