package proving

import (
	"math"

	"heatreeve/thermo/unit"
)

// pump is what the tag of a load's pump tells.
type pump uint8

const (
	untold pump = iota
	off
	runs
)

func (j judge) pump() pump {
	switch of := j.declared.Running.Tag; {
	case !j.declared.HasRunning || !j.tags[of].has() || math.IsNaN(j.tags[of].newest.Value):
		return untold
	case j.tags[of].newest.Value == 0:
		return off
	}
	return runs
}

// rest is where nothing to speak of flows, or the pump is off: what the meter shows then is
// its zero.
func (j judge) rest() {
	src := j.declared.Stream.Flow
	if src.Constant() || j.site.Tags[src.Tag].Counter != nil {
		j.add(Note, "nothing flows, so there is no duty to judge; try again while it runs")
		return
	}
	tag, x := &j.site.Tags[src.Tag], j.tags[src.Tag].newest.Value
	shows, offset := tag.Show(x), x != 0 && math.Abs(x) > tag.Accuracy.HalfWidth(0)
	if j.told.Figure.Idle {
		j.add(Note, "%s shows %s, below idle_below: no duty to judge; try again while it runs", tag.Name, shows)
	}
	var its string
	if of := j.declared.Running.Tag; j.pump() != untold {
		its = j.site.Tags[of].Name + " reads " + j.site.Tags[of].Show(j.tags[of].newest.Value)
	}
	switch p := j.pump(); {
	case p == runs:
		j.add(Note, "its pump %s, and %s shows %s: look for a shut valve, or a meter that does not measure", its, tag.Name, shows)
	case offset && p == off:
		j.add(Note, "its pump %s, so %s of %s is its zero offset: have its zero set", its, shows, tag.Name)
	case offset:
		j.add(Note, "if the pump is off, %s of %s is its zero offset: have its zero set", shows, tag.Name)
	}
}

// stands tells whether a flow stood at zero throughout, as one may.
func (t *tagTrial) stands(of unit.Dimension) bool {
	flow := of == unit.VolumeFlow || of == unit.MassFlow || of == unit.MolarFlow
	return flow && t.min == 0 && t.max == 0
}
