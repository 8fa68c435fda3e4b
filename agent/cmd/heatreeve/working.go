package main

import (
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"heatreeve/agent/loads"
	"heatreeve/thermo"
)

// tell writes the calculation line by line. The working carries one digit more than
// the uncertainty leaves, so that its lines can be checked by hand.
func (h *hand) tell(w io.Writer) error {
	x, r := h.state, h.Result
	fmt.Fprintf(w, "%s\n\n", wrapped(fmt.Sprintf("%s, %v, %s °C to %s °C; pressures are absolute", h.fluid.Name(), h.flow, celsius(x.Inlet), celsius(x.Outlet)), ""))
	n, rise := h.places(), (r.Outlet.Enthalpy-r.Inlet.Enthalpy)/1e3
	at := func(T, p float64) string {
		return fmt.Sprintf("%s °C = %s K, %s kPa:", celsius(T), figures(T, 6), figures(p/1e3, 6))
	}
	in, out := at(x.Inlet, x.Pressure), at(x.Outlet, x.OutletPressure)
	wide := max(utf8.RuneCountInString(in), utf8.RuneCountInString(out))
	fmt.Fprintf(w, "  inlet  %-*s %s\n", wide, in, h.holds(r.Inlet))
	fmt.Fprintf(w, "  outlet %-*s %s\n", wide, out, h.holds(r.Outlet))
	fmt.Fprintf(w, "  mass flow  %s\n", h.massFlow())
	fmt.Fprintf(w, "  duty       %s kg/s × (%s − %s) kJ/kg\n", figures(r.MassFlow, 6), decimals(r.Outlet.Enthalpy/1e3, n), subtrahend(decimals(r.Inlet.Enthalpy/1e3, n)))
	fmt.Fprintf(w, "             = %s kg/s × %s kJ/kg = %s kW\n", figures(r.MassFlow, 6), decimals(rise, n), h.kilowatts(r.Duty, 1))
	fmt.Fprintf(w, "  mean cp    %s\n\n", h.mean())
	if r.Duty == 0 {
		fmt.Fprint(w, "The stream neither gives heat nor takes it.\n")
	} else {
		h.conclude(w)
	}
	for _, note := range h.notes {
		fmt.Fprintln(w, wrapped("note: "+note, "  "))
	}
	_, err := fmt.Fprintln(w, wrapped("Source: "+h.fluid.Source(), ""))
	return err
}

// holds tells what a kilogram holds in a state, and how dense it is.
func (h *hand) holds(s thermo.Balance) string {
	return fmt.Sprintf("h = %s kJ/kg, ρ = %s kg/m3", decimals(s.Enthalpy/1e3, h.places()), figures(s.Density, 6))
}

// conclude tells the duty with what the fluid leaves open.
func (h *hand) conclude(w io.Writer) {
	verb := "takes"
	if h.Duty < 0 {
		verb = "gives"
	}
	cp, density, _ := h.share()
	parts := "cp to " + percent(2*cp)
	if h.stream.FlowKind == loads.VolumeFlow {
		parts += ", density to " + percent(2*density)
	}
	fmt.Fprintf(w, "The stream %s %s ± %s kW (%s).\n", verb, h.kilowatts(math.Abs(h.Duty), 0), h.kilowatts(h.fluidU(h.Duty), 0), parts)
	fmt.Fprint(w, "± is twice the standard uncertainty of the fluid's properties; that of the\ninstruments comes on top.\n")
}

// fluidU is the expanded uncertainty of x by the fluid, in the unit of x.
func (h *hand) fluidU(x float64) float64 {
	_, _, both := h.share()
	return 2 * both * math.Abs(x)
}

// places is how many decimals of kJ/kg the working has.
func (h *hand) places() int {
	rise := (h.Result.Outlet.Enthalpy - h.Result.Inlet.Enthalpy) / 1e3
	if rise == 0 {
		rise = h.Result.Inlet.Cp / 1e3
	}
	return meant(h.fluidU(rise)) + 1
}

// kilowatts shows W with as many digits as are meant, and more.
func (h *hand) kilowatts(watts float64, more int) string {
	return decimals(watts/1e3, meant(h.fluidU(h.Duty)/1e3)+more)
}

// massFlow tells how the flow becomes kg/s.
func (h *hand) massFlow() string {
	m := figures(h.MassFlow, 6) + " kg/s"
	si := figures(h.state.Flow, 6)
	switch h.stream.FlowKind {
	case loads.VolumeFlow:
		at := "inlet"
		if h.stream.MeterAtOutlet {
			at = "outlet"
		}
		return fmt.Sprintf("%v at the %s = %s m3/s\n             %s m3/s × %s kg/m3 = %s", h.flow, at, si, si, figures(h.Density, 6), m)
	case loads.MolarFlow:
		return fmt.Sprintf("%v = %s mol/s × %s kg/mol = %s", h.flow, si, figures(h.fluid.MolarMass(), 6), m)
	}
	if h.flow.Unit.Factor == 1 {
		return m
	}
	return fmt.Sprintf("%v = %s", h.flow, m)
}

func (h *hand) mean() string {
	rise, dT := (h.Result.Outlet.Enthalpy-h.Result.Inlet.Enthalpy)/1e3, h.state.Outlet-h.state.Inlet
	value := decimals(h.meanCp()/1e3, meant(h.fluidU(h.meanCp())/1e3)) + " kJ/(kg K)"
	if dT == 0 {
		return value + ", that of the one temperature"
	}
	return fmt.Sprintf("%s kJ/kg / %s K = %s", decimals(rise, h.places()), figures(dT, 6), value)
}

// subtrahend is a number behind a minus sign.
func subtrahend(s string) string {
	if strings.HasPrefix(s, "-") {
		return "(" + s + ")"
	}
	return s
}
