package unit

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// number reads the number at the start of s and returns what follows it.
//
// A number has an optional sign, digits, an optional point with digits and an
// optional exponent. A space, no-break space or thin space may part the digits
// before the point in groups of three.
func number(s string) (x float64, rest string, err error) {
	var text strings.Builder
	rest = sign(s, &text)
	rest = whole(rest, &text)
	rest = fraction(rest, &text)
	if text.Len() == 0 || !isDigit(text.String()[text.Len()-1:]) {
		return 0, s, errors.New("want a number followed by a unit")
	}
	rest = exponent(rest, &text)
	if err := follows(rest); err != nil {
		return 0, s, err
	}
	x, err = strconv.ParseFloat(text.String(), 64)
	if err != nil || math.IsInf(x, 0) {
		return 0, s, errors.New("the number is too large")
	}
	return x, rest, nil
}

// follows looks at what stands behind a number for signs of another way of
// writing it.
func follows(rest string) error {
	after := strings.TrimLeft(rest, separators)
	switch {
	case strings.HasPrefix(after, ","):
		return errors.New("the decimal separator must be a point, and thousands are parted by a space")
	case strings.HasPrefix(rest, "'"), strings.HasPrefix(rest, "’"), strings.HasPrefix(rest, "_"):
		return errors.New("thousands are parted by a space")
	case isDigit(after):
		return errors.New("a space within a number must part groups of three digits")
	case strings.HasPrefix(after, "."):
		return errors.New("a number has one decimal point, with digits on both sides")
	}
	return nil
}

func sign(s string, to *strings.Builder) string {
	for _, minus := range []string{"-", "−"} {
		if rest, ok := strings.CutPrefix(s, minus); ok {
			to.WriteByte('-')
			return rest
		}
	}
	return strings.TrimPrefix(s, "+")
}

func whole(s string, to *strings.Builder) string {
	digits, rest := cutDigits(s)
	to.WriteString(digits)
	if len(digits) == 0 || len(digits) > 3 {
		return rest
	}
	for {
		group, after := cutDigits(cutSeparator(rest))
		if len(group) != 3 || len(rest) == len(group)+len(after) {
			return rest
		}
		to.WriteString(group)
		rest = after
	}
}

func fraction(s string, to *strings.Builder) string {
	after, ok := strings.CutPrefix(s, ".")
	if !ok || !isDigit(after) || to.Len() == 0 || to.String() == "-" {
		return s
	}
	digits, rest := cutDigits(after)
	to.WriteString("." + digits)
	return rest
}

func exponent(s string, to *strings.Builder) string {
	if s == "" || (s[0] != 'e' && s[0] != 'E') {
		return s
	}
	power := s[1:]
	if power != "" && (power[0] == '-' || power[0] == '+') {
		power = power[1:]
	}
	digits, rest := cutDigits(power)
	if digits == "" {
		return s
	}
	to.WriteString(s[:len(s)-len(rest)])
	return rest
}

// separators of groups of thousands: space, no-break, figure, thin and narrow
// no-break space.
const separators = " \u00a0\u2007\u2009\u202f"

func cutSeparator(s string) string {
	if r, n := utf8.DecodeRuneInString(s); n > 0 && strings.ContainsRune(separators, r) {
		return s[n:]
	}
	return s
}

func cutDigits(s string) (digits, rest string) {
	n := 0
	for n < len(s) && s[n] >= '0' && s[n] <= '9' {
		n++
	}
	return s[:n], s[n:]
}

func isDigit(s string) bool { return s != "" && s[0] >= '0' && s[0] <= '9' }

// show writes x so that [number] reads the same value back.
func show(x float64) string {
	if a := math.Abs(x); a != 0 && (a < 1e-4 || a >= 1e15) {
		return fmt.Sprintf("%g", x)
	}
	return strconv.FormatFloat(x, 'f', -1, 64)
}
