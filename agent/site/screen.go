package site

import (
	"slices"
	"strings"
	"time"

	"heatreeve/thermo/unit"
)

// Screen is what the readings of a tag are tested against; see the tag's Resolution.
type Screen struct {
	Low, High float64       // SI, absolute, what is plausible; only where Low < High
	Fastest   float64       // SI a second; 0 for any rate
	Stuck     time.Duration // after how long without moving it is stuck; 0 for never
	Spikes    bool          // a reading far from its neighbours is set aside
}

// beside is a tag with the name of the sensor beside it, which may stand further below.
type beside struct {
	tag int
	at  value
}

// screen reads the tests that a tag asks for.
func (r *reader) screen(o object, t *Tag) {
	var s Screen
	if v, ok := o.get("plausible"); ok && o.tested(v, t) {
		r.plausible(o, v, t, &s)
	}
	if v, ok := o.get("fastest"); ok && o.tested(v, t) {
		s.Fastest = v.fastest(t)
	}
	if v, ok := o.get("stuck"); ok && o.tested(v, t) {
		if t.OnChange {
			v.fault("is not of a tag that reports on change, which is silent while nothing changes")
		} else {
			s.Stuck, _ = v.duration(10*time.Second, 7*day, "10 s to 7 d")
		}
	}
	if v, ok := o.get("spikes"); ok && o.tested(v, t) {
		_, s.Spikes = v.oneOf("set aside")
		switch {
		case !s.Spikes:
		case t.OnChange:
			v.fault("is not of a tag that reports on change, whose readings are no neighbours in time")
		case t.Resolution <= 0:
			o.need("resolution", "the step of the numbers, such as 0.1 K: beside spikes, for what moves by less is none")
		}
	}
	if v, ok := o.get("beside"); ok && o.tested(v, t) {
		r.besides = append(r.besides, beside{len(r.site.Tags), v})
	}
	if s != (Screen{}) {
		t.Screen = &s
	}
}

// tested refuses a test of a counter.
func (o object) tested(v value, t *Tag) bool {
	if t.Counter != nil {
		v.fault("is not of a counter, whose rises are tested by largest")
	}
	return t.Counter == nil
}

func (r *reader) plausible(o object, v value, t *Tag, s *Screen) {
	lo, hi, ok := r.span(v, t.Unit)
	_, ranged := o.get("range")
	switch {
	case !ok:
	case ranged && (lo < t.Min || hi > t.Max):
		v.fault("reaches beyond the range, outside which a reading is refused")
	default:
		s.Low, s.High = lo, hi
	}
}

// fastest reads a rate of change, such as 2 K/s or 0.5 bar/min.
func (v value) fastest(t *Tag) float64 {
	text, ok := v.text()
	if !ok {
		return 0
	}
	i := strings.LastIndex(text, "/")
	var per unit.Quantity
	err := error(nil)
	if i >= 0 {
		per, err = unit.ParseAs("1 "+strings.TrimSpace(text[i+1:]), unit.Duration)
	}
	if i < 0 || err != nil {
		v.fault("%q is no rate of change; want how far in what time, such as 2 K/s or 0.5 bar/min", clip(text))
		return 0
	}
	q, err := unit.ParseAs(text[:i], distances(t.Unit.Dimension))
	x := unit.Decimal(q.SI() / per.SI())
	switch {
	case err != nil:
		v.fault("%v", err)
	case !(x > 0):
		v.fault("%q is not above zero; leave it out where any rate may be", clip(text))
	case !sameBasis(q.Unit, t.Unit):
		v.fault("%v and the tag's unit %v are not of the same; want %v", q, t.Unit, t.Unit)
	default:
		return x
	}
	return 0
}

// readBesides finds the sensors beside each other once all tags are read.
func (r *reader) readBesides() {
	for _, b := range r.besides {
		t := &r.site.Tags[b.tag]
		i := b.at.otherTag(r, t)
		if i < 0 {
			continue
		}
		switch other := &r.site.Tags[i]; {
		case other.Unit.Symbol == "" || t.Unit.Symbol == "":
		case other.Counter != nil:
			b.at.fault("tag %q is a counter; want a sensor of the same quantity", other.Name)
		case other.Unit.Dimension != t.Unit.Dimension:
			b.at.fault("tag %q is in %v, %s; want one of %v, as %q is", other.Name, other.Unit, article(other.Unit.Dimension.String()), t.Unit.Dimension, t.Name)
		default:
			t.Beside, t.HasBeside = i, true
		}
	}
}

// otherTag is the index of the declared tag that v names, and is not t; -1 where there is a
// fault.
func (v value) otherTag(r *reader, t *Tag) int {
	s, ok := v.text()
	if !ok {
		return -1
	}
	i, declared := r.tags[s]
	switch {
	case s == t.Name:
		v.fault("is the tag itself; want the other sensor")
		return -1
	case !declared:
		var known []string
		for name := range r.tags {
			if name != t.Name {
				known = append(known, name)
			}
		}
		slices.Sort(known)
		v.fault("tag %q is not declared%s; declared: %s", clip(s), nearOf(s, known), list(known))
		return -1
	}
	return i
}

// thePump is what a tag that tells whether a pump runs may be in.
var thePump = place{of: []unit.Dimension{unit.Ratio, unit.Power}}

// running reads the tag of the pump of a load.
func (r *reader) running(o object, l *HeatLoad) {
	v, ok := o.get("running")
	if !ok {
		return
	}
	before := len(v.faults)
	l.Running, _ = r.sourceAt(v, thePump)
	switch {
	case len(v.faults) > before:
	case l.Running.Constant():
		v.fault("is a constant; want the tag of the pump: its speed or state in %%, or its power")
	case l.Vessel != nil:
		v.fault("is not of a vessel, which has no flow")
	case l.Stream != nil && l.Stream.Flow.Constant():
		v.fault("tells of a flow, and that of the stream is a constant")
	case l.Stream != nil && r.site.Tags[l.Stream.Flow.Tag].Counter != nil:
		v.fault("is not of a flow that is counted; want a flow at every instant")
	default:
		l.HasRunning = true
	}
}

// bypass reads what leads the flow of a load past it.
func (r *reader) bypass(o object, l *HeatLoad) {
	v, ok := o.get("bypass")
	if !ok {
		return
	}
	of := v.object("loads.*.bypass")
	l.Settles = 10 * time.Minute
	of.setDuration("settles", &l.Settles, time.Second, day, "1 s to 1 d")
	open, ok := of.need("open", "the tag that tells how far it is open, or whether")
	if !ok {
		return
	}
	before := len(open.faults)
	l.Bypass, _ = r.sourceAt(open, place{of: []unit.Dimension{unit.Ratio}})
	switch {
	case len(open.faults) > before:
	case l.Bypass.Constant():
		open.fault("is a constant; want the tag of the bypass: how far it is open in %%, or true where it is")
	case l.Vessel != nil:
		v.fault("is not of a vessel, past which nothing flows")
	case l.Stream != nil && (l.Stream.Inlet.Constant() || l.Stream.Outlet.Constant()):
		v.fault("tells that inlet and outlet are alike, and one of those of the stream is a constant")
	default:
		l.HasBypass = true
	}
}
