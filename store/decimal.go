package store

import "math"

// form is a way from a whole number to a float64: the number taken as a decimal
// fraction of some digits, and what turns that into SI.
type form byte

const (
	formBits    form = iota // no number: the float's bits, as an integer of the same order
	formDecimal             // n/10^k
	formCelsius             // n/10^k + 273.15
	formHourly              // n/10^k / 3600
	formPerHour             // n/10^k · (1/3600)
	forms
)

// maxDigits is the greatest k.
const maxDigits = 9

// maxWhole bounds n, so that its float64 is exact.
const maxWhole = 1 << 53

const perHour = 1.0 / 3600

var tens = [maxDigits + 1]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9}

// value is the float that n stands for. Products are converted one by one, lest some
// machine fuse them with a sum.
func (f form) value(n int64, k int) float64 {
	x := float64(n) / tens[k]
	switch f {
	case formCelsius:
		return float64(x) + 273.15
	case formHourly:
		return x / 3600
	case formPerHour:
		return float64(x * perHour)
	}
	return x
}

// whole returns the number that stands for a float near v, and false where there
// is none.
func (f form) whole(v float64, k int) (int64, bool) {
	switch f {
	case formCelsius:
		v -= 273.15
	case formHourly, formPerHour:
		v *= 3600
	}
	x := math.RoundToEven(v * tens[k])
	if !(math.Abs(x) < maxWhole) {
		return 0, false
	}
	return int64(x), true
}

// ordered maps the bits of floats to integers of the same order, -0 just before 0;
// unordered is its inverse.
func ordered(b uint64) uint64 {
	if b>>63 != 0 {
		return ^b
	}
	return b | 1<<63
}

func unordered(u uint64) uint64 {
	if u>>63 != 0 {
		return u &^ (1 << 63)
	}
	return ^u
}

// apart is how many floats there are from a to b, wrapped around where int64 ends.
func apart(a float64, b uint64) int64 {
	return int64(ordered(b) - ordered(math.Float64bits(a)))
}

const (
	// probes is how many values of a column a form is tried on.
	probes = 24
	// nearby is how many floats a value may lie beside that of its number.
	nearby = 4
	// coarse is how many floats must lie between two numbers' values at least, lest
	// any value at all is near one.
	coarse = 1 << 12
)

// formOf returns the form and number of digits in which the values look simplest.
func formOf(values []uint64) (f form, digits int) {
	f, digits = probe(values)
	if other, ok := f.rival(); ok && other.misses(values, digits) < f.misses(values, digits) {
		f = other
	}
	return f, digits
}

func probe(values []uint64) (f form, digits int) {
	step := max(1, len(values)/probes)
	f, least := formBits, 0
	for candidate := formDecimal; candidate < forms; candidate++ {
		for k := range maxDigits + 1 {
			cost, tried := 0, 0
			for i := 0; i < len(values); i += step {
				cost += candidate.cost(values[i], k)
				tried++
			}
			if f == formBits && cost < tried*farCost/4 || f != formBits && cost < least {
				f, digits, least = candidate, k, cost
			}
			if cost == 0 {
				return f, digits
			}
		}
	}
	return f, digits
}

// rival is the form whose values differ from f's so seldom that probes do not tell.
func (f form) rival() (form, bool) { return formPerHour, f == formHourly }

// misses counts the values that are not quite those of their number.
func (f form) misses(values []uint64, k int) (n int) {
	for _, b := range values {
		x, _ := f.whole(math.Float64frombits(b), k)
		if apart(f.value(x, k), b) != 0 {
			n++
		}
	}
	return n
}

// farCost is the cost of a value that no number is near to, beside one a little off.
const farCost = 16

func (f form) cost(b uint64, k int) int {
	v := math.Float64frombits(b)
	n, ok := f.whole(v, k)
	if !ok {
		return farCost
	}
	here := f.value(n, k)
	if next := apart(here, math.Float64bits(f.value(n+1, k))); next < coarse {
		return farCost
	}
	switch d := apart(here, b); {
	case d == 0:
		return 0
	case d >= -nearby && d <= nearby:
		return 1
	}
	return farCost
}
