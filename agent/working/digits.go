package working

import (
	"math"
	"strconv"
	"strings"
)

const (
	// fine is how many digits a value on the way has at most: more than any instrument, so
	// that rounding shows in no result.
	fine = 8
	// coarse is how many those of an uncertainty have.
	coarse = 4
	// mostDecimals is how many a value has at most.
	mostDecimals = 12
)

// root is the square root of a term.
func (t term) root() term {
	return term{"√(" + t.law + ")", "√(" + t.text + ")", math.Sqrt(t.value), asOne}
}

// fixed writes x with so many decimals, without zeros at the end; fewer than none round tens,
// which is written as 1.23e5.
func fixed(x float64, decimals int) string {
	if decimals < 0 {
		digits := max(0, int(math.Floor(math.Log10(max(math.Abs(x), 1))))+decimals)
		return strings.Replace(strconv.FormatFloat(x, 'e', digits, 64), "e+0", "e", 1)
	}
	text := strconv.FormatFloat(x, 'f', decimals, 64)
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	if text == "-0" {
		return "0"
	}
	return text
}

// place is how many decimals show x with so many digits.
func place(x float64, digits int) int {
	if x == 0 || math.IsInf(x, 0) || math.IsNaN(x) {
		return 0
	}
	return min(mostDecimals, digits-1-int(math.Floor(math.Log10(math.Abs(x)))))
}

// agreed returns how many decimals, from most down, show x and what was worked from printed
// numbers alike.
func agreed(x, worked float64, most int) int {
	least := min(0, place(x, 1))
	for n := most; n > least; n-- {
		if fixed(x, n) == fixed(worked, n) {
			return n
		}
	}
	return least
}

// number is a term that is a plain number.
func number(x float64) term { return named("", x) }

// named is a number with a symbol.
func named(law string, x float64) term {
	text := short(x)
	if law == "" {
		law = text
	}
	return term{law, text, parse(text), asOne}
}

// short is x with no more digits than it was written with, and ten at most.
func short(x float64) string { return fixed(x, place(x, 10)) }

func parse(text string) float64 {
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return math.NaN()
	}
	return x
}
