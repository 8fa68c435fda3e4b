package site

import (
	"strings"

	"heatreeve/thermo/unit"
)

// The raw signals by their words.
const (
	loopSignal       = "4-20 mA"
	rootOfLoopSignal = "square root of 4-20 mA"
	rootOfPressure   = "square root of pressure"
	milliampere      = "mA"
	ohm              = "ohm"
	usualCutOff      = 0.05 // of the full flow: common practice, no source
	largestCutOff    = 0.3
	longestLead      = 0.5 // of the resistance at 0 °C
)

var sensors = []string{"Pt100", "Pt500", "Pt1000"}

// nominal are their resistances at 0 °C, ohm.
var nominal = map[string]float64{"Pt100": 100, "Pt500": 500, "Pt1000": 1000}

var signals = append([]string{loopSignal, rootOfLoopSignal, rootOfPressure}, sensors...)

// Signal is a raw signal that a tag's numbers are, and not yet the quantity in its unit.
type Signal struct {
	Word     string  // as in the file: "4-20 mA", "Pt100" and so on
	Loop     bool    // a current of 4 to 20 mA, over the tag's range
	Root     bool    // the flow is the square root of the signal, and full at the end of the range
	FullAt   float64 // number of the payload at the full flow; of a root that is no current
	CutOff   float64 // part of the full flow at or below which nothing flows; of a root
	R0, Lead float64 // ohm at 0 °C and of the leads; of a platinum thermometer
}

// signal reads the raw signal of a tag; known says that the tag has a unit.
func (o object) signal(t *Tag, known bool) {
	v, ok := o.get("signal")
	if !ok {
		for _, key := range []string{"lead", "differential", "cut_off"} {
			o.belongs(key, "signal")
		}
		return
	}
	word, ok := v.oneOf(signals...)
	if c, counts := o.get("counts"); counts {
		c.fault("stands beside signal; a register counts, and a raw signal is of an instant")
		return
	}
	if !ok || !known {
		return
	}
	s := &Signal{Word: word, Loop: strings.Contains(word, loopSignal), Root: strings.HasPrefix(word, "square root"), R0: nominal[word]}
	t.Signal = s
	o.onlyOf("lead", s.R0 > 0, "a platinum thermometer")
	o.onlyOf("cut_off", s.Root, "a square root")
	o.onlyOf("differential", word == rootOfPressure, rootOfPressure)
	switch {
	case s.R0 > 0:
		o.platinum(v, t)
	case s.Root:
		o.root(v, t)
	}
	if s.Loop {
		t.Numbers, _ = unit.LookupAs(milliampere, unit.Current)
	}
	if s.Loop && !s.Root {
		o.need("range", "what 4 and 20 mA stand for, such as range: [0 °C, 200 °C]")
	}
}

// onlyOf refuses a key that says nothing of the signal.
func (o object) onlyOf(key string, its bool, of string) {
	if v, ok := o.get(key); ok && !its {
		v.fault("is of %s, which this signal is not", of)
	}
}

func (o object) platinum(v value, t *Tag) {
	if t.Unit.Dimension != unit.Temperature {
		v.fault("%s is a thermometer, and the tag is in %v; the unit is that of the temperature", t.Signal.Word, t.Unit)
	}
	t.Numbers, _ = unit.LookupAs(ohm, unit.Resistance)
	if v, ok := o.get("lead"); ok {
		most := longestLead * t.Signal.R0
		t.Signal.Lead, _ = v.within(0, most, unit.Quantity{Unit: t.Numbers}.String()+" to "+unit.Quantity{Value: most, Unit: t.Numbers}.String(), unit.Resistance)
	}
}

func (o object) root(v value, t *Tag) {
	if _, flow := largestFlow[t.Unit.Dimension]; !flow {
		v.fault("gives a flow, and the tag is in %v; the unit is that of the flow", t.Unit)
	}
	span, ranged := o.need("range", "the flow at no and at the full signal, such as range: [0 t/h, 12 t/h]")
	if ranged && t.Min != 0 && t.Max < largest[t.Unit.Dimension] {
		span.fault("begins at %.4g %s, and the root of no signal is no flow; want it from zero", t.Min, t.Unit.Dimension.SI())
	}
	t.Signal.CutOff = usualCutOff
	if v, ok := o.get("cut_off"); ok {
		t.Signal.CutOff, _ = v.part(0, largestCutOff, "0 % to 30 %", "")
	}
	if t.Signal.Loop {
		return
	}
	d, ok := o.need("differential", "the pressure at the full flow, such as differential: 250 mbar")
	if !ok {
		return
	}
	q, ok := d.quantity(unit.Pressure)
	switch {
	case !ok:
	case q.Unit.Gauge:
		d.fault("%v is a gauge pressure; a difference is written without", q)
	case !(q.Value > 0):
		d.fault("%v is not above zero", q)
	default:
		t.Numbers, t.Signal.FullAt = q.Unit, q.Value
	}
}
