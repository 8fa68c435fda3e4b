package main

import (
	"strings"
	"unicode/utf8"
)

// width is how many columns of a terminal text for people keeps to.
const width = 80

// wrapped breaks text between words, so that no line is wider than a terminal; the
// lines after the first stand behind indent.
func wrapped(text, indent string) string { return set("", indent, fields(text)) }

// indented is wrapped with the first line behind indent as well.
func indented(text, indent string) string { return set(indent, indent, fields(text)) }

// fields are the words of a text; a percent or degree sign stays with its number.
func fields(text string) []string {
	var all []string
	for _, word := range strings.Fields(text) {
		if last := len(all) - 1; last >= 0 && (strings.HasPrefix(word, "%") || strings.HasPrefix(word, "°")) {
			all[last] += " " + word
			continue
		}
		all = append(all, word)
	}
	return all
}

// set puts parts one after the other behind first, and begins another line behind
// indent where one is full.
func set(first, indent string, parts []string) string {
	var text strings.Builder
	text.WriteString(first)
	column := utf8.RuneCountInString(first)
	for i, part := range parts {
		n := utf8.RuneCountInString(part)
		switch {
		case i == 0:
		case column+1+n > width:
			text.WriteString("\n" + indent)
			column = utf8.RuneCountInString(indent)
		default:
			text.WriteByte(' ')
			column++
		}
		text.WriteString(part)
		column += n
	}
	return text.String()
}

// listing is a list of names that are kept whole, each line behind indent.
func listing(names []string, indent string) string {
	parts := make([]string, len(names))
	for i, name := range names {
		parts[i] = name + ","
	}
	return strings.TrimSuffix(set(indent, indent, parts), ",")
}
