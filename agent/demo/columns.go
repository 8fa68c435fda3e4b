package demo

import (
	"strings"
	"unicode/utf8"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

// column is one column of the table. Of those that do not fit, the ones with the
// highest rank are left out first; rank 0 always stands.
type column struct {
	title, unit string
	rank        int
	left        bool // words are set to the left, figures to the right
	cell        func(l *view.Load) string
}

const verdictTitle = "verdict"

// Indices into the rolling means, in the order of [loads.Windows].
const (
	quarterHour = 1
	hour        = 2
)

var columns = []column{
	{"load", "", 0, true, func(l *view.Load) string { return fit(l.Name, longestName) }},
	{verdictTitle, "", 0, true, func(l *view.Load) string { return l.Verdict.String() }},
	{"duty ±2u", "kW", 0, false, dutyCell},
	{"design", "kW", 2, false, func(l *view.Load) string {
		if l.Design == 0 {
			return none
		}
		return number(l.Design/1e3, dutyDecimals(&l.Figure))
	}},
	{"inlet → outlet", "°C", 1, false, func(l *view.Load) string {
		if !flowing(l) {
			return none
		}
		return celsius(l.Figure.Inlet) + " → " + celsius(l.Figure.Outlet)
	}},
	{"flow", "kg/s", 4, false, func(l *view.Load) string {
		if !flowing(l) {
			return none
		}
		return number(l.Figure.MassFlow, 2)
	}},
	{"15 min", "kW", 3, false, func(l *view.Load) string { return meanCell(l.Means[quarterHour], &l.Figure) }},
	{"measured", "of 1 h", 6, false, func(l *view.Load) string { return percent(l.Means[hour].Coverage) }},
	{"given", "", 5, false, func(l *view.Load) string { return energy(l.Booked.Given) }},
	{"taken", "", 5, false, func(l *view.Load) string { return energy(l.Booked.Taken) }},
}

const (
	gap         = 2  // spaces between columns
	longestName = 24 // of a load, in the table
)

// flowing tells whether the temperatures and the flow of the figure mean
// anything; a vessel has none.
func flowing(l *view.Load) bool {
	return l.Figure.Measured() && !l.Figure.Idle && l.Figure.Content == 0
}

func dutyCell(l *view.Load) string {
	f := &l.Figure
	switch {
	case !f.Measured():
		return none
	case f.Idle:
		return "0"
	}
	d := dutyDecimals(f)
	return number(f.Duty/1e3, d) + " ± " + number(2*f.Uncertainty/1e3, d)
}

func meanCell(m loads.Mean, f *loads.Figure) string {
	if m.Coverage == 0 {
		return none
	}
	return number(m.Duty/1e3, dutyDecimals(f))
}

// grid sets the loads in columns under a title and a unit.
func grid(s *view.Snapshot, o TableOptions) []string {
	cols := columns
	cells := fill(cols, s)
	for rank := highest(cols); rank > 0 && span(cells) > o.Width; rank-- {
		cols = without(cols, rank)
		cells = fill(cols, s)
	}
	lines := make([]string, len(cells[0]))
	for row := range lines {
		lines[row] = setRow(cols, cells, row, o)
	}
	return lines
}

// fill returns the texts of each column: title, unit, and a line for each load.
func fill(cols []column, s *view.Snapshot) [][]string {
	cells := make([][]string, len(cols))
	for i, c := range cols {
		cells[i] = []string{c.title, c.unit}
		for k := range s.Loads {
			cells[i] = append(cells[i], c.cell(&s.Loads[k]))
		}
	}
	return cells
}

func highest(cols []column) int {
	rank := 0
	for _, c := range cols {
		rank = max(rank, c.rank)
	}
	return rank
}

func without(cols []column, rank int) []column {
	var kept []column
	for _, c := range cols {
		if c.rank != rank {
			kept = append(kept, c)
		}
	}
	return kept
}

// span is how wide the columns are together.
func span(cells [][]string) int {
	sum := gap * (len(cells) - 1)
	for _, texts := range cells {
		sum += widest(texts)
	}
	return sum
}

func widest(texts []string) int {
	n := 0
	for _, text := range texts {
		n = max(n, utf8.RuneCountInString(text))
	}
	return n
}

// setRow sets one row. Rows 0 and 1 are titles and units. Where the row does not
// fit it is cut, and then it has no colour.
func setRow(cols []column, cells [][]string, row int, o TableOptions) string {
	colour := o.Colour && row > 1 && span(cells) <= o.Width
	var b strings.Builder
	for i, c := range cols {
		text := cells[i][row]
		space := strings.Repeat(" ", widest(cells[i])-utf8.RuneCountInString(text))
		if colour && c.title == verdictTitle {
			text = coloured(text)
		}
		if !c.left {
			text, space = space+text, ""
		}
		b.WriteString(text + space + strings.Repeat(" ", gap))
	}
	line := strings.TrimRight(b.String(), " ")
	if colour {
		return line // it fits, and the codes take no room
	}
	return fit(line, o.Width)
}

// coloured puts a verdict into its colour, if it has one.
func coloured(text string) string {
	for v, code := range colours {
		if text == v.String() {
			return "\x1b[" + code + "m" + text + "\x1b[0m"
		}
	}
	return text
}

var colours = map[design.Verdict]string{
	design.Holding: "32", // green
	design.Short:   "33", // yellow
	design.Over:    "35", // magenta
	design.Blind:   "31", // red
}
