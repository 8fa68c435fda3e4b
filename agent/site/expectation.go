package site

import (
	"fmt"
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

const (
	// HoursAWeek is how many hours a [Design.Week] tells apart, from Monday midnight by the
	// clock of the site.
	HoursAWeek = 7 * 24
	// mostPoints bounds the points of a table.
	mostPoints = 4096
)

// Table is a duty against one tag or two, known at each pair of their places.
type Table struct {
	Against []int       // one or two tags, indexes into Site.Tags
	At      [][]float64 // places of each, SI, rising
	Duty    []float64   // W, row by row: a row for each place of the first tag
}

// expectations are the keys that say what is expected of a load, of which a design has one.
var expectations = []string{"duty", "table", "week", "baseline", "exchanger"}

// expectation reads what is expected of a load, and how sure that is.
func (r *reader) expectation(o object, d *Design) {
	var given []string
	for _, key := range expectations {
		v, ok := o.get(key)
		if !ok {
			continue
		}
		if given = append(given, key); len(given) > 1 {
			v.fault("stands beside %s; a design has one of %s", given[0], strings.Join(expectations, ", "))
		}
	}
	if v, ok := o.get("duty"); ok {
		d.Duty = r.constant(v, unit.Power)
	}
	if v, ok := o.get("table"); ok {
		d.Table = r.dutyTable(v.object("loads.*.design.table"))
	}
	if v, ok := o.get("week"); ok {
		d.Week = v.week("loads.*.design.week")
	}
	if v, ok := o.get("baseline"); ok {
		d.Baseline = r.baseline(v.object("loads.*.design.baseline"))
	}
	if v, ok := o.get("exchanger"); ok {
		d.Exchanger, _ = name(v)
	}
	o.allowance(d, given)
}

// allowance reads what goes with any expectation.
func (o object) allowance(d *Design, given []string) {
	allow, hasAllow := o.get("allow")
	if hasAllow {
		d.Allow, _ = allow.part(1e-6, 1, "more than 0 % up to 100 %", "")
	}
	switch {
	case len(given) > 0 && !hasAllow:
		o.has[given[0]].fault("stands without allow; give both or neither")
	case len(given) == 0 && hasAllow && !o.misspelt(expectations):
		allow.fault("stands without what is expected: %s; give both or neither", strings.Join(expectations, ", "))
	}
	if v, ok := o.get("uncertainty"); ok {
		d.Uncertainty, _ = v.part(1e-6, 1, "more than 0 % up to 100 %", "")
		if slices.Contains(given, "baseline") || slices.Contains(given, "exchanger") {
			v.fault("is of a duty, table or week; %s brings its own", article(given[0]))
		} else if len(given) == 0 {
			v.fault("stands without what is expected: duty, table or week")
		}
	}
	if v, ok := o.get("false_warnings"); ok {
		d.FalseWarnings = v.bareWithin(0.1, 52)
		if len(given) == 0 {
			v.fault("stands without what is expected: %s", strings.Join(expectations, ", "))
		}
	}
}

// driver reads the name of a tag that a duty is told by; false where there is a fault.
func (r *reader) driver(v value) (tag int, ok bool) {
	s, ok := v.text()
	if !ok {
		return 0, false
	}
	return r.driverNamed(v, s)
}

func (r *reader) driverNamed(v value, s string) (tag int, ok bool) {
	i, declared := r.tags[s]
	switch {
	case !declared:
		var known []string
		for _, t := range r.site.Tags {
			if t.Counter == nil {
				known = append(known, t.Name)
			}
		}
		v.fault("tag %q is not declared%s; declared: %s", clip(s), nearOf(s, known), list(known))
	case r.site.Tags[i].Counter != nil:
		v.fault("tag %q counts; what a duty is told by is a reading", s)
	default:
		return i, r.site.Tags[i].Unit.Symbol != ""
	}
	return 0, false
}

// dutyTable reads a table, nil where there is a fault.
func (r *reader) dutyTable(o object) *Table {
	before := len(o.faults)
	t := &Table{}
	if v, ok := o.need("against", "a tag, or a list of two, such as TT-100"); ok {
		names := []value{v}
		if v.kind() == "a list" {
			if names = v.items(); len(names) < 1 || len(names) > 2 {
				v.fault("want one tag or two, found %d", len(names))
			}
		}
		for _, n := range names {
			tag, ok := r.driver(n)
			if !ok {
				return nil
			}
			if slices.Contains(t.Against, tag) {
				n.fault("stands twice")
			}
			t.Against = append(t.Against, tag)
		}
	}
	points, ok := o.need("points", "rows of a quantity for each tag and the duty: - [-10 °C, 420 kW]")
	if !ok || len(o.faults) > before {
		return nil
	}
	rows := r.dutyPoints(points, t)
	if len(o.faults) > before {
		return nil
	}
	if err := t.fill(rows); err != nil {
		points.fault("%v", err)
		return nil
	}
	return t
}

// dutyPoint is one row of a table: where, SI, and the duty, W.
type dutyPoint struct {
	at   [2]float64
	duty float64
}

func (r *reader) dutyPoints(v value, t *Table) (rows []dutyPoint) {
	items := v.items()
	if len(items) > mostPoints {
		v.fault("has %d rows; at most %d", len(items), mostPoints)
		return nil
	}
	for _, row := range items {
		cells := row.items()
		if want := len(t.Against) + 1; len(cells) != want {
			if cells != nil {
				row.fault("want %d quantities, one for each tag and the duty, found %d", want, len(cells))
			}
			continue
		}
		var p dutyPoint
		for k, tag := range t.Against {
			p.at[k], _ = r.reading(cells[k], tag)
		}
		if q, ok := cells[len(t.Against)].quantity(unit.Power); ok {
			p.duty = q.SI()
		}
		rows = append(rows, p)
	}
	return rows
}

// reading reads a quantity that a tag may tell, SI.
func (r *reader) reading(v value, tag int) (float64, bool) {
	u := r.site.Tags[tag].Unit
	q, ok := v.quantity(u.Dimension)
	switch {
	case !ok:
		return 0, false
	case !sameBasis(q.Unit, u):
		v.fault("%v and the tag's unit %v are not of the same; want %v", q, u, u)
		return 0, false
	}
	return unit.Decimal(r.absolute(q)), true
}

// fill puts the rows in order. The error says which place a table of two tags lacks, or has
// twice.
func (t *Table) fill(rows []dutyPoint) error {
	for k := range t.Against {
		var at []float64
		for _, p := range rows {
			at = append(at, p.at[k])
		}
		slices.Sort(at)
		t.At = append(t.At, slices.Compact(at))
		if n := len(t.At[k]); n < 2 {
			return fmt.Errorf("table has %d value of its %s tag; want at least two", n, [...]string{"first", "second"}[k])
		}
	}
	columns := 1
	if len(t.At) == 2 {
		columns = len(t.At[1])
	}
	switch want := len(t.At[0]) * columns; {
	case len(rows) != want && columns == 1:
		return fmt.Errorf("has %d rows for %d values of its tag; want each value once", len(rows), want)
	case len(rows) != want:
		return fmt.Errorf("has %d rows, and the values of its tags make %d; want each pair once", len(rows), want)
	}
	t.Duty = make([]float64, len(rows))
	seen := make([]bool, len(rows))
	for n, p := range rows {
		i, _ := slices.BinarySearch(t.At[0], p.at[0])
		if columns > 1 {
			j, _ := slices.BinarySearch(t.At[1], p.at[1])
			i = i*columns + j
		}
		if seen[i] {
			return fmt.Errorf("row %d has the values of one before it", n+1)
		}
		t.Duty[i], seen[i] = p.duty, true
	}
	return nil
}

// weekdays are the keys of a week, and which days each is for. A single day goes before its
// kind.
var weekdays = []struct {
	key      string
	from, to int
}{
	{"workday", 0, 5}, {"weekend", 5, 7}, {"monday", 0, 1}, {"tuesday", 1, 2}, {"wednesday", 2, 3}, {"thursday", 3, 4},
	{"friday", 4, 5}, {"saturday", 5, 6}, {"sunday", 6, 7},
}

// week reads a power for each hour of days; nil where there is a fault.
func (v value) week(block string) *[HoursAWeek]float64 {
	before := len(v.faults)
	o, w := v.object(block), new([HoursAWeek]float64)
	var told [7]bool
	for _, d := range weekdays {
		hours, ok := o.get(d.key)
		if !ok {
			continue
		}
		var day [24]float64
		hours.hours(day[:])
		for k := d.from; k < d.to; k++ {
			copy(w[24*k:], day[:])
			told[k] = true
		}
	}
	if k := slices.Index(told[:], false); k >= 0 && len(v.faults) == before {
		v.fault("does not tell of a %s; want 24 powers for each workday and weekend, or for the single days", weekdays[2+k].key)
	}
	if len(v.faults) > before {
		return nil
	}
	return w
}

// hours reads 24 powers.
func (v value) hours(into []float64) {
	items := v.items()
	if len(items) != len(into) && items != nil {
		v.fault("want %d powers, one for each hour from midnight, found %d", len(into), len(items))
		return
	}
	for i, h := range items {
		if q, ok := h.quantity(unit.Power); ok {
			into[i] = q.SI()
		}
	}
}
