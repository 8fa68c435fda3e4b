package working

import (
	"math"
	"testing"
)

// A formula reads in symbols as in numbers, with the brackets that it needs, and is worth
// what its printed numbers give.
func TestTerms(t *testing.T) {
	a, b, n := shown("a", "2"), shown("b", "-3.5"), number(4)
	for _, tt := range []struct {
		term
		law, text string
		value     float64
	}{
		{a.plus(b), "a + b", "2 + (-3.5)", -1.5},
		{a.minus(b), "a − b", "2 − (-3.5)", 5.5},
		{a.minus(a.plus(n)), "a − (a + 4)", "2 − (2 + 4)", -4},
		{a.plus(n).times(b), "(a + 4) × b", "(2 + 4) × (-3.5)", -21},
		{n.over(a.times(n)), "4 / (a × 4)", "4 / (2 × 4)", 0.5},
		{a.times(n).over(a), "a × 4 / a", "2 × 4 / 2", 4},
		{b.squared(), "b²", "(-3.5)²", 12.25},
		{sum([]term{a.squared(), b.squared()}).root(), "√(a² + b²)", "√(2² + (-3.5)²)", math.Sqrt(16.25)},
		{negative(a), "-1 × a", "-1 × 2", -2},
		{scaled(a, 1.0/3600), "a / 3600", "2 / 3600", 2.0 / 3600},
		{scaled(a, 1e2), "a × 100", "2 × 100", 200},
		{named("D", 1.0/3), "D", "0.3333333333", 0.3333333333},
	} {
		if tt.term.law != tt.law || tt.term.text != tt.text || !(math.Abs(tt.term.value-tt.value) <= 1e-12) {
			t.Errorf("%s, %s = %g; want %s, %s = %g", tt.term.law, tt.term.text, tt.term.value, tt.law, tt.text, tt.value)
		}
	}
}

// A result has the digits that the printed numbers give, and no other.
func TestAgreedDigits(t *testing.T) {
	for _, tt := range []struct {
		x, worked float64
		most      int
		want      string
	}{
		{598.372081, 598.372084, 5, "598.37208"},
		{598.372081, 598.372084, 6, "598.37208"},
		{598.3749, 598.3751, 4, "598.375"}, // one digit less, and both round alike
		{0.25, 0.25, 6, "0.25"},
		{103119.4, 103118.2, 2, "1.0312e5"},
		{-4.9996, -5.0004, 3, "-5"},
		{0, 1e-9, 6, "0"},
		{3e-5, 0, 7, "0"},
		{-1e-9, 0, 3, "0"},
	} {
		if got := fixed(tt.x, agreed(tt.x, tt.worked, tt.most)); got != tt.want {
			t.Errorf("%g beside %g is shown as %s, want %s", tt.x, tt.worked, got, tt.want)
		}
	}
}
