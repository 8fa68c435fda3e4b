package working

import (
	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// quantity is how an input stands on paper.
type quantity struct {
	symbol, words, unit string
	size                float64 // of the unit, in SI
}

func of(f figure.Figure, unit string, size float64) quantity {
	return quantity{f.Symbol, f.Words, unit, size}
}

var flowSymbols = map[unit.Dimension]quantity{
	unit.MassFlow:   of(figure.MassFlow, "kg/s", 1),
	unit.VolumeFlow: {"V", "volume flow at the meter", "m3/s", 1},
	unit.MolarFlow:  {"n", "molar flow", "mol/s", 1},
}

var humidities = map[thermo.MoistureKind]quantity{
	thermo.HumidityRatio:    {"x", "humidity ratio at the inlet", "kg/kg", 1},
	thermo.RelativeHumidity: {"φ", "relative humidity at the inlet", "1", 1},
	thermo.DewPoint:         {"Td", "dew point at the inlet", "K", 1},
	thermo.WetBulb:          {"Tw", "wet bulb at the inlet", "K", 1},
}

var contents = map[unit.Dimension]quantity{
	unit.Mass:   {"m", "content", "kg", 1},
	unit.Volume: {"V", "content", "m3", 1},
}

var quantities = map[string]quantity{
	"inlet":           of(figure.Inlet, "K", 1),
	"outlet":          of(figure.Outlet, "K", 1),
	"pressure":        {"p1", "pressure at the inlet", "kPa", 1e3},
	"outlet pressure": {"p2", "pressure at the outlet", "kPa", 1e3},
	"coil":            {"Ts", "coldest surface of the coil", "K", 1},
	"pump":            {"P", "heat of the pump", "kW", 1e3},
	"temperature":     of(figure.Content, "K", 1),
}

// quantity is that of an input of the load.
func (p *page) quantity(in *loads.Input) quantity {
	switch in.Name {
	case "flow":
		q := flowSymbols[p.load.Stream.FlowKind]
		if q.symbol == "m" && p.load.Stream.CalibratedAt > 0 {
			q.symbol, q.words = "ms", "mass flow that the meter shows"
		}
		return q
	case "humidity":
		return humidities[p.load.Stream.HumidityKind]
	case "content":
		return contents[p.load.Vessel.ContentKind]
	case "pressure":
		if p.load.Vessel != nil {
			return quantity{"p", "pressure", "kPa", 1e3}
		}
	}
	return quantities[in.Name]
}

// value is what the engine used of an input, in the unit of its quantity.
func (p *page) value(in *loads.Input) float64 {
	x := in.Source.Value
	if in.Source.Tag >= 0 {
		x = in.Held.Value
	}
	return x / p.quantity(in).size
}
