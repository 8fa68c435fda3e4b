package proving

import (
	"fmt"
	"math"
	"strings"

	"heatreeve/thermo/unit"
)

const (
	// unlike is how far the heat that a load served may be off what its witness counted, for
	// units to be looked into, and alike how near a unit must bring it: both far from the
	// accuracy of a meter, and from the pipe that a flow meter sits in.
	unlike = 0.2
	alike  = 0.05
)

// register looks, where a load served far more or less than its witness counted, for a unit
// of the flow or of the witness with which the two would agree. A flow with which the duty is
// at its design is in no doubt. It tells whether it said so.
func (j judge) register() bool {
	if !j.declared.HasWitness {
		return false
	}
	sums := j.minutes[0][j.load]
	counted, served := sums.witness, sums.compared
	if counted <= 0 || served <= 0 || near(served, counted, unlike*counted+j.blur(1)) {
		return false
	}
	fits := func(k float64) bool { // served times k
		return j.blur(k) < unlike*counted && near(served*k, counted, alike*counted+j.blur(k))
	}
	witness := &j.site.Tags[j.declared.Witness.Tag]
	var doubts []string
	if src := j.declared.Stream.Flow; !src.Constant() && !j.atDesign() {
		flow := &j.site.Tags[src.Tag]
		doubts = doubt(doubts, flow.Name, flow.Unit, otherUnits(flow.Unit, fits))
	}
	doubts = doubt(doubts, witness.Name, witness.Unit, otherUnits(witness.Unit, func(k float64) bool { return fits(1 / k) }))
	switch {
	case len(doubts) > 0:
	case j.declared.Stream.FlowKind == unit.VolumeFlow:
		return false // told with the pipe of its meter
	default:
		j.add(Note, "the load served %.3g times what its witness %s counted", served/counted, witness.Name)
		return true
	}
	j.add(Fault, "the load served %.3g times what its witness %s counted; they would agree if %s: check the units of both meters",
		served/counted, witness.Name, strings.Join(doubts, ", or "))
	return true
}

// doubt adds that a tag may be in other units.
func doubt(all []string, tag string, is unit.Unit, others []string) []string {
	if len(others) == 0 {
		return all
	}
	return append(all, fmt.Sprintf("%s were not in %s but in %s", tag, is.Symbol, strings.Join(others, " or ")))
}

// otherUnits are those in which a figure would be k times as much, for a k that fits.
func otherUnits(is unit.Unit, fits func(k float64) bool) (all []string) {
	for _, u := range unit.Named(is.Dimension) {
		if k := u.Factor / is.Factor; !near(k, 1, unlike) && fits(k) {
			all = append(all, fmt.Sprintf("%s (%.3g times as much)", u.Symbol, k))
		}
	}
	return all
}

// blur is how far what a witness counted may be off what a load served in the same spans,
// with the flow k times as much: by the steps of the count, and by the step of the grid that
// a count may stand late, J.
func (j judge) blur(k float64) float64 {
	of := j.declared.Witness.Tag
	step := j.tags[of].resolution(j.site.Tags[of].Resolution)
	return 3 * (step + k*float64(j.cfg.Grid)/1e9*math.Abs(j.told.Figure.Duty))
}

// atDesign tells whether the duty is at its design.
func (j judge) atDesign() bool {
	f, d := &j.told.Figure, j.declared.Design
	return d.Duty != 0 && near(math.Abs(f.Duty), d.Duty, d.Allow*d.Duty+2*f.Uncertainty)
}
