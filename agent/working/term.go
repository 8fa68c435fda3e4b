package working

import (
	"math"
	"strings"
)

// How firmly a term holds together, for brackets.
const (
	asSum = iota
	asProduct
	asOne
)

// term is a piece of a formula: in symbols, in the numbers as they are printed, and what a
// calculator makes of these.
type term struct {
	law, text string
	value     float64
	hold      int
}

// bracketed puts brackets around a term that holds less than is needed.
func (t term) bracketed(needed int) (law, text string) {
	law, text = t.law, t.text
	if t.hold < needed {
		law = "(" + law + ")"
	}
	if t.hold < needed || strings.HasPrefix(text, "-") {
		text = "(" + text + ")"
	}
	return law, text
}

func join(a, b term, with string, hold, left, right int, value float64) term {
	aLaw, aText := a.law, a.text
	if a.hold < left {
		aLaw, aText = a.bracketed(left)
	}
	bLaw, bText := b.bracketed(right)
	return term{aLaw + with + bLaw, aText + with + bText, value, hold}
}

func (t term) plus(b term) term { return join(t, b, " + ", asSum, asSum, asSum, t.value+b.value) }
func (t term) minus(b term) term {
	return join(t, b, " − ", asSum, asSum, asProduct, t.value-b.value)
}
func (t term) times(b term) term {
	return join(t, b, " × ", asProduct, asProduct, asProduct, t.value*b.value)
}
func (t term) over(b term) term {
	return join(t, b, " / ", asProduct, asProduct, asOne, t.value/b.value)
}

func (t term) squared() term {
	law, text := t.bracketed(asOne)
	return term{law + "²", text + "²", t.value * t.value, asOne}
}

// exp is the exponential of a term.
func (t term) exp() term {
	return term{"exp(" + t.law + ")", "exp(" + t.text + ")", math.Exp(t.value), asOne}
}

// toThe is a term to the power of b.
func (t term) toThe(b term) term {
	law, text := t.bracketed(asOne)
	bLaw, bText := b.bracketed(asOne)
	return term{law + "^" + bLaw, text + "^" + bText, math.Pow(t.value, b.value), asOne}
}

// sum adds up; it must have one term at least.
func sum(terms []term) term {
	s := terms[0]
	for _, t := range terms[1:] {
		s = s.plus(t)
	}
	return s
}
