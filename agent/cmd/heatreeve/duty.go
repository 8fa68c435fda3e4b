package main

import (
	"context"
	"fmt"
	"math"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

const dutyHelp = `
The duty is m·(h(T2) − h(T1)), as the agent works it: positive where the stream
takes heat on its way from T1 to T2, negative where it gives heat.
`

// hand is one hand calculation: what was asked, and what came of it.
type hand struct {
	fluid  thermo.Fluid
	flow   unit.Quantity
	stream loads.Stream
	state  loads.State
	told   bool // where the meter sits was told, not taken for granted
	loads.Result
	notes []string
}

func runDuty(_ context.Context, c *call) error {
	flow := c.flags.String("flow", "", "flow `F`: a mass flow, a volume flow, or of a gas a normal or standard volume flow")
	from := c.flags.String("from", "", "temperature `T1` at the inlet, such as 80°C")
	to := c.flags.String("to", "", "temperature `T2` at the outlet")
	ps := pressureFlags(c.flags)
	outletPressure := c.flags.String("outlet-pressure", "", "pressure `P` at the outlet, where it is another than at the inlet")
	meterAt := c.flags.String("meter-at", "", "where a volume flow is metered, `inlet|outlet`: its density makes it a mass flow; inlet unless given")
	asJSON := c.flags.Bool("json", false, "print SI numbers as JSON")
	if err := c.parse(1, "the fluid, such as water or 'propylene glycol 32 %',"); err != nil {
		return err
	}
	f, err := c.fluid()
	if err != nil {
		return err
	}
	h := hand{fluid: f, told: *meterAt != ""}
	if err := c.readFlow(&h, *flow, *meterAt); err != nil {
		return err
	}
	if err := c.readEnds(&h, *from, *to, ps, *outletPressure); err != nil {
		return err
	}
	if err := h.work(); err != nil {
		return err
	}
	if *asJSON {
		return printJSON(c.stdout, h.result())
	}
	return h.tell(c.stdout)
}

var flowKinds = map[unit.Dimension]loads.FlowKind{
	unit.MassFlow: loads.MassFlow, unit.VolumeFlow: loads.VolumeFlow, unit.MolarFlow: loads.MolarFlow,
}

func (c *call) readFlow(h *hand, flow, meterAt string) (err error) {
	if h.flow, err = c.quantity("flow", flow, unit.MassFlow, unit.VolumeFlow, unit.MolarFlow); err != nil {
		return err
	}
	if h.flow.Value < 0 {
		return wrongf("heatreeve duty: --flow %v is below zero; swap --from and --to for a stream the other way", h.flow)
	}
	if err := site.FlowSuits(h.fluid, h.flow.Unit.Dimension); err != nil {
		return wrongf("heatreeve duty: --flow %v: %w", h.flow, err)
	}
	switch meterAt {
	case "", "inlet":
	case "outlet":
		if h.flow.Unit.Dimension != unit.VolumeFlow {
			return wrongf("heatreeve duty: --meter-at outlet is about a volume flow, and --flow %v is a %s, which is the same at either end", h.flow, h.flow.Unit.Dimension)
		}
		h.stream.MeterAtOutlet = true
	default:
		return wrongf("heatreeve duty: --meter-at %q is not known; allowed: inlet, outlet", meterAt)
	}
	h.stream.Fluid, h.stream.FlowKind = h.fluid, flowKinds[h.flow.Unit.Dimension]
	h.state.Flow = h.flow.SI()
	return nil
}

func (c *call) readEnds(h *hand, from, to string, ps pressures, outletPressure string) error {
	T1, err := c.quantity("from", from, unit.Temperature)
	if err != nil {
		return err
	}
	T2, err := c.quantity("to", to, unit.Temperature)
	if err != nil {
		return err
	}
	x := &h.state
	x.Inlet, x.Outlet = T1.SI(), T2.SI()
	if x.Pressure, err = c.absolute("pressure", *ps.at, ps.barometer); err != nil {
		return err
	}
	x.OutletPressure = x.Pressure
	if outletPressure != "" {
		x.OutletPressure, err = c.absolute("outlet-pressure", outletPressure, ps.barometer)
	}
	return err
}

// work is the agent's own equation. What the agent would not book, because it is too
// near to saturation, is worked all the same, with a note.
func (h *hand) work() error {
	h.stream.Margin = site.DefaultMargin(h.fluid)
	r, err := loads.Work(&h.stream, h.state)
	if err != nil {
		refused := err
		h.stream.Margin = math.Inf(-1)
		if r, err = loads.Work(&h.stream, h.state); err != nil {
			return h.refusal(err)
		}
		h.notes = append(h.notes, fmt.Sprintf("%v; the agent would not book it", refused))
	}
	if r.Duty == 0 {
		r.Duty = 0 // without a sign
	}
	h.Result = r
	if h.stream.FlowKind == loads.VolumeFlow && !h.told {
		h.notes = append(h.notes, fmt.Sprintf("the meter is taken to sit at the inlet; at the outlet the same flow would be %s kg/s (--meter-at outlet)",
			figures(h.state.Flow*r.Outlet.Density, 6)))
	}
	if r.Note != "" {
		h.notes = append(h.notes, r.Note)
	}
	return nil
}

func (h *hand) refusal(err error) error {
	p := h.state.Pressure
	if _, bad := h.fluid.At(h.state.Inlet, p); bad == nil {
		p = h.state.OutletPressure
	}
	return refusal(h.fluid, p, err)
}

// meanCp is Δh/ΔT in J/(kg K), between equal temperatures cp itself.
func (h *hand) meanCp() float64 {
	dT := h.state.Outlet - h.state.Inlet
	if dT == 0 {
		return h.Result.Inlet.Cp
	}
	return (h.Result.Outlet.Enthalpy - h.Result.Inlet.Enthalpy) / dT
}

// share is the relative standard uncertainty of the duty by the fluid alone, as the
// agent reckons it: that of cp, and of the density where it makes the mass flow.
func (h *hand) share() (cp, density, both float64) {
	x := h.state
	cpIn, rhoIn := h.fluid.Uncertainty(x.Inlet, x.Pressure)
	cpOut, rhoOut := h.fluid.Uncertainty(x.Outlet, x.OutletPressure)
	cp, density = max(cpIn, cpOut), rhoIn
	if h.stream.MeterAtOutlet {
		density = rhoOut
	}
	if h.stream.FlowKind != loads.VolumeFlow {
		return cp, density, cp
	}
	return cp, density, math.Hypot(cp, density)
}
