// Package shown turns SI figures into what people read: in the units that they chose, with no
// more digits than the uncertainty leaves.
package shown

import (
	"math"
	"strconv"

	"heatreeve/thermo/unit"
)

// Figure writes a value with its expanded uncertainty, both SI: the uncertainty with two
// digits, and the value to the same place (JCGM 100:2008, 7.2.6). Without an uncertainty
// (0, or one that is not finite) spread is empty and the value has four digits; a value that is
// not finite is written "–".
func Figure(u unit.Unit, value, expanded float64) (text, spread string) {
	x, U := u.Of(value), math.Abs(expanded/u.Factor)
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return None, ""
	}
	if !(U > 0) || math.IsInf(U, 0) {
		return Rounded(x, place(x, 4)), ""
	}
	n := place(U, 2)
	return Rounded(x, n), Rounded(U, n)
}

// None stands where there is no figure.
const None = "–"

// mostDecimals is how many there are at most.
const mostDecimals = 9

// place is how many decimals show x with so many digits; below zero, tens and hundreds are
// rounded.
func place(x float64, digits int) int {
	if x == 0 {
		return 0
	}
	// By the exponent of what is written, since rounding may carry: 0.0996 with two digits is
	// 0.10.
	text := strconv.FormatFloat(math.Abs(x), 'e', digits-1, 64)
	exponent, _ := strconv.Atoi(text[max(len(text)-4, indexE(text)+1):])
	return min(mostDecimals, digits-1-exponent)
}

func indexE(text string) int {
	for i := range text {
		if text[i] == 'e' {
			return i
		}
	}
	return len(text) - 1
}

// Rounded writes x with so many decimals; below zero, tens and hundreds are rounded. Zero has
// no sign.
func Rounded(x float64, decimals int) string {
	if decimals < 0 {
		step := math.Pow10(-decimals)
		x = math.Round(x/step) * step
	}
	text := strconv.FormatFloat(x, 'f', max(decimals, 0), 64)
	if text[0] == '-' && zero(text[1:]) {
		return text[1:]
	}
	return text
}

func zero(text string) bool {
	for _, c := range text {
		if c != '0' && c != '.' {
			return false
		}
	}
	return true
}
