package main

import (
	"math"
	"strconv"
)

// decimals rounds x to n decimals; below zero, tens and hundreds are rounded.
func decimals(x float64, n int) string {
	place := math.Pow10(-n)
	x = math.Round(x/place) * place
	if x == 0 {
		x = 0 // without a sign
	}
	return strconv.FormatFloat(x, 'f', max(n, 0), 64)
}

// meant is how many decimals show the expanded uncertainty U with two digits, and two
// where there is none.
func meant(U float64) int {
	if !(U > 0) {
		return 2
	}
	return min(6, 1-int(math.Floor(math.Log10(U))))
}

// percent shows a fraction with two digits.
func percent(x float64) string { return decimals(100*x, meant(100*x)) + " %" }
