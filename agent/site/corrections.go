package site

import (
	"time"

	"heatreeve/thermo/unit"
)

// corrections reads what the duty of a stream is corrected for.
func (r *reader) corrections(stream object, s *Stream, d *Design) {
	v, ok := stream.get("corrections")
	if !ok {
		return
	}
	o := v.object("loads.*.stream.corrections")
	if !s.Flow.Constant() && r.site.Tags[s.Flow.Tag].Counter != nil {
		v.fault("want a flow at every instant, and this one is counted by tag %q", r.site.Tags[s.Flow.Tag].Name)
	}
	if v, ok := o.get("pump"); ok {
		s.Pump, _ = r.source(v, unit.Power)
		s.HasPump = true
	}
	if v, ok := o.get("hold"); ok {
		o.hold(v, s)
	}
	if v, ok := o.get("stored"); ok {
		r.stored(v, s, d)
	}
}

// hold reads the volume that the fluid passes in plug flow; a flow by mass tells as well
// how long that takes, by the density of what comes in.
func (o object) hold(v value, s *Stream) {
	s.Hold, _ = v.aboveZero(unit.Volume)
	switch {
	case s.Inlet.Constant():
		v.fault("is about an inlet that changes, and this one is a constant")
	case s.HumidityKind != 0:
		v.fault("is of a stream whose humidity is measured, and the air of that humidity has left by the time it is compared")
	}
}

// usualStoredOver is the span over which the rise of what is stored is told, unless the
// load says.
const usualStoredOver = 5 * time.Minute

// stored reads the heat capacity of what lies between the thermometers.
func (r *reader) stored(v value, s *Stream, d *Design) {
	o := v.object("loads.*.stream.corrections.stored")
	s.StoredOver = usualStoredOver
	o.setDuration("over", &s.StoredOver, 10*time.Second, time.Hour, "10 s to 1 h")
	content, isContent := o.get("content")
	metal, isMetal := o.get("metal")
	T := r.midst(d.Inlet, s.Inlet, d.Outlet, s.Outlet)
	if isContent {
		s.Stored += r.contentCapacity(content, s, T, r.amid(d.Pressure, s.Pressure))
		if s.Hold > 0 {
			content.fault("stands beside hold, which accounts for the content already; keep one of them")
		}
	}
	if isMetal {
		s.Stored += metal.heatCapacity(T)
	}
	switch {
	case s.Inlet.Value > 0 && s.Outlet.Value > 0:
		v.fault("lies between two constant temperatures, and never changes")
	case !isContent && !isMetal:
		o.need("content", "an amount of the fluid such as 250 L; or metal, such as 120 kg steel", "metal")
	}
}

// contentCapacity is the heat capacity in J/K of some of the stream's fluid near T and p.
func (r *reader) contentCapacity(v value, s *Stream, T, p float64) float64 {
	q, ok := v.quantity(unit.Volume, unit.Mass, unit.HeatCapacity)
	switch {
	case !ok:
		return 0
	case q.SI() <= 0:
		v.fault("%v is not above zero", q)
		return 0
	case q.Unit.Dimension == unit.HeatCapacity || s.Fluid == nil:
		return q.SI()
	}
	x, err := s.Fluid.At(T, p)
	if err != nil {
		v.fault("%v; the design tells where else the fluid is, or write the heat capacity, such as 1.05 MJ/K", err)
		return 0
	}
	if q.Unit.Dimension == unit.Volume {
		return q.SI() * x.Density * x.Cp
	}
	return q.SI() * x.Cp
}

// roomTemperature and atmosphere are where a heat capacity is taken when the file tells
// nothing of the state.
const (
	roomTemperature = 293.15   // K
	atmosphere      = 101325.0 // Pa
)

// midst is the temperature in the middle of a stream or vessel, K: the mean of what the
// design tells of its ends, or else what [reader.amid] does.
func (r *reader) midst(design1 float64, end1 Source, design2 float64, end2 Source) float64 {
	return (r.typical(design1, end1, roomTemperature) + r.typical(design2, end2, roomTemperature)) / 2
}

// amid is the pressure of the design, or else a constant or the middle of a tag's range.
func (r *reader) amid(design float64, s Source) float64 { return r.typical(design, s, atmosphere) }

// typical is what a source reads by the design, as a constant, or in the middle of its
// range, where the file tells one; otherwise what is usual.
func (r *reader) typical(design float64, s Source, usual float64) float64 {
	switch {
	case design > 0:
		return design
	case s.Constant() && s.Value > 0:
		return s.Value
	case s.Constant():
		return usual
	}
	if t := &r.site.Tags[s.Tag]; t.Max < largest[t.Unit.Dimension] {
		return (t.Min + t.Max) / 2
	}
	return usual
}
