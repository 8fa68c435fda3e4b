package ingest

import (
	"bytes"
	"math"
	"strconv"

	"heatreeve/ingest/quality"
)

const blanks = " \t\r\n"

// bareNumber reads a payload that is nothing but a decimal number, blanks
// around it allowed. A leading plus or zero and a missing digit before or after
// the point are understood, for controllers print them; hexadecimal and digit
// groups are not. A null says that the publisher has no value.
func bareNumber(payload []byte) (float64, quality.Mark, *fault) {
	text := bytes.Trim(payload, blanks)
	if decimal(text) {
		x, f := parse(text)
		return x, quality.None, f
	}
	if string(text) == "null" {
		return math.NaN(), quality.NoValue, nil
	}
	return 0, quality.None, notBare(text)
}

// notBare says why a text is no bare number.
func notBare(text []byte) *fault {
	switch {
	case spellsNotFinite(text):
		return faultf(NotFinite, "is not a finite number; publish null while there is no value")
	case text[0] == '"' || string(text) == "true" || string(text) == "false":
		return faultf(WrongType, "is text or true/false; publish a number without quotes")
	case text[0] == '{' || text[0] == '[':
		return faultf(WrongType, "looks like JSON; give the tag a value pointer, such as \"/value\"")
	case decimal(bytes.Replace(text, []byte(","), []byte("."), 1)):
		return faultf(NotANumber, "is not a number; the decimal separator must be a point")
	}
	return faultf(NotANumber, "is not a number; publish decimal digits only, without unit or grouping")
}

// parse reads text that is known to be a decimal number.
func parse(text []byte) (float64, *fault) {
	x, err := strconv.ParseFloat(string(text), 64)
	if err != nil {
		return 0, faultf(NotFinite, "holds %s, which is beyond the range of numbers (±1.8e308)", shortened(text))
	}
	return x, nil
}

// decimal reports whether text is sign, digits, point, digits, exponent, with
// at least one digit before the exponent and, where there is one, in it.
func decimal(text []byte) bool {
	text = skipSign(text)
	whole := digits(text)
	text = text[whole:]
	part := 0
	if len(text) > 0 && text[0] == '.' {
		part = digits(text[1:])
		text = text[1+part:]
	}
	if whole+part == 0 {
		return false
	}
	if len(text) == 0 {
		return true
	}
	if text[0] != 'e' && text[0] != 'E' {
		return false
	}
	text = skipSign(text[1:])
	return len(text) > 0 && digits(text) == len(text)
}

func skipSign(text []byte) []byte {
	if len(text) > 0 && (text[0] == '+' || text[0] == '-') {
		return text[1:]
	}
	return text
}

// digits counts the leading decimal digits.
func digits(text []byte) int {
	for i, c := range text {
		if c < '0' || c > '9' {
			return i
		}
	}
	return len(text)
}

// spellsNotFinite knows the spellings of NaN and infinity that programs print,
// also those with a hash sign ("1.#QNAN") of an old C library (from memory).
func spellsNotFinite(text []byte) bool {
	text = skipSign(text)
	for _, word := range []string{"nan", "inf", "infinity"} {
		if bytes.EqualFold(text, []byte(word)) {
			return true
		}
	}
	return bytes.HasPrefix(text, []byte("1.#"))
}
