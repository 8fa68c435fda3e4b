package named

import (
	"sync"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// word is one name with the fluid that it stands for.
type word struct {
	name      string
	also      []string       // other names of the same
	dimension unit.Dimension // of the strength that must follow; 0 for none
	sample    string         // a strength as it may be written
	volume    bool           // the strength may be by volume
	make      func(strength) (thermo.Fluid, error)
}

// example is the name as it may be looked up.
func (w *word) example() string {
	if w.dimension == 0 {
		return w.name
	}
	return w.name + " " + w.sample
}

// asks is what must follow the name.
func (w *word) asks() string {
	if w.dimension == unit.Density {
		return "density at 15 °C"
	}
	return "strength"
}

// hint tells of the other way to write the strength.
func (w *word) hint() string {
	if w.volume {
		return `; "%" is by mass, "vol %" by volume`
	}
	return ""
}

// form is how the name is written, with its strength left open.
func (w *word) form() string {
	if w.dimension == 0 {
		return w.name
	}
	if w.volume {
		return w.name + " N % | N vol %"
	}
	u, _ := unit.ParseAs(w.sample, w.dimension)
	return w.name + " N " + u.Unit.Symbol
}

// lexicon finds words by their folded names. A name may stand with and without a
// strength: ammonia is a gas, ammonia 20 % is ammonia water.
type lexicon struct {
	plain, strong map[string]*word
	keys          []string // folded, in the order of words
}

func (l *lexicon) of(key string) *word {
	if w, ok := l.plain[key]; ok {
		return w
	}
	return l.strong[key]
}

var index = sync.OnceValue(func() *lexicon {
	l := &lexicon{plain: make(map[string]*word), strong: make(map[string]*word)}
	for _, w := range words() {
		found := l.plain
		if w.dimension != 0 {
			found = l.strong
		}
		for _, name := range append([]string{w.name}, w.also...) {
			key := fold(name)
			if _, taken := found[key]; !taken {
				found[key] = w
				l.keys = append(l.keys, key)
			}
		}
	}
	return l
})
