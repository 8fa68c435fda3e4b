package proving

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest/quality"
	"heatreeve/thermo/unit"
)

// Load is what a trial found out about one load.
type Load struct {
	Name     string
	Figure   loads.Figure
	Basis    loads.Basis // what the figure was worked from
	Design   float64     // W; 0 where the file gives none
	Findings []Finding
}

func (t *Trial) tellLoad(i int) Load {
	declared := &t.site.Loads[i]
	told := Load{Name: declared.Name, Design: declared.Design.Duty, Basis: t.engine.Basis(i)}
	told.Figure = told.Basis.Figure
	j := judge{t, i, declared, &told}
	j.pressures()
	j.temperatures()
	switch f := &told.Figure; {
	case !f.Measured():
		j.add(Fault, "no duty: %v: %s", f.Fault, f.Reason)
	case declared.Vessel != nil:
	case f.Idle, j.pump() == off:
		j.rest()
	default:
		j.mark()
		j.sides()
		if j.flowUnit() || !j.register() {
			j.pipe()
		}
	}
	return told
}

// judge looks at one load.
type judge struct {
	*Trial
	load     int
	declared *site.HeatLoad
	told     *Load
}

func (j judge) add(level Level, format string, args ...any) {
	j.told.Findings = append(j.told.Findings, Finding{level, fmt.Sprintf(format, args...)})
}

// mark tells by which tag a duty is uncertain, and why; the order of temperatures is judged by
// sides.
func (j judge) mark() {
	f := &j.told.Figure
	if f.Quality() == quality.Uncertain && f.Mark != quality.WrongOrder {
		j.add(Note, "the duty is uncertain: %s is %v", f.By, f.Mark)
	}
}

// sides looks whether the stream gives heat where it should take it. A warm stream that
// is to be heated has its tags swapped, or its service.
func (j judge) sides() {
	f, s := &j.told.Figure, j.declared.Stream
	rise, u := f.Outlet-f.Inlet, j.difference()
	switch {
	case math.Abs(rise) <= 2*u:
		j.add(Note, "inlet and outlet differ by %.2f K, no more than they may be off (2u = %.2f K): this duty tells little", rise, 2*u)
	case f.Duty < -2*f.Uncertainty:
		way, is := "gives", "warms up"
		if !s.Gives {
			way, is = "takes", "cools down"
		}
		j.add(Fault, "the duty is %s, the wrong way round: the file says that it %s heat, and it %s, from %.2f to %.2f °C; inlet and outlet look swapped",
			kilowatts(f.Duty), way, is, f.Inlet-273.15, f.Outlet-273.15)
	}
}

// difference is the standard uncertainty of the temperature difference, K.
func (j judge) difference() float64 {
	s := j.declared.Stream
	var u [2]float64
	for k, src := range []site.Source{s.Inlet, s.Outlet} {
		if !src.Constant() {
			u[k] = j.site.Tags[src.Tag].Accuracy.HalfWidth(j.tags[src.Tag].newest.Value) / math.Sqrt(3)
		}
	}
	return math.Sqrt(max(0, u[0]*u[0]+u[1]*u[1]-2*s.Pair*u[0]*u[1]))
}

// flowUnit looks, where the duty is far from its design, for a unit of the flow with which
// it would be near, and tells whether it found any.
func (j judge) flowUnit() bool {
	f, d := &j.told.Figure, j.declared.Design
	duty := math.Abs(f.Duty)
	allowance := d.Allow*d.Duty + 2*f.Uncertainty
	if d.Duty == 0 || duty == 0 || j.atDesign() {
		return false
	}
	j.add(Note, "the duty is %.3g times the design of %s; allowed are ±%.3g %%", f.Duty/d.Duty, kilowatts(d.Duty), 100*d.Allow)
	src := j.declared.Stream.Flow
	if src.Constant() || j.site.Tags[src.Tag].Counter != nil {
		return false
	}
	tag := &j.site.Tags[src.Tag]
	var fit []string
	for _, u := range unit.Named(tag.Unit.Dimension) {
		k := u.Factor / tag.Unit.Factor
		if near(k, 1, 0.2) || !near(duty*k, d.Duty, allowance*max(1, k)) || !near(duty*k, d.Duty, 0.25*d.Duty) {
			continue
		}
		fit = append(fit, fmt.Sprintf("%s (%.3g times as much)", u.Symbol, k))
	}
	if len(fit) > 0 {
		j.add(Fault, "if %s were not in %s but in %s, it would be at its design: check the unit of the meter", tag.Name, tag.Unit.Symbol, strings.Join(fit, " or "))
	}
	return len(fit) > 0
}

// pressures looks for gauge pressures that were taken for absolute ones, and the other
// way round.
func (j judge) pressures() {
	seen := map[int]bool{}
	for _, src := range j.declared.Sources() {
		if src.Constant() || seen[src.Tag] || !j.tags[src.Tag].has() {
			continue
		}
		seen[src.Tag] = true
		tag := &j.site.Tags[src.Tag]
		if tag.Unit.Dimension != unit.Pressure {
			continue
		}
		j.pressure(tag, j.tags[src.Tag].newest.Value)
	}
}

