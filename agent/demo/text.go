package demo

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

// none stands where there is no figure.
const none = "—"

// dutyDecimals is how many decimals in kW show the expanded uncertainty with two
// digits; below zero, tens and hundreds are rounded. It is 1 where the duty has
// no uncertainty.
func dutyDecimals(f *loads.Figure) int {
	U := 2 * f.Uncertainty / 1e3
	if !f.Measured() || f.Idle || !(U > 0) {
		return 1
	}
	return min(6, 1-int(math.Floor(math.Log10(U))))
}

// number rounds to the decimals, which may be negative.
func number(x float64, decimals int) string {
	place := math.Pow10(-decimals)
	x = math.Round(x/place) * place
	if x == 0 {
		x = 0 // without a sign
	}
	return strconv.FormatFloat(x, 'f', max(decimals, 0), 64)
}

func celsius(T float64) string { return number(T-273.15, 1) }

// percent rounds down: 100 % is all.
func percent(x float64) string { return number(math.Floor(100*x), 0) + " %" }

// energy shows J in kWh, and in MWh from a thousand of them.
func energy(J float64) string {
	kWh := J / 3.6e6
	if kWh < 1000 {
		return number(kWh, 1) + " kWh"
	}
	return number(kWh/1000, 3) + " MWh"
}

// standing tells how broker, messages and history do.
func standing(s *view.Snapshot) []string {
	b := &s.Broker
	link := fmt.Sprintf("broker connected, lost %d times before", b.Losses)
	switch {
	case !b.Connected && b.Fault != "":
		link = "broker away: " + b.Fault
	case !b.Connected:
		link = "broker away"
	case b.Losses == 0:
		link = "broker connected"
	case b.Losses == 1:
		link = "broker connected, lost once before"
	}
	var accepted, refused, late uint64
	for _, t := range s.Tags {
		accepted, late = accepted+t.Accepted, late+t.Late
		for _, r := range t.Refused {
			refused += r.Count
		}
	}
	lines := []string{fmt.Sprintf("%s; readings %d, refused %d, late %d", link, accepted, refused, late)}
	if s.History.Fault != "" {
		lines = append(lines, "history cannot be written: "+s.History.Fault)
	}
	return lines
}

// fit makes one line of text, at most width characters wide.
func fit(text string, width int) string {
	text = strings.Map(func(r rune) rune {
		if unicode.IsControl(r) {
			return ' '
		}
		return r
	}, text)
	if utf8.RuneCountInString(text) <= width {
		return text
	}
	return string([]rune(text)[:max(width-1, 0)]) + "…"
}

// hardSpace joins two words for wrap; no text of the demo has it.
const hardSpace = "\x00"

// wrap breaks text between words into lines of the width; a percent sign stays with its
// number.
func wrap(text string, width int) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(strings.ReplaceAll(text, " %", hardSpace+"%")) {
		word = strings.ReplaceAll(word, hardSpace, " ")
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) <= width:
			line += " " + word
		default:
			lines, line = append(lines, fit(line, width)), word
		}
	}
	if line != "" {
		lines = append(lines, fit(line, width))
	}
	return lines
}
