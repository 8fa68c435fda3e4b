package site

import (
	"slices"
	"strings"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
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

// measures are the ways to say how humid air is.
var measures = []struct {
	key     string
	kind    thermo.MoistureKind
	is      unit.Dimension
	symbols []string // of the units of a ratio; percent of one is not percent of the other
	example string
}{
	{"relative_humidity", thermo.RelativeHumidity, unit.Ratio, []string{"%"}, "50 %"},
	{"dew_point", thermo.DewPoint, unit.Temperature, nil, "12 °C"},
	{"wet_bulb", thermo.WetBulb, unit.Temperature, nil, "18 °C"},
	{"humidity_ratio", thermo.HumidityRatio, unit.Ratio, []string{"g/kg", "kg/kg"}, "8 g/kg"},
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
			s.Humidity, _ = r.source(v, m.is)
			r.inUnits(v, s.Humidity, m.symbols)
		}
	}
	if humid && s.HumidityKind == 0 && o.node.Kind == yaml.MappingNode && !o.misspelt(measureKeys()) {
		o.fault("does not say how humid %s is at the inlet; want one of: %s, each a tag or a constant", s.FluidName, strings.Join(measureKeys(), ", "))
	}
	if v, ok := o.get("coil"); ok {
		s.Coil, _ = r.source(v, unit.Temperature)
		s.HasCoil = true
		if s.Fluid != nil && !isMoist(s.Fluid) {
			v.fault("is about a moist gas, and the fluid is %q", s.FluidName)
		}
	}
}

// inUnits holds a tag or constant to the units that say what its ratio is of.
func (r *reader) inUnits(v value, s Source, symbols []string) {
	if !s.Constant() {
		v.inUnits(r.site.Tags[s.Tag].Unit, symbols)
	} else if q, err := unit.ParseAs(v.node.Value, unit.Ratio); err == nil {
		v.inUnits(q.Unit, symbols)
	}
}

func (v value) inUnits(u unit.Unit, symbols []string) {
	if len(symbols) > 0 && u.Dimension == unit.Ratio && !slices.Contains(symbols, u.Symbol) {
		v.fault("is in %v; want %s", u, strings.Join(symbols, " or "))
	}
}
