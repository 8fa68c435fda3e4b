package learning

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"

	"heatreeve/agent/design/expect"
	"heatreeve/agent/site"
	"heatreeve/thermo/unit"
)

// Block writes a baseline as the block of a design in a site file, against the tags with the
// given indexes. Learned says from what, in words.
func Block(b *expect.Baseline, habit expect.Habit, s *site.Site, tags []int, learned string) string {
	var w strings.Builder
	line := func(format string, args ...any) { fmt.Fprintf(&w, format+"\n", args...) }
	line("baseline:")
	line("  learned: %s", strconv.Quote(learned))
	line("  duty: %s", power(b.Duty))
	line("  against:")
	for k := range b.Terms {
		line("    %s: {%s}", key(s.Tags[tags[k]].Name), term(&b.Terms[k], s, &s.Tags[tags[k]]))
	}
	if len(b.Correlation) > 0 {
		var all []string
		for _, r := range b.Correlation {
			all = append(all, fmt.Sprintf("%.3f", r))
		}
		line("  correlation: [%s]", strings.Join(all, ", "))
	}
	line("  residual: %s", power(b.Residual))
	line("  lag: %.3f", b.Lag)
	line("  samples: %d", b.Samples)
	line("  span: %g min", b.Span)
	if len(b.Hours) > 0 {
		line("  fewest: %d", b.Cell)
		line("  hours:")
		for _, d := range daysOf(habit) {
			line("    %s: %s", d.name, hours(b.Hours[d.from:d.from+24]))
		}
	}
	return w.String()
}

type dayOf struct {
	name string
	from int
}

func daysOf(h expect.Habit) []dayOf {
	if h == expect.DayHabit {
		return []dayOf{{"workday", 0}, {"weekend", 5 * 24}}
	}
	var all []dayOf
	for d, name := range []string{"monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday"} {
		all = append(all, dayOf{name, 24 * d})
	}
	return all
}

func hours(all []float64) string {
	var text []string
	for _, q := range all {
		text = append(text, power(q))
	}
	return "[" + strings.Join(text, ", ") + "]"
}

func power(q float64) string { return fmt.Sprintf("%.6g kW", q/1e3) }

// term writes what one tag adds, in its own unit.
func term(t *expect.Term, s *site.Site, tag *site.Tag) string {
	value := func(si float64) string {
		if tag.Unit.Gauge {
			si -= s.Barometer
		}
		return fmt.Sprintf("%.7g %s", tag.Unit.Of(si), tag.Unit.Symbol)
	}
	step, symbol := tag.Unit.Factor, tag.Unit.Symbol
	if tag.Unit.Dimension == unit.Temperature {
		step, symbol = 1, "K"
	}
	parts := []string{
		"each: 1 " + symbol,
		"adds: " + power(t.Slope*step),
		"uncertainty: " + power(t.Error*step),
		"from: " + value(t.Low), "to: " + value(t.High),
	}
	centre := value(t.Centre)
	if t.Bend != expect.Straight {
		centre = fmt.Sprintf("%.7g %s", t.Centre/step, symbol)
	}
	parts = append(parts, "centre: "+centre)
	switch t.Bend {
	case expect.Below:
		parts = append(parts, "below: "+value(t.Limit))
	case expect.Above:
		parts = append(parts, "above: "+value(t.Limit))
	}
	for i, p := range parts {
		name, x, _ := strings.Cut(p, ": ")
		parts[i] = name + ": " + quoted(x)
	}
	return strings.Join(parts, ", ")
}

var plain = regexp.MustCompile(`^[\pL][\pL0-9_./ -]*$`)

// key writes the name of a tag as YAML takes it.
func key(name string) string {
	switch strings.ToLower(name) {
	case "y", "n", "yes", "no", "on", "off", "true", "false", "null":
		return strconv.Quote(name)
	}
	if plain.MatchString(name) {
		return name
	}
	return strconv.Quote(name)
}

// quoted puts a quantity in quotes where its unit has a character that means something in
// YAML.
func quoted(x string) string {
	if strings.ContainsAny(x, "%#&*!|>'\"@`{}[],:") {
		return strconv.Quote(x)
	}
	return x
}
