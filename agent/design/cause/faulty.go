package cause

import (
	"fmt"
	"math"
	"slices"
)

// faulty lists the instruments and the conductance that the statistics speak against, and
// tells how much of the deviation is then none, but misread.
func (e *Evidence) faulty(iso *isolation, faults []fault) (causes []Cause, misread float64) {
	significance := iso.significance()
	if significance == 0 {
		return nil, 0
	}
	found := e.fits(iso, faults)
	for i, f := range found {
		if f.trifling() {
			continue
		}
		share, known := e.share(f)
		weight := significance * f.explains * f.likelihood
		if known {
			weight *= explained(share)
		}
		if !(weight >= least) || f.stranger && known {
			continue
		}
		if known && !f.isDesign {
			misread = max(misread, weight)
		}
		c := Cause{Kind: f.kind, Weight: weight, Subject: f.tag, Alike: alike(found, i)}
		c.Figures = append(e.standing(iso, f.fault), Figure{"size of the fault", f.size, f.unit, f.size / f.uncertainty})
		if known {
			c.Figures = append(c.Figures, Figure{"share of the deviation", share, "1", 0})
		}
		c.Figures = append(c.Figures, Figure{"how well it fits", f.explains, "1", 0})
		if f.isDesign {
			c.Figures = append(c.Figures, e.fouling()...)
		}
		c.Says = e.says(f, share, known)
		causes = append(causes, c)
	}
	return causes, misread
}

// sureEnough is the part of its stated standard uncertainty by what lasts within which nobody
// calls an instrument at fault. Common practice, no source.
const sureEnough = 0.25

// trifling tells that an instrument is off by less than it is stated to be sure to.
func (f *found) trifling() bool { return !f.isDesign && math.Abs(f.size) < sureEnough*f.lasting }

// fits lists the faults that explain something, with their likelihood beside the likeliest.
func (e *Evidence) fits(iso *isolation, faults []fault) []found {
	var all []found
	best, against := math.Inf(1), againstCourse(e.Exchanger.Days)
	for _, f := range faults {
		x, ok := iso.fit(f)
		if !ok {
			continue
		}
		if !e.Exchanger.IllConditioned {
			x.left += against(f)
		}
		best = min(best, x.left)
		all = append(all, x)
	}
	for i := range all {
		all[i].likelihood = math.Exp((best - all[i].left) / 2)
	}
	return all
}

// share is how much of the deviation the fault explains; false where there is none to
// explain or it is not told what the fault does to it.
func (e *Evidence) share(f found) (float64, bool) {
	if !e.deviates() || f.effect.Deviation == 0 && !f.stranger {
		return 0, false
	}
	return f.effect.Deviation * f.size / e.Deviation.Value, true
}

// alike lists the kinds whose fit is too near to that of the i-th to tell them apart.
func alike(all []found, i int) []Kind {
	var kinds []Kind
	for j, f := range all {
		if j != i && math.Abs(f.left-all[i].left) <= apart && !slices.Contains(kinds, f.kind) {
			kinds = append(kinds, f.kind)
		}
	}
	slices.Sort(kinds)
	return kinds
}

// standing lists the statistics that the fault moves.
func (e *Evidence) standing(iso *isolation, f fault) []Figure {
	var figures []Figure
	for _, t := range iso.statistics {
		if t.by(f) != 0 {
			figures = append(figures, Figure{t.name, t.Value, t.unit, t.zeta()})
		}
	}
	return figures
}

// fouling lists what else is known of it.
func (e *Evidence) fouling() []Figure {
	x := &e.Exchanger
	var figures []Figure
	if x.Fouling.sound() {
		figures = append(figures, Figure{"fouling resistance", x.Fouling.Value, "K/W", x.Fouling.zeta()})
	}
	if x.Trend.sound() {
		figures = append(figures, Figure{"its rise a week", x.Trend.Value, "K/W", x.Trend.zeta()})
	}
	return figures
}

// says tells what is wrong, and by how much. A conductance is told against clean, and not
// against before, where that is known.
func (e *Evidence) says(f found, share float64, known bool) string {
	var text string
	switch l := e.Exchanger.Conductance; {
	case f.isDesign && stands(l) && l.Value < 0:
		text = fmt.Sprintf("conductance is %s below clean", percent(1-math.Exp(l.Value)))
	case f.isDesign && e.Exchanger.shifted():
		text = fmt.Sprintf("conductance is %s below what it was", percent(1-math.Exp(f.size)))
	case f.isDesign:
		text = fmt.Sprintf("conductance is %s below clean", percent(1-math.Exp(f.size)))
	case f.stranger:
		text = fmt.Sprintf("%s reads %s", f.words, off(f.size, f.unit))
	default:
		text = fmt.Sprintf("the %s reads %s", instrument(f.words), off(f.size, f.unit))
	}
	if known {
		text += fmt.Sprintf(", which explains %s of the deviation", percent(share))
	}
	return text
}

// off says by how much an instrument is off.
func off(size float64, unit string) string {
	side := "too high"
	if size < 0 {
		side = "too low"
	}
	return fmt.Sprintf("%s %s %s", brief(math.Abs(size)), unit, side)
}
