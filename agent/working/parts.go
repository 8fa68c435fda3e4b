package working

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"heatreeve/agent/loads"
)

// parts writes what each part has in the variance, largest first.
func (p *page) parts() {
	f := &p.Basis.Figure
	type part struct {
		name     string
		fraction float64
	}
	whole := f.Uncertainty * f.Uncertainty
	all := []part{{"random", f.Random * f.Random / whole}}
	for k, share := range f.Share {
		all = append(all, part{loads.Part(k).String(), share * share / whole})
	}
	slices.SortStableFunc(all, func(a, b part) int { return cmp.Compare(b.fraction, a.fraction) })
	var says []string
	for _, x := range all {
		if x.fraction >= 0.0005 {
			says = append(says, fmt.Sprintf("%s %s %%", x.name, fixed(100*x.fraction, 1)))
		}
	}
	p.say("of the variance: " + strings.Join(says, ", "))
}
