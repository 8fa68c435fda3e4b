package site

import (
	"fmt"
	"math"

	"heatreeve/thermo"
)

// state is a temperature of the file with the pressure that goes with it.
type state struct {
	value
	T, p float64 // K, Pa; a pressure of 0 is not known
}

// checkDesignPoint holds the constants of a load to the range of its fluid. Where
// the pressure is a tag and the design names none, only the fluid's outer bounds
// can be checked.
func (r *reader) checkDesignPoint(stream, design object, l HeatLoad) {
	f := l.Stream.Fluid
	if f == nil {
		return
	}
	okIn := pressureFits(f, stream, "pressure", l.Stream.Pressure.Value)
	okOut := pressureFits(f, stream, "outlet_pressure", l.Stream.OutletPressure.Value)
	okDesign := pressureFits(f, design, "pressure", l.Design.Pressure)
	if !okIn || !okOut || !okDesign {
		return
	}
	pIn, pOut := l.Stream.Pressure.Value, l.Stream.OutletPressure.Value
	if l.Design.Pressure > 0 {
		pIn = l.Design.Pressure
		if _, own := stream.get("outlet_pressure"); !own {
			pOut = pIn
		}
	}
	for _, s := range []state{
		{stream.has["inlet"].value, l.Stream.Inlet.Value, pIn},
		{stream.has["outlet"].value, l.Stream.Outlet.Value, pOut},
		{design.has["inlet"].value, l.Design.Inlet, pIn},
		{design.has["outlet"].value, l.Design.Outlet, pOut},
	} {
		if s.T > 0 {
			s.check(f, l.Stream.Margin)
		}
	}
	checkHumidity(stream, l, pIn)
	checkDirection(stream, design, l)
}

// checkHumidity holds a constant humidity to the air that it is of, where that is known.
func checkHumidity(stream object, l HeatLoad, p float64) {
	s, T := *l.Stream, max(l.Design.Inlet, l.Stream.Inlet.Value)
	humid, ok := s.Fluid.(thermo.Humid)
	if !ok || !s.Humidity.Constant() || s.Humidity.Value == 0 || T == 0 || p == 0 {
		return
	}
	if _, err := humid.Carrying(thermo.Moisture{Kind: s.HumidityKind, Value: s.Humidity.Value}, T, p); err != nil {
		for _, m := range measures {
			if v, given := stream.get(m.key); given && m.kind == s.HumidityKind {
				v.fault("%v", err)
			}
		}
	}
}

// check refuses a state that the fluid does not have, or one so near to saturation
// that its heat would never be booked. Moist air is not refused below its dew point.
func (s state) check(f thermo.Fluid, margin float64) {
	b := f.Bounds()
	if s.p == 0 {
		if s.T < b.MinT || s.T > b.MaxT {
			s.fault("%s is out of the range of %s; allowed: %s to %s", celsius(s.T), f.Name(), celsius(b.MinT), celsius(b.MaxT))
		}
		return
	}
	lo, hi := f.Span(s.p)
	at := f.At
	if w, wet := f.(thermo.Wet); wet {
		at = w.Sensible
	}
	if _, err := at(s.T, s.p); err != nil {
		s.fault("%v; allowed at %s absolute: %s to %s", err, kilopascal(s.p), celsius(max(lo, b.MinT)), celsius(min(hi, b.MaxT)))
		return
	}
	switch {
	case f.Phase() == thermo.Liquid && s.T > hi-margin:
		s.fault("%s is within the margin of %.4g K to boiling at %s under %s absolute, where heat is not booked",
			celsius(s.T), margin, celsius(hi), kilopascal(s.p))
	case f.Phase() == thermo.Gas && !isMoist(f) && s.T < lo+margin:
		s.fault("%s is within the margin of %.4g K to the dew point at %s under %s absolute, where heat is not booked",
			celsius(s.T), margin, celsius(lo), kilopascal(s.p))
	}
}

// pressureFits checks a constant pressure against the fluid's bounds.
func pressureFits(f thermo.Fluid, o object, key string, p float64) bool {
	v, ok := o.get(key)
	b := f.Bounds()
	if !ok || p == 0 || (p >= b.MinP && p <= b.MaxP) {
		return true
	}
	v.fault("%s absolute is out of the range of %s; allowed: %s to %s", kilopascal(p), f.Name(), kilopascal(b.MinP), kilopascal(b.MaxP))
	return false
}

// checkDirection compares the design temperatures with the way the load serves.
func checkDirection(stream, design object, l HeatLoad) {
	in, out := l.Stream.Inlet.Value, l.Stream.Outlet.Value
	place := stream.has["outlet"].value
	if l.Design.Inlet > 0 {
		in, place = l.Design.Inlet, design.has["inlet"].value
	}
	if l.Design.Outlet > 0 {
		out, place = l.Design.Outlet, design.has["outlet"].value
	}
	_, gives := stream.get("gives")
	_, takes := stream.get("takes")
	switch {
	case in == 0 || out == 0 || gives == takes:
	case gives && in <= out:
		place.fault("the stream gives heat, and its outlet at %s is not colder than its inlet at %s", celsius(out), celsius(in))
	case takes && out <= in:
		place.fault("the stream takes heat, and its outlet at %s is not warmer than its inlet at %s", celsius(out), celsius(in))
	}
}

func celsius(T float64) string {
	if math.IsInf(T, 0) {
		return "no limit"
	}
	return fmt.Sprintf("%.5g °C", T-273.15)
}

func kilopascal(p float64) string { return fmt.Sprintf("%.6g kPa", p/1e3) }
