package main

import "math"

// handResult is the calculation as --json prints it.
type handResult struct {
	Fluid         string   `json:"fluid"`
	Duty          float64  `json:"duty_W"`
	MassFlow      float64  `json:"mass_flow_kg_per_s"`
	MeanCp        float64  `json:"mean_cp_J_per_kg_K"`
	InletT        float64  `json:"inlet_temperature_K"`
	OutletT       float64  `json:"outlet_temperature_K"`
	InletP        float64  `json:"inlet_pressure_Pa"`
	OutletP       float64  `json:"outlet_pressure_Pa"`
	InletH        float64  `json:"inlet_enthalpy_J_per_kg"`
	OutletH       float64  `json:"outlet_enthalpy_J_per_kg"`
	InletDensity  float64  `json:"inlet_density_kg_per_m3"`
	OutletDensity float64  `json:"outlet_density_kg_per_m3"`
	MeterDensity  float64  `json:"meter_density_kg_per_m3"`
	CpU           float64  `json:"cp_relative_uncertainty"`
	DensityU      float64  `json:"density_relative_uncertainty"`
	FluidU        float64  `json:"fluid_uncertainty_W"` // standard
	Source        string   `json:"source"`
	Notes         []string `json:"notes,omitempty"`
}

func (h *hand) result() handResult {
	cp, density, both := h.share()
	x, r := h.state, h.Result
	return handResult{
		Fluid: h.fluid.Name(), Duty: r.Duty, MassFlow: r.MassFlow, MeanCp: h.meanCp(),
		InletT: x.Inlet, OutletT: x.Outlet, InletP: x.Pressure, OutletP: x.OutletPressure,
		InletH: r.Inlet.Enthalpy, OutletH: r.Outlet.Enthalpy,
		InletDensity: r.Inlet.Density, OutletDensity: r.Outlet.Density, MeterDensity: r.Density,
		CpU: cp, DensityU: density, FluidU: math.Abs(r.Duty) * both, Source: h.fluid.Source(), Notes: h.notes,
	}
}
