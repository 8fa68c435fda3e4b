package site

import (
	"fmt"
	"time"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

func (r *reader) readLoads(o object) {
	v, ok := o.need("loads", "at least one load, such as hot-water: {stream: {...}}")
	if !ok {
		return
	}
	es := v.entries()
	v.emptyMapping("at least one load")
	for _, e := range es {
		if e.key.label(e.name) && (e.name == "." || e.name == "..") {
			e.key.fault("the name %q cannot stand in an address", e.name)
		}
		r.site.Loads = append(r.site.Loads, r.load(e))
	}
}

func (r *reader) load(e entry) HeatLoad {
	o := e.object("loads.*")
	l := HeatLoad{Name: e.name, Witness: nowhere, Running: nowhere, Bypass: nowhere, Design: Design{Lasting: 10 * time.Minute}}
	var design object
	if v, ok := o.get("design"); ok {
		design = v.object("loads.*.design")
		r.design(design, &l.Design)
		if v, ok := design.get("exchanger"); ok {
			r.tellers[len(r.site.Loads)] = v
		}
	}
	if v, ok := o.get("witness"); ok {
		l.Witness, _ = r.sourceAt(v, theWitness)
		l.HasWitness = true
	}
	stream, isStream := o.get("stream")
	vessel, isVessel := o.get("vessel")
	switch {
	case isStream && isVessel:
		vessel.fault("stands beside stream; a load is the one or the other")
	case isVessel:
		l.Vessel = r.vessel(vessel.object("loads.*.vessel"))
		design.ofVessel()
	case isStream:
		of := stream.object("loads.*.stream")
		l.Stream = r.stream(of, &l.Design)
		r.checkDesignPoint(of, design, l)
	default:
		o.need("stream", "the fluid with its flow, temperatures and pressure; or vessel, a closed content", "vessel")
	}
	r.running(o, &l)
	r.bypass(o, &l)
	return l
}

func (r *reader) stream(o object, d *Design) *Stream {
	s := &Stream{Humidity: nowhere, Coil: nowhere, Corrections: Corrections{Pump: nowhere}}
	if v, ok := o.need("fluid", "a declared fluid, or a built-in one such as water or dry air"); ok {
		s.FluidName, s.Fluid = r.fluid(v)
	}
	s.Margin = DefaultMargin(s.Fluid)
	s.Flow = nowhere
	if v, ok := o.need("flow", "a tag or a constant such as 12 m3/h"); ok {
		s.Flow, s.FlowKind = r.sourceAt(v, theFlow)
	}
	s.Inlet, _ = r.needSource(o, "inlet", "a tag or a constant such as 130 °C", unit.Temperature)
	s.Outlet, _ = r.needSource(o, "outlet", "a tag or a constant such as 90 °C", unit.Temperature)
	s.Pressure, _ = r.needSource(o, "pressure", "a tag, or a constant such as 3 barg may stand", unit.Pressure)
	s.OutletPressure = s.Pressure
	if v, ok := o.get("outlet_pressure"); ok {
		s.OutletPressure, _ = r.source(v, unit.Pressure)
	}
	s.Gives = o.service("stream", "heat (a heating circuit)", "heat (a chilled circuit, a heated product)")
	o.calibrated(s)
	if v, ok := o.get("both_ways"); ok {
		s.BothWays = v.truth()
	}
	o.meter(s)
	r.moisture(o, s)
	if v, ok := o.get("margin"); ok {
		s.Margin, _ = v.within(0, 100, "0 K to 100 K", unit.TemperatureDifference)
	}
	if v, ok := o.get("idle_below"); ok && s.FlowKind != 0 {
		s.IdleBelow = notNegative(v, s.FlowKind)
	} else if !s.Flow.Constant() && s.FlowKind != 0 {
		s.IdleBelow = r.site.Tags[s.Flow.Tag].zero()
	}
	o.pair(s)
	r.corrections(o, s, d)
	o.checkStream(s)
	return s
}

// pair reads how far the errors of the two thermometers are the same.
func (o object) pair(s *Stream) {
	v, ok := o.get("pair")
	if !ok {
		return
	}
	s.Pair = v.bareWithin(0, 1)
	if s.Inlet.Constant() || s.Outlet.Constant() {
		v.fault("is about two thermometers, and inlet and outlet are not both tags")
	}
}

// zeroOfRange is the part of a flow meter's range at or below which nothing is taken
// to flow, unless the load says: common practice, no source.
const zeroOfRange = 0.005

// zero is how far from zero, SI, a flow tag, or the rate of a counter, may read while nothing flows: half a
// percent of its range, or the part of its accuracy that does not depend on the
// reading, whichever is more; 0 where it has neither.
func (t Tag) zero() float64 {
	if _, ok := largestFlow[t.Unit.Dimension]; ok && t.Max < largestFlow[t.Unit.Dimension] {
		return max(zeroOfRange*t.Max, t.Accuracy.Abs)
	}
	return t.Accuracy.Abs
}

// service reads which way the load serves, true where it gives heat. What names it, and
// the examples stand in the fault of one that tells none.
func (o object) service(what, giving, taking string) bool {
	gives, isGiven := o.get("gives")
	takes, isTaken := o.get("takes")
	switch {
	case isGiven && isTaken:
		takes.fault("stands beside gives; a %s gives heat or takes it", what)
	case isGiven:
		gives.oneOf("heat")
		return true
	case isTaken:
		takes.oneOf("heat")
	case o.node.Kind == yaml.MappingNode && !o.misspelt([]string{"gives", "takes"}):
		o.fault("wants gives: %s or takes: %s", giving, taking)
	}
	return isGiven
}

// meter reads where a volume flow is metered, which decides the density.
func (o object) meter(s *Stream) {
	if v, ok := o.get("meter_at"); ok {
		at, _ := v.oneOf("inlet", "outlet")
		s.MeterAtOutlet = at == "outlet"
		return
	}
	switch {
	case s.FlowKind == unit.VolumeFlow:
		o.need("meter_at", "inlet or outlet: a volume flow becomes a mass flow with the density at the meter")
	case s.CalibratedAt > 0:
		o.need("meter_at", "inlet or outlet: a flow by differential pressure is corrected for the density at the meter")
	}
}

// calibrated reads the density that a meter by differential pressure was reckoned for.
func (o object) calibrated(s *Stream) {
	v, ok := o.get("calibrated_at")
	if !ok {
		return
	}
	s.CalibratedAt, _ = v.aboveZero(unit.Density)
	switch {
	case s.Flow.Constant() && s.FlowKind != 0:
		v.fault("is of a meter, and the flow is a constant")
	case s.Fluid != nil && s.Fluid.Phase() == thermo.Solid:
		v.fault("is of a meter by differential pressure, and %q is a solid", s.FluidName)
	}
}

// checkStream looks at what does not go together.
func (o object) checkStream(s *Stream) {
	if flow, ok := o.get("flow"); ok && s.Fluid != nil && s.FlowKind != 0 {
		if err := FlowSuits(s.Fluid, s.FlowKind); err != nil {
			flow.fault("%v", err)
		}
	}
	if outlet, ok := o.get("outlet"); ok && !s.Outlet.Constant() && s.Inlet == s.Outlet {
		outlet.fault("is the same tag as inlet, so there is no difference to measure")
	}
	if s.Flow.Value > 0 && s.Inlet.Value > 0 && s.Outlet.Value > 0 {
		o.fault("nothing is measured: flow, inlet and outlet are all constants")
	}
}

// FlowSuits says why a fluid cannot be metered in a flow of the dimension d, or nil
// where it can.
func FlowSuits(f thermo.Fluid, d unit.Dimension) error {
	switch {
	case d == unit.MassFlow:
	case f.Phase() == thermo.Solid:
		return fmt.Errorf("%q is a solid, and so flows by mass", f.Name())
	case d != unit.MolarFlow:
	case f.Phase() != thermo.Gas:
		return fmt.Errorf("a normal or standard volume flow is for gases, and %q is a %s", f.Name(), f.Phase())
	case f.MolarMass() <= 0:
		return fmt.Errorf("a normal or standard volume flow needs a molar mass, and %q has none; want a mass flow or volume flow, or the molar_mass of its declaration", f.Name())
	}
	return nil
}

func notNegative(v value, d unit.Dimension) float64 {
	q, ok := v.quantity(d)
	if !ok {
		return 0
	}
	if q.SI() < 0 {
		v.fault("%v is below zero", q)
		return 0
	}
	return q.SI()
}

// design reads the optional block.
func (r *reader) design(o object, d *Design) {
	r.expectation(o, d)
	o.setDuration("lasting", &d.Lasting, time.Second, day, "1 s to 1 d")
	if b := d.Baseline; b != nil && b.Span < d.Lasting {
		o.has["baseline"].fault("was learned from samples of %v, and a deviation must last %v: learn with samples that are as long", b.Span, d.Lasting)
	}
	if v, ok := o.get("inlet"); ok {
		d.Inlet = r.constant(v, unit.Temperature)
	}
	if v, ok := o.get("outlet"); ok {
		d.Outlet = r.constant(v, unit.Temperature)
	}
	if v, ok := o.get("pressure"); ok {
		d.Pressure = r.constant(v, unit.Pressure)
	}
}

// ofVessel refuses what the design of a vessel has no use for.
func (o object) ofVessel() {
	for _, key := range []string{"inlet", "outlet", "pressure"} {
		if v, ok := o.get(key); ok {
			v.fault("is of a stream; the design of a vessel has what is expected, allow and lasting")
		}
	}
}
