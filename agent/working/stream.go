package working

import (
	"fmt"
	"math"

	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/thermo/unit"
)

// stream writes the heat equation of a stream.
func (p *page) stream() {
	b := p.Basis.Stream
	p.begin(p.title("Fluid"))
	p.hold()
	h1, h2 := p.enthalpies()
	m := p.massFlow()
	p.end()
	p.begin("Duty")
	rise, dx := h2.minus(h1), b.Result.Outlet.Enthalpy-b.Result.Inlet.Enthalpy
	if p.load.Stream.Gives {
		rise, dx = h1.minus(h2), -dx
	}
	dh := p.worked("Δh", p.way(), rise, dx/1e3, "kJ/kg", p.enthalpyPlaces(), "")
	symbol, words := figure.Duty.Symbol, figure.Duty.Words
	if b.Correction != 0 {
		symbol, words = "Qs", "duty by flow and temperatures"
	}
	q := p.worked(symbol, words, m.times(dh), b.ByFlow/1e3, "kW", place(b.ByFlow/1e3, fine-1), "")
	p.at["stream"] = q
	if b.Correction != 0 {
		q = p.corrected(q)
	}
	p.at["duty"] = q
	p.streamSpread()
}

// way tells which way the heat goes.
func (p *page) way() string {
	if p.load.Stream.Gives {
		return "given up by a kilogram"
	}
	return "taken up by a kilogram"
}

// hold writes what leaves the hold now in the place of what enters.
func (p *page) hold() {
	s, b := p.load.Stream, p.Basis.Stream
	if s.Hold == 0 {
		return
	}
	words := figure.Leaving.By(fmt.Sprintf("plug flow through %s L", fixed(s.Hold*1e3, 6)))
	p.at["reading"] = p.at["inlet"]
	p.at["inlet"] = p.given(figure.Leaving.Symbol, words, b.State.Inlet, "K", place(b.State.Inlet, fine+2), "from the flow and inlet since then")
}

// enthalpyPlaces is how many decimals of kJ/kg leave their difference its digits.
func (p *page) enthalpyPlaces() int {
	r := &p.Basis.Stream.Result
	dh := math.Abs(r.Outlet.Enthalpy-r.Inlet.Enthalpy) / 1e3
	return min(9, max(place(dh, fine), 3))
}

func (p *page) enthalpies() (h1, h2 term) {
	r, x := &p.Basis.Stream.Result, &p.Basis.Stream.State
	n := p.enthalpyPlaces()
	of := "enthalpy"
	if p.Basis.Figure.Latent {
		of = "enthalpy, the sensible part,"
	}
	at := func(end string, T, p float64) string {
		return fmt.Sprintf("%s at the %s, %s K and %s kPa", of, end, fixed(T, 4), fixed(p/1e3, 4))
	}
	h1 = p.given("h1", at("inlet", x.Inlet, x.Pressure), r.Inlet.Enthalpy/1e3, "kJ/kg", n, p.citation)
	h2 = p.given("h2", at("outlet", x.Outlet, x.OutletPressure), r.Outlet.Enthalpy/1e3, "kJ/kg", n, p.citation)
	return h1, h2
}

// massFlow writes how the flow becomes kg/s.
func (p *page) massFlow() term {
	b, s := p.Basis.Stream, p.load.Stream
	flow, m := p.at["flow"], b.MassFlow
	var rho term
	if s.FlowKind == unit.VolumeFlow || s.CalibratedAt > 0 {
		end := "inlet"
		if s.MeterAtOutlet {
			end = "outlet"
		}
		rho = p.given("ρ", "density at the meter, which sits at the "+end, b.Density, "kg/m3", place(b.Density, fine), p.citation)
	}
	f := flow
	switch s.FlowKind {
	case unit.VolumeFlow:
		f = f.times(rho)
	case unit.MolarFlow:
		molar := p.Basis.Stream.MolarMass
		f = f.times(p.given("M", "molar mass", molar, "kg/mol", place(molar, fine+1), p.citation))
	}
	if s.CalibratedAt > 0 {
		f = f.times(p.felt(rho))
	}
	if f == flow {
		return flow
	}
	return p.worked(figure.MassFlow.Symbol, figure.MassFlow.Words, f, m, "kg/s", place(m, fine), "")
}

// felt is by how much more or less flows than a meter by differential pressure shows.
func (p *page) felt(rho term) term {
	at := p.load.Stream.CalibratedAt
	design := p.given("ρ0", "density that the meter is calibrated at", at, "kg/m3", place(at, fine), "site file; ISO 5167-1:2003, 5.1")
	if p.load.Stream.FlowKind == unit.VolumeFlow {
		return design.over(rho).root()
	}
	return rho.over(design).root()
}

// corrected writes what the corrections do to the duty by flow and temperatures.
func (p *page) corrected(q term) term {
	s, b := p.load.Stream, p.Basis.Stream
	more, less := term.plus, term.minus
	if !s.Gives {
		more, less = less, more
	}
	f := q
	if pump, ok := p.at["pump"]; ok {
		f = more(f, pump)
	}
	if s.Stored > 0 {
		rise := p.rise()
		C := p.given("C", "heat capacity between the thermometers", s.Stored/1e3, "kJ/K", place(s.Stored/1e3, fine), "stored of the site file")
		p.at["C"] = C
		stored := s.Stored * b.Rise / 1e3
		p.at["stored"] = p.worked("Qst", "what this stores", C.times(rise), stored, "kW", place(b.Duty/1e3, fine-1), "")
		f = less(f, p.at["stored"])
	}
	return p.worked(figure.Duty.Symbol, figure.Duty.Words, f, b.Duty/1e3, "kW", place(b.Duty/1e3, fine-1), "")
}

// rise writes how fast the mean of the thermometers rises.
func (p *page) rise() term {
	b := p.Basis.Stream
	var ends []term
	for _, end := range []struct {
		symbol, words string
		loads.Rate
	}{{"dT1", "inlet", b.InletRate}, {"dT2", "outlet", b.OutletRate}} {
		if end.Points > 0 {
			ends = append(ends, p.slope(end.symbol, "rise of the "+end.words, end.Rate))
		}
	}
	f := sum(ends).over(number(2))
	return p.worked("dT", "mean rise, an end at a constant temperature being still", f, b.Rise, "K/s", 12, "")
}

// slope writes a slope through readings.
func (p *page) slope(symbol, words string, r loads.Rate) term {
	words = fmt.Sprintf("%s, by %d points over %s s", words, r.Points, fixed(r.Span, 3))
	return p.given(symbol, words, r.Slope, "K/s", max(0, place(r.Slope, fine)), "least squares")
}
