package survey

import (
	"fmt"
	"maps"
	"regexp"
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

// Load is a load that names suggest: a flow with a temperature on either side of it.
type Load struct {
	Name                          string
	Flow, Inlet, Outlet, Pressure string // tags; Pressure "" where none is near
	Witness                       string // a register of energy beside them, "" where there is none
	ByVolume                      bool   // the flow is one by volume, which wants its meter's place
	Gives                         bool   // the inlet is hotter
	Why                           string

	stem string
}

// Loads returns the loads that the names of signals suggest, and why others were not made
// out.
func Loads(topics []Topic) (found []Load, doubts []string) {
	groups := map[string]*group{}
	for i := range topics {
		for k := range topics[i].Signals {
			s := &topics[i].Signals[k]
			if s.Guess.dimension == 0 {
				continue
			}
			at := stem(s)
			if groups[at] == nil {
				groups[at] = &group{stem: at}
			}
			groups[at].add(s)
		}
	}
	short := map[string]int{}
	for _, at := range slices.Sorted(maps.Keys(groups)) {
		l, doubt := groups[at].load()
		if doubt != "" {
			doubts = append(doubts, doubt)
		}
		if l != nil {
			found = append(found, *l)
			short[place(at)]++
		}
	}
	for i := range found {
		if l := &found[i]; short[place(l.stem)] == 1 {
			l.Name = place(l.stem)
		} else {
			l.Name = strings.ReplaceAll(l.stem, "/", "-")
		}
	}
	return found, doubts
}

// group are the signals of one stem.
type group struct {
	stem                                  string
	temperatures, flows, gauges, energies []*Signal
}

func (g *group) add(s *Signal) {
	switch s.Guess.dimension {
	case unit.Temperature:
		g.temperatures = append(g.temperatures, s)
	case unit.VolumeFlow, unit.MassFlow, unit.MolarFlow, unit.Volume, unit.Mass, unit.Amount:
		g.flows = append(g.flows, s)
	case unit.Pressure:
		g.gauges = append(g.gauges, s)
	case unit.Energy:
		g.energies = append(g.energies, s)
	}
}

// load makes one of two temperatures and a flow; a rate goes before a register.
func (g *group) load() (*Load, string) {
	t := g.temperatures
	if len(t) < 2 || len(g.flows) == 0 {
		return nil, ""
	}
	if len(t) > 2 {
		return nil, fmt.Sprintf("%s: %d temperatures and %d flows (%s): say by hand which belong together", g.stem, len(t), len(g.flows), tagsOf(t, g.flows))
	}
	slices.SortStableFunc(g.flows, func(a, b *Signal) int { return fromBool(a.Guess.Counts) - fromBool(b.Guess.Counts) })
	doubt := ""
	if len(g.flows) > 1 {
		doubt = fmt.Sprintf("%s: of %d flows (%s) the first is taken", g.stem, len(g.flows), tagsOf(g.flows))
	}
	in, out, why := sides(t[0], t[1])
	flow := g.flows[0]
	l := &Load{stem: g.stem, Flow: flow.Tag, Inlet: in.Tag, Outlet: out.Tag, Gives: in.Last >= out.Last, Why: why}
	l.ByVolume = flow.Guess.dimension == unit.VolumeFlow || flow.Guess.dimension == unit.Volume
	if len(g.gauges) == 1 {
		l.Pressure = g.gauges[0].Tag
	}
	if len(g.energies) == 1 {
		l.Witness = g.energies[0].Tag
	}
	return l, doubt
}

func fromBool(b bool) int {
	if b {
		return 1
	}
	return 0
}

func tagsOf(groups ...[]*Signal) string {
	var all []string
	for _, g := range groups {
		for _, s := range g {
			all = append(all, s.Tag)
		}
	}
	return strings.Join(all, ", ")
}

// words that tell on which side of a load a thermometer is. Supply and return are those of
// the circuit that the load hangs on: its fluid comes in by the supply.
var (
	inWords  = []string{"in", "inlet", "supply", "feed", "entering", "from"}
	outWords = []string{"out", "outlet", "return", "leaving", "to"}
)

// sides tells inlet from outlet: by words, or else by the order of the tags.
func sides(a, b *Signal) (in, out *Signal, why string) {
	switch {
	case side(a) > side(b):
		return a, b, "by the words in their names"
	case side(b) > side(a):
		return b, a, "by the words in their names"
	case a.Tag > b.Tag:
		a, b = b, a
	}
	return a, b, fmt.Sprintf("taken in the order of their names, %s before %s: check which is which", a.Tag, b.Tag)
}

// side is 1 for the inlet, -1 for the outlet and 0 where no word tells.
func side(s *Signal) int {
	for _, w := range split(s.Tag) {
		if of := sideOf(strings.TrimRight(w, "0123456789")); of != 0 {
			return of
		}
	}
	if parts := own(s); len(parts) > 1 {
		return sideOf(strings.ToLower(parts[len(parts)-2]))
	}
	return 0
}

func sideOf(word string) int {
	switch {
	case slices.Contains(inWords, word):
		return 1
	case slices.Contains(outWords, word):
		return -1
	}
	return 0
}

var lastDigit = regexp.MustCompile(`^([A-Z]{1,4}[-_ .]?)([0-9]{1,5})[0-9]([A-Z]?)$`)

// stem is what the signals of one circuit have in common: their place without what tells
// quantity, side and unit, as in "supply/temperature", and of an instrument's number all but
// the last digit.
func stem(s *Signal) string {
	parts := own(s)
	last, _, _ := inBrackets(parts[len(parts)-1])
	if m := lastDigit.FindStringSubmatch(strings.ToUpper(last)); m != nil {
		last = m[2]
	} else {
		last = strings.Join(kept(last), "-")
	}
	before := slices.Clone(parts[:len(parts)-1])
	if n := len(before) - 1; n > 0 && sideOf(strings.ToLower(before[n])) != 0 {
		before = before[:n]
	}
	parts = slices.DeleteFunc(append(before, last), func(p string) bool { return p == "" })
	return strings.Join(parts, "/")
}

// kept are the words of a name that tell of a place, and of nothing else.
func kept(name string) []string {
	words := split(name)
	for n := 1; n < len(words); n++ {
		if _, _, ok := unitIn(words[len(words)-n-1:]); ok {
			words = words[:len(words)-n]
			break
		}
	}
	return slices.DeleteFunc(words, func(w string) bool {
		w = strings.TrimRight(w, "0123456789")
		_, quantity := spoken[w]
		return w == "" || quantity || slices.Contains(inWords, w) || slices.Contains(outWords, w) || slices.Contains([]string{"t", "f", "p", "total", "rate", "water"}, w)
	})
}

// place is the end of a stem that is no number.
func place(stem string) string {
	parts := strings.Split(stem, "/")
	for _, p := range slices.Backward(parts) {
		if strings.Trim(p, "0123456789") != "" {
			return p
		}
	}
	return stem
}
