package cause

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// doubtWeight is that of a reading which signal validation doubts, without a figure, and
// remarkWeight that of a remark of the load. Common practice, no source.
//
// testWeight is that of a test which a reading fails by more than two standard
// uncertainties: the probability that it does not do so by chance.
const (
	testWeight   = 0.95
	doubtWeight  = 0.5
	remarkWeight = 0.25
)

// marked lists what signal validation says of the instruments.
func (e *Evidence) marked() []Cause {
	var causes []Cause
	order := Cause{Kind: Swapped, Weight: 1, Subject: e.Subject}
	var tags []string
	for _, m := range e.Marks {
		if m.Order {
			tags = append(tags, m.Tag)
			continue
		}
		for _, in := range e.inputs() {
			if in.Tag == m.Tag {
				weight := doubtWeight
				if m.Tested {
					weight = testWeight
				}
				causes = append(causes, Cause{
					Kind: in.kind, Weight: weight, Subject: m.Tag,
					Says: fmt.Sprintf("the %s: %s", instrument(in.words), m.Reason),
				})
				break
			}
		}
	}
	if len(tags) > 0 {
		slices.Sort(tags)
		order.Says = fmt.Sprintf("the temperatures of %s are in the wrong order for what the load does: look for swapped sensors, or flow that runs backwards", list(slices.Compact(tags)))
		causes = append(causes, order)
	}
	return causes
}

// margins lists the remarks of a change of phase: heat may then be latent. Their weight is
// the probability that the margin is used up, and no less than that of a remark.
func (e *Evidence) margins() []Cause {
	near := map[Kind]string{
		NearBoiling:  "its boiling point: vapour would spoil both flow and duty",
		NearDewPoint: "the dew point: the duty may be the sensible part only",
		NearFreezing: "its freezing point: slush would spoil both flow and duty",
	}
	var causes []Cause
	for _, m := range e.Margins {
		text, ok := near[m.Kind]
		if !ok {
			continue
		}
		c := Cause{Kind: m.Kind, Weight: remarkWeight, Subject: m.Tag, Says: "the fluid is near " + text}
		if m.sound() {
			c.Weight = max(remarkWeight, (1-math.Erf(m.zeta()/math.Sqrt2))/2)
			c.Says = fmt.Sprintf("the fluid is %s K from %s", brief(m.Value), text)
			c.Figures = []Figure{{"margin", m.Value, "K", m.zeta()}}
		}
		causes = append(causes, c)
	}
	return causes
}

// unsteady tells that the window was not steady. It comes before all else: the balance and
// the expectation hold in steady state only.
func (e *Evidence) unsteady() (Cause, bool) {
	s := &e.Steadiness
	if !s.Known || s.Steady {
		return Cause{}, false
	}
	c := Cause{Kind: Unsteady, Weight: 1, Subject: e.Subject, Says: "the window was not steady"}
	if s.Worst != "" {
		c.Says = fmt.Sprintf("the %s was not steady: nothing else can be told until it is", s.Worst)
	}
	if finite(s.Change, s.Limit, s.Stands) && s.Limit > 0 {
		c.Figures = append(c.Figures, Figure{"change of the duty by the " + s.Worst, s.Change, "W", s.Stands}, Figure{"let pass", s.Limit, "W", 0})
	}
	if finite(s.R, s.RLimit) && s.RLimit > 0 {
		c.Figures = append(c.Figures, Figure{"R-statistic of the " + s.Worst, s.R, "1", 0}, Figure{"its limit", s.RLimit, "1", 0})
	}
	return c, true
}

// unsure tells why nothing can be decided: the expanded uncertainty is as wide as the
// allowance, by the expectation or by the instruments, whichever has the greater part of the
// variance. Its weight is that part, times the probability that the deviation is by chance.
func (e *Evidence) unsure() []Cause {
	U := 2 * e.Deviation.Uncertainty
	if !e.Deviation.sound() || e.deviates() || !(e.Allowance > 0) || !(U >= e.Allowance) {
		return nil
	}
	chance := 1 - sure(e.Deviation.zeta())
	var part [2]float64
	var worst [2]Share
	for _, s := range e.sortedShares() {
		if !finite(s.Share) || s.Share <= 0 {
			continue
		}
		i := 0
		if s.Expectation {
			i = 1
		}
		part[i] += s.Share
		if s.Share > worst[i].Share {
			worst[i] = s
		}
	}
	var causes []Cause
	for i, kind := range []Kind{InstrumentsUnsure, ExpectationUnsure} {
		if part[i] == 0 {
			continue
		}
		share := min(1, part[i])
		causes = append(causes, Cause{
			Kind: kind, Weight: share * chance, Subject: worst[i].Of,
			Says: fmt.Sprintf("the uncertainty is as wide as the allowance, and of its square %s comes from %s, most of it from %s",
				percent(share), [...]string{"what is measured", "what is expected"}[i], worst[i].Of),
			Figures: []Figure{
				{"deviation", e.Deviation.Value, "W", e.Deviation.zeta()},
				{"expanded uncertainty", U, "W", 0},
				{"allowance", e.Allowance, "W", 0},
				{"share of the variance", share, "1", 0},
			},
		})
	}
	return causes
}

func (e *Evidence) sortedShares() []Share {
	shares := slices.Clone(e.Shares)
	slices.SortFunc(shares, func(a, b Share) int { return cmp.Or(cmp.Compare(a.Of, b.Of), cmp.Compare(a.Share, b.Share)) })
	return shares
}

// unexplained is all that is left to say of a deviation that nothing measured explains.
func (e *Evidence) unexplained() []Cause {
	if !e.deviates() {
		return nil
	}
	return []Cause{{
		Kind: ExpectationUnsure, Weight: least, Subject: e.Subject,
		Says:    "nothing that is measured explains the deviation: look whether what is expected still holds",
		Figures: []Figure{{"deviation", e.Deviation.Value, "W", e.Deviation.zeta()}},
	}}
}
