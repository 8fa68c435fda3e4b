package named

import (
	"slices"
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
	gas       bool           // which the name may tell as well
	solution  bool           // in water, which the name may tell as well
	aside     bool           // a name of the trade: found, but not in the list
	main      string         // the name in the list of what this is another name of, or ""
	make      func(strength) (thermo.Fluid, error)
}

// called is the word aside, under another name.
func (w *word) called(name string) *word {
	other := *w
	other.name, other.aside, other.main = name, true, w.name
	return &other
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
	switch {
	case w.dimension == unit.Density:
		return "density at 15 °C"
	case w.name == "seawater":
		return "salinity"
	case w.name == "moist air":
		return "humidity ratio"
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

// listed is the key of the same fluid in the list.
func (l *lexicon) listed(key string) string {
	if w := l.of(key); w.main != "" {
		return fold(w.main)
	}
	return key
}

var index = sync.OnceValue(func() *lexicon {
	l := &lexicon{plain: make(map[string]*word), strong: make(map[string]*word)}
	for _, w := range slices.Concat(words(), products()) {
		for _, name := range append([]string{w.name}, w.also...) {
			l.add(name, w)
		}
	}
	for _, a := range asides() {
		l.add(a.name, l.of(fold(a.of)).called(a.name))
	}
	return l
})

// add has a word found by a name that no word before it has.
func (l *lexicon) add(name string, w *word) {
	found, key := l.plain, fold(name)
	if w.dimension != 0 {
		found = l.strong
	}
	if _, taken := found[key]; !taken {
		found[key] = w
		l.keys = append(l.keys, key)
	}
}
