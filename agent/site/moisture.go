package site

import (
	"slices"
	"strings"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
	"heatreeve/thermo/unit"
)

// DefaultMargin is the margin to saturation in K of a stream that tells none: 5, and 1
// for a gas whose vapour content is known, so that its dew point is no guess.
func DefaultMargin(f thermo.Fluid) float64 {
	if isMoist(f) {
		return 1
	}
	return 5
}

func isMoist(f thermo.Fluid) bool {
	_, humid := f.(thermo.Humid)
	_, wet := f.(thermo.Wet)
	return humid || wet
}

// measure is a way to say how humid air is.
type measure struct {
	key     string
	kind    thermo.MoistureKind
	is      unit.Dimension
	symbols []string // of the units of a ratio; percent of one is not percent of the other
}

var measures = []measure{
	{"relative_humidity", thermo.RelativeHumidity, unit.Ratio, []string{"%"}},
	{"dew_point", thermo.DewPoint, unit.Temperature, nil},
	{"wet_bulb", thermo.WetBulb, unit.Temperature, nil},
	{"humidity_ratio", thermo.HumidityRatio, unit.Ratio, []string{"g/kg", "kg/kg"}},
}

const (
	mostVapour = 0.25   // kg/kg, to which moist air is held
	driest     = 173.15 // K, the lowest dew point that is known
)

// limits are what the measure can be in any air at p in Pa; a p of 0 is not known.
func (m measure) limits(p float64) (lo, hi float64, span string) {
	b := air.Live().Bounds()
	low, high := p, p
	if !(p >= b.MinP && p <= b.MaxP) {
		low, high = b.MinP, b.MaxP
	}
	// The errors are about pressures, temperatures and ratios beyond the range of moist
	// air, and these are its ends.
	switch m.kind {
	case thermo.RelativeHumidity:
		return 0, 1.02, "0 % to 102 %"
	case thermo.HumidityRatio:
		return 0, mostVapour, "0 g/kg to 250 g/kg"
	case thermo.DewPoint:
		lo = driest
		hi, _ = air.DewPoint(mostVapour, high)
	case thermo.WetBulb:
		lo, _ = air.WetBulb(0, b.MinT, low)
		hi, _ = air.WetBulb(mostVapour, b.MaxT, high)
	}
	return lo, hi, celsius(lo) + " to " + celsius(hi)
}

// check holds a constant to the limits.
func (m measure) check(v value, q unit.Quantity, p float64) bool {
	lo, hi, span := m.limits(p)
	if x := unit.Decimal(q.SI()); x < lo || x > hi {
		v.fault("%v is out of range of moist air; allowed: %s", q, span)
		return false
	}
	return true
}

// humidity reads how humid a stream is that has the pressure p in Pa, or 0 where that is not
// constant.
func (r *reader) humidity(v value, m measure, p float64) Source {
	s, d := r.source(v, m.is)
	if !s.Constant() {
		v.inUnits(r.site.Tags[s.Tag].Unit, m.symbols)
		return s
	}
	q, err := unit.ParseAs(v.node.Value, m.is)
	if d == 0 || err != nil || q.Value < 0 && m.is == unit.Ratio || !v.inUnits(q.Unit, m.symbols) || !m.check(v, q, p) {
		return nowhere
	}
	return s
}

func measureKeys() []string {
	var names []string
	for _, m := range measures {
		names = append(names, m.key)
	}
	return names
}

// moisture reads how humid the stream is, and the coil that it passes.
func (r *reader) moisture(o object, s *Stream) {
	_, humid := s.Fluid.(thermo.Humid)
	for _, m := range measures {
		v, ok := o.get(m.key)
		switch {
		case !ok:
		case s.Fluid != nil && !humid:
			v.fault("goes with the fluid \"moist air\", and the fluid is %q", s.FluidName)
		case s.HumidityKind != 0:
			v.fault("is one measure too many; want one of: %s", strings.Join(measureKeys(), ", "))
		default:
			s.HumidityKind = m.kind
			s.Humidity = r.humidity(v, m, s.Pressure.Value)
		}
	}
	if humid && s.HumidityKind == 0 && o.node.Kind == yaml.MappingNode && !o.misspelt(measureKeys()) {
		o.fault("does not say how humid %s is at the inlet; want one of: %s, each a tag or a constant", s.FluidName, strings.Join(measureKeys(), ", "))
	}
	if v, ok := o.get("coil"); ok {
		s.Coil, _ = r.source(v, unit.Temperature)
		s.HasCoil = true
		switch {
		case s.Fluid != nil && !isMoist(s.Fluid):
			v.fault("is about a moist gas, and the fluid is %q", s.FluidName)
		case s.Coil.Value > 0:
			v.checkCoil(s.Coil.Value)
		}
	}
	o.checkPlaces(s)
}

// checkCoil refuses a temperature in K that no coil in moist air has.
func (v value) checkCoil(T float64) {
	if hottest := air.Live().Bounds().MaxT; T < driest || T > hottest {
		v.fault("%s is out of range of a coil in moist air; allowed: %s to %s", celsius(T), celsius(driest), celsius(hottest))
	}
}

// checkPlaces refuses one tag in two places that never have the same temperature.
func (o object) checkPlaces(s *Stream) {
	for _, place := range [...]struct {
		key    string
		source Source
		others []string
	}{
		{"coil", s.Coil, []string{"inlet"}},
		{"dew_point", s.Humidity, []string{"inlet", "outlet"}},
		{"wet_bulb", s.Humidity, []string{"inlet", "outlet"}},
	} {
		v, ok := o.get(place.key)
		for _, other := range place.others {
			at := s.Inlet
			if other == "outlet" {
				at = s.Outlet
			}
			if ok && !at.Constant() && place.source == at {
				v.fault("is the same tag as %s; it is another temperature", other)
			}
		}
	}
}

// inUnits holds a tag or constant to the units that say what its ratio is of.
func (v value) inUnits(u unit.Unit, symbols []string) bool {
	if len(symbols) > 0 && u.Dimension == unit.Ratio && !slices.Contains(symbols, u.Symbol) {
		v.fault("is in %v; want %s", u, strings.Join(symbols, " or "))
		return false
	}
	return true
}
