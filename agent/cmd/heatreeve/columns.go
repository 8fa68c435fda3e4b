package main

import (
	"strings"
	"text/tabwriter"
)

// columns lines text up in columns, without blanks at the ends of lines.
type columns struct {
	text strings.Builder
	tabs *tabwriter.Writer
}

func newColumns(flags uint) *columns {
	c := new(columns)
	c.tabs = tabwriter.NewWriter(&c.text, 0, 0, 2, ' ', flags)
	return c
}

func (c *columns) line(cells ...string) {
	c.tabs.Write([]byte(strings.Join(cells, "\t") + "\t\n")) // into memory, which does not fail
}

// String ends the table and returns it.
func (c *columns) String() string {
	c.tabs.Flush()
	var lines strings.Builder
	for line := range strings.Lines(c.text.String()) {
		lines.WriteString(strings.TrimRight(line, " \n") + "\n")
	}
	return lines.String()
}
