package main

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// calculator works what is printed between two =, by the rules of school.
type calculator struct {
	text string
	err  error
}

func (c *calculator) skip() { c.text = strings.TrimLeft(c.text, " ") }

func (c *calculator) eat(s string) bool {
	c.skip()
	rest, ok := strings.CutPrefix(c.text, s)
	if ok {
		c.text = rest
	}
	return ok
}

func (c *calculator) sum() float64 {
	x := c.product()
	for {
		switch {
		case c.eat("+"):
			x += c.product()
		case c.eat("−"):
			x -= c.product()
		default:
			return x
		}
	}
}

func (c *calculator) product() float64 {
	x := c.power()
	for {
		switch {
		case c.eat("×"):
			x *= c.power()
		case c.eat("/"):
			x /= c.power()
		default:
			return x
		}
	}
}

func (c *calculator) power() float64 {
	x := c.one()
	for c.eat("²") {
		x *= x
	}
	return x
}

var numeral = regexp.MustCompile(`^-?[0-9]+(\.[0-9]+)?(e[0-9]+)?`)

func (c *calculator) one() float64 {
	switch {
	case c.eat("√("):
		x := c.sum()
		c.close()
		return math.Sqrt(x)
	case c.eat("("):
		x := c.sum()
		c.close()
		return x
	}
	c.skip()
	n := numeral.FindString(c.text)
	c.text = c.text[len(n):]
	x, err := strconv.ParseFloat(n, 64)
	if err != nil && c.err == nil {
		c.err = fmt.Errorf("no number at %q", c.text)
	}
	return x
}

func (c *calculator) close() {
	if !c.eat(")") && c.err == nil {
		c.err = fmt.Errorf("no bracket at %q", c.text)
	}
}

func calculated(text string) (float64, error) {
	c := calculator{text: text}
	x := c.sum()
	if c.skip(); c.err == nil && c.text != "" {
		c.err = fmt.Errorf("%q is left", c.text)
	}
	return x, c.err
}

func TestCalculator(t *testing.T) {
	for text, want := range map[string]float64{
		"1 + 2 × 3": 7, "(1 + 2) × 3": 9, "√(3² + 4²)": 5, "8 / 4 / 2": 1, "5 − (-2)": 7, "(-2)²": 4, "0.5 × √(16) − 1": 1,
	} {
		if got, err := calculated(text); err != nil || got != want {
			t.Errorf("%s = %g, %v; want %g", text, got, err, want)
		}
	}
	for _, text := range []string{"", "1 +", "(1", "1 1", "√(4", "x"} {
		if x, err := calculated(text); err == nil {
			t.Errorf("%q is %g", text, x)
		}
	}
}

// printed is a line of a working as it was printed.
type printed struct {
	symbol, words, law, formula, value, unit string
}

// lines takes the text of a working apart.
func linesOf(text string) (all []printed) {
	var whole []string
	for line := range strings.Lines(text) {
		line = strings.TrimRight(line, "\n")
		if strings.HasPrefix(line, "[") {
			break // the sources
		}
		n := len(line) - len(strings.TrimLeft(line, " "))
		if n >= 4 && len(whole) > 0 {
			whole[len(whole)-1] += " " + strings.TrimSpace(line)
			continue
		}
		whole = append(whole, line)
	}
	form := regexp.MustCompile(`^  (\S+) +(.*?): (.+?) = (.+) = (\S+)( [^\[]\S*( K\))?)?( \[\d+\])?$`)
	given := regexp.MustCompile(`^  (\S+) +([^=]*): (-?[0-9.e]+)( [^\[=]\S*( K\))?)?( from .*)?( \[\d+\])?$`)
	for _, line := range whole {
		if m := form.FindStringSubmatch(line); m != nil {
			all = append(all, printed{m[1], m[2], m[3], m[4], m[5], strings.TrimSpace(m[6])})
		} else if m := given.FindStringSubmatch(line); m != nil {
			all = append(all, printed{symbol: m[1], words: m[2], value: m[3], unit: strings.TrimSpace(m[4])})
		} else if strings.Contains(line, " = ") {
			all = append(all, printed{words: "cannot be read: " + line})
		}
	}
	return all
}

func explain(t *testing.T, args ...string) string {
	t.Helper()
	status, out, errs := invoke(append([]string{"explain"}, args...)...)
	if status != exitGood || errs != "" {
		t.Errorf("explain %q: status %d, %s", args, status, errs)
	}
	return out
}

// followed works each formula of a printed working again, and looks whether its numbers
// stand in the lines above.
func followed(t *testing.T, text string) (formulas int) {
	t.Helper()
	values := map[string]string{}
	for _, l := range linesOf(text) {
		if strings.HasPrefix(l.words, "cannot be read") {
			t.Error(l.words)
			continue
		}
		if l.formula != "" {
			formulas++
			x, err := calculated(l.formula)
			if err != nil || !sameDigits(x, l.value) {
				t.Errorf("%s = %s is printed, a calculator has %.12g (%v), in %s", l.formula, l.value, x, err, l.words)
			}
			sameNumbers(t, &l, values)
		}
		values[l.symbol] = l.value
	}
	return formulas
}

// sameDigits tells whether x is the printed value in all digits of it.
func sameDigits(x float64, value string) bool {
	mantissa, exponent, _ := strings.Cut(value, "e")
	_, after, _ := strings.Cut(mantissa, ".")
	place := -float64(len(after))
	if exponent != "" {
		e, err := strconv.Atoi(exponent)
		if err != nil {
			return false
		}
		place += float64(e)
	}
	y, err := strconv.ParseFloat(value, 64)
	return err == nil && math.Abs(x-y) <= (0.5+1e-6)*math.Pow(10, place)
}

// sameNumbers holds the numbers of a formula against the values of the symbols in its law.
func sameNumbers(t *testing.T, l *printed, values map[string]string) {
	t.Helper()
	split := func(s string) []string {
		return strings.FieldsFunc(s, func(r rune) bool { return strings.ContainsRune(" ()+−×/√²", r) })
	}
	law, numbers := split(l.law), split(l.formula)
	if len(law) != len(numbers) {
		t.Errorf("%s and %s have not the same parts", l.law, l.formula)
		return
	}
	for i, symbol := range law {
		if v, ok := values[symbol]; ok && v != numbers[i] {
			t.Errorf("%s is %s above, and %s in %s", symbol, v, numbers[i], l.formula)
		}
	}
}

// Of every load of every example, each line of the working can be followed with a
// calculator.
func TestEveryWorkingCanBeFollowed(t *testing.T) {
	for _, file := range siteFiles(t) {
		p := play(t, file, nil)
		for i := range p.site.Loads {
			name := p.site.Loads[i].Name
			out := explain(t, name, "--data", p.data)
			n := followed(t, out)
			if n < 10 || strings.Contains(out, "has no duty") {
				t.Errorf("%s: %d formulas:\n%s", name, n, out)
			}
		}
	}
}
