package page

import "strings"

// holds tells whether a validator is among those of If-None-Match, or they are any (RFC 9110,
// 13.1.2). The comparison is the weak one (8.8.3.2). What is no list of entity tags counts up to
// where it is one.
func holds(lines []string, tag string) bool {
	list := strings.Join(lines, ",")
	if strings.TrimSpace(list) == "*" {
		return true
	}
	for {
		list = strings.TrimLeft(list, ", \t")
		one, rest, ok := entityTag(strings.TrimPrefix(list, "W/"))
		switch {
		case !ok:
			return false
		case one == strings.TrimPrefix(tag, "W/"):
			return true
		}
		if list = strings.TrimLeft(rest, " \t"); list != "" && list[0] != ',' {
			return false
		}
	}
}

// entityTag takes a tag in its quotes from the beginning of a list: within there may be commas,
// and no quotes (RFC 9110, 8.8.3).
func entityTag(list string) (tag, rest string, ok bool) {
	if !strings.HasPrefix(list, `"`) {
		return "", list, false
	}
	end := strings.IndexByte(list[1:], '"')
	if end < 0 {
		return "", list, false
	}
	return list[:end+2], list[end+2:], true
}
