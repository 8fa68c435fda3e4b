package agent

import (
	"slices"
	"strings"

	"heatreeve/agent/loads"
	"heatreeve/store"
)

// hourColumns are those of a load's hours.
func hourColumns() []string {
	columns := []string{
		"start", "minutes", "measured_s", "missing_s", "given_J", "taken_J", "uncertainty_J",
		"duty_W", "lowest_duty_W", "highest_duty_W", "demand_W",
		"mass_kg", "inlet_K", "outlet_K", "pressure_Pa", "content_K",
		"bridged_s", "bridged_given_J", "bridged_taken_J", "latent_s", "uncertain_s", "witness_counted_J", "witness_served_J",
		"unparted_uncertainty_J", "random_variance_J2",
	}
	return slices.Concat(columns, systematicColumns(), expectedColumns())
}

// systematicColumns are those of the parts of an uncertainty.
func systematicColumns() (columns []string) {
	for p := range loads.Parts {
		columns = append(columns, "systematic_"+strings.ReplaceAll(p.String(), " ", "_")+"_J")
	}
	return columns
}

// hourRow leaves out the means of an hour in which nothing was measured, and temperatures
// and pressures that there are none of. The uncertainty is the standard one that a report
// tells of the same hour.
func hourRow(r *rows, h *store.Hour) {
	r.instant(h.Start, minuteTime)
	u := uncertainty(&h.Systematic, h.Random, h.Untold)
	for _, x := range [...]float64{float64(h.Minutes), h.Measured, h.Missing, h.Given, h.Taken, u.Standard()} {
		r.number(x)
	}
	for _, x := range [...]float64{h.Duty, h.DutyMin, h.DutyMax, h.Demand} {
		r.meanIf(h.Measured > 0, x)
	}
	r.number(h.Mass)
	for _, x := range [...]float64{h.Inlet, h.Outlet, h.Pressure, h.Content} {
		r.meanIf(h.Measured > 0 && x != 0, x)
	}
	for _, x := range [...]float64{h.Bridged, h.BridgedGiven, h.BridgedTaken, h.Latent, h.Uncertain, h.Witness, h.Compared, h.Untold, h.Random} {
		r.number(x)
	}
	for _, x := range h.Systematic[:loads.Parts] {
		r.number(x)
	}
	expectedRow(r, h.Expected, h.ExpectedError)
}
