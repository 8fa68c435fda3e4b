package ingest

import (
	"fmt"
	"slices"
	"strings"
)

// covers tells whether messages on the topic go to those who subscribed to the filter:
// MQTT 3.1.1, section 4.7.
func covers(filter, topic string) bool {
	if strings.HasPrefix(topic, "$") && !strings.HasPrefix(filter, "$") {
		return false
	}
	f, t := strings.Split(filter, "/"), strings.Split(topic, "/")
	for i, level := range f {
		switch {
		case level == "#":
			return true
		case i >= len(t), level != "+" && level != t[i]:
			return false
		}
	}
	return len(f) == len(t)
}

// overlap tells whether there can be a topic that both filters cover.
func overlap(a, b string) bool {
	x, y := strings.Split(a, "/"), strings.Split(b, "/")
	for i := range min(len(x), len(y)) {
		switch {
		case x[i] == "#" || y[i] == "#":
			return true
		case x[i] != y[i] && x[i] != "+" && y[i] != "+":
			return false
		}
	}
	longer := x
	if len(y) > len(x) {
		longer = y
	}
	rest := longer[min(len(x), len(y)):]
	return len(rest) == 0 || rest[0] == "#" // "a/#" covers "a"
}

func checkFilter(filter string) error {
	levels := strings.Split(filter, "/")
	for i, level := range levels {
		if strings.ContainsAny(level, "+#") && level != "+" && (level != "#" || i < len(levels)-1) {
			return fmt.Errorf("filter %q: + stands for a whole level, and # for all below at the end", filter)
		}
	}
	return checkTopic(strings.NewReplacer("+", "x", "#", "x").Replace(filter))
}

// checkFilters returns the first fault among filters for the topics. Two that overlap
// would have a message delivered twice.
func checkFilters(filters []string, topics []*topic) error {
	for i, f := range filters {
		if err := checkFilter(f); err != nil {
			return fmt.Errorf("subscribe: %w", err)
		}
		if !slices.ContainsFunc(topics, func(t *topic) bool { return covers(f, t.name) }) {
			return fmt.Errorf("subscribe: filter %q covers no topic of a tag", f)
		}
		for _, other := range filters[:i] {
			if overlap(f, other) {
				return fmt.Errorf("subscribe: filters %q and %q overlap; a message would come twice", other, f)
			}
		}
	}
	return nil
}

// under returns what to subscribe to: the filters, and the topics that none covers; and
// the topics that one does.
func under(filters []string, topics []*topic) (subscribe []*topic, covered []string) {
	for _, f := range filters {
		subscribe = append(subscribe, &topic{name: f, qos: 1})
	}
	for _, t := range topics {
		if slices.ContainsFunc(filters, func(f string) bool { return covers(f, t.name) }) {
			covered = append(covered, t.name)
		} else {
			subscribe = append(subscribe, t)
		}
	}
	return subscribe, covered
}