func (j judge) pressure(tag *site.Tag, p float64) {
	air := j.site.Barometer
	if air == 0 {
		air = 101325
	}
	design := j.declared.Design.Pressure
	fits := func(p float64) bool { return design > 0 && near(p, design, 0.2*air) }
	switch {
	case !tag.Unit.Gauge && fits(p+air) && !fits(p):
		j.add(Fault, "%s shows %s, which is the design's pressure if it is gauge: write its unit with a g, as in barg", tag.Name, tag.Show(p))
	case tag.Unit.Gauge && fits(p-air) && !fits(p):
		j.add(Fault, "%s shows %s, which is the design's pressure if it is absolute: write its unit without the g, as in bar", tag.Name, tag.Show(p))
	case !tag.Unit.Gauge && p < 0.9*air:
		j.add(Note, "%s shows %s absolute, below the air pressure of %.4g kPa: gauge, perhaps? Then write its unit with a g, as in barg", tag.Name, tag.Show(p), air/1e3)
	case tag.Unit.Gauge && p < 0.9*air:
		j.add(Note, "%s shows %s gauge, below the air pressure: check its unit", tag.Name, tag.Show(p))
	}
}

// farOff is how far a temperature must be off its design for its unit to be doubted, and
// closeTo how near it must be in another one, K.
const (
	farOff  = 15
	closeTo = 5
)

// temperatures looks, where one is far from its design, for a unit in which it would be at
// it. Nothing is said of a stream that has its sides swapped.
func (j judge) temperatures() {
	s, d := j.declared.Stream, j.declared.Design
	if s == nil {
		return
	}
	for _, at := range []struct {
		src    site.Source
		design float64
	}{{s.Inlet, d.Inlet}, {s.Outlet, d.Outlet}} {
		if at.design == 0 || at.src.Constant() || !j.tags[at.src.Tag].has() {
			continue
		}
		tag, shows := &j.site.Tags[at.src.Tag], j.tags[at.src.Tag].newest.Value
		if tag.Unit.Dimension != unit.Temperature || near(shows, at.design, farOff) || near(shows, d.Inlet, closeTo) || near(shows, d.Outlet, closeTo) {
			continue
		}
		for _, u := range unit.Named(unit.Temperature) {
			if near(u.SI(tag.Unit.Of(shows)), at.design, closeTo) {
				j.add(Fault, "%s shows %s; in %s that would be at the design's %.4g °C: check its unit", tag.Name, tag.Show(shows), u.Symbol, at.design-273.15)
				break
			}
		}
	}
}

func (t *tagTrial) has() bool { return t.live+t.kept > 0 }

// pipe tells the duty with the meter in the other pipe, and which of the two a witness
// agrees with.
func (j judge) pipe() {
	if s := j.declared.Stream; s.FlowKind != unit.VolumeFlow {
		return
	}
	here, there := j.told.Figure, j.other.Basis(j.load).Figure
	if !there.Measured() || there.Idle || here.Duty == 0 {
		return
	}
	apart := math.Abs(there.Duty - here.Duty)
	if apart < 0.002*math.Abs(here.Duty) {
		return // no meter tells
	}
	pipes := [2]string{"inlet", "outlet"}
	if j.declared.Stream.MeterAtOutlet {
		pipes[0], pipes[1] = pipes[1], pipes[0]
	}
	j.add(Note, "with the meter in the %s pipe, as the file says, %s; in the %s pipe it would be %s (%+.2g %%)",
		pipes[0], kilowatts(here.Duty), pipes[1], kilowatts(there.Duty), 100*(there.Duty/here.Duty-1))
	if j.declared.HasWitness {
		j.witness(pipes, apart)
	}
}

// witness compares both with what the witness has counted: it tells only where its step, and
// the heat of the step of the grid that a count may stand late, are small beside the
// difference, and it is clearly nearer to one. power is how far the two duties are apart, W.
func (j judge) witness(pipes [2]string, power float64) {
	counted := j.minutes[0][j.load].witness
	ours := [2]float64{j.minutes[0][j.load].compared, j.minutes[1][j.load].compared}
	tag := &j.site.Tags[j.declared.Witness.Tag]
	apart := math.Abs(ours[0] - ours[1])
	heard := &j.tags[j.declared.Witness.Tag]
	least := j.blur(1)
	switch off := [2]float64{math.Abs(counted - ours[0]), math.Abs(counted - ours[1])}; {
	case counted != 0 && min(off[0], off[1]) > max(least, apart):
		j.add(Note, "its witness %s agrees with neither: off by %s and %s", tag.Name, percent(off[0]/counted), percent(off[1]/counted))
	case counted == 0 || apart < least:
		// Spans of a witness begin and end once a minute, and not before it has counted.
		enough := max(least/power, 3*float64(heard.gap)/1e9) + 120
		j.add(Note, "its witness %s cannot tell yet which pipe is right: listen for %.0f minutes", tag.Name, math.Ceil(enough/60))
	case off[1] < apart/3 && off[0] > off[1]:
		j.add(Fault, "its witness %s agrees with the %s pipe, and not with the %s pipe of the file (off by %s against %s): check where the meter sits",
			tag.Name, pipes[1], pipes[0], percent(off[1]/counted), percent(off[0]/counted))
	case off[0] < apart/3:
		j.add(Note, "its witness %s agrees with the %s pipe, as the file says (off by %s)", tag.Name, pipes[0], percent(off[0]/counted))
	default:
		j.add(Note, "its witness %s is clearly nearer to neither: off by %s and %s", tag.Name, percent(off[0]/counted), percent(off[1]/counted))
	}
}

func kilowatts(w float64) string { return figures(w/1e3, 4) + " kW" }

func percent(ratio float64) string { return figures(100*ratio, 2) + " %" }

// figures writes x with n figures that count, and never as a power of ten.
func figures(x float64, n int) string {
	places := 0
	if x != 0 {
		places = max(0, n-1-int(math.Floor(math.Log10(math.Abs(x)))))
	}
	return strconv.FormatFloat(x, 'f', min(places, 9), 64)
}
