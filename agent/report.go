package agent

import (
	"time"

	"heatreeve/agent/account"
	"heatreeve/store"
)

// Report is the heat of loads over periods. Its JSON is SI: heat in J, duty in W,
// times in s, instants as RFC 3339 with the offset of the local clock.
type Report struct {
	Site   string    `json:"site,omitempty"`
	Zone   string    `json:"zone"`
	By     string    `json:"by"`
	From   time.Time `json:"from"`
	To     time.Time `json:"to"`
	Demand float64   `json:"demand_window_s,omitempty"`
	// Accounted is how far event time has come in the history.
	Accounted time.Time    `json:"accounted_to"`
	Loads     []LoadReport `json:"loads"`
	Notes     []string     `json:"notes,omitempty"`
	// Unused is how many records cannot be used, and are missing.
	Unused int `json:"records_not_used,omitempty"`
}

// LoadReport is one load of a [Report].
type LoadReport struct {
	Load string `json:"load"`
	// Begins is the load's first record, where it lies after the report's beginning.
	// Periods before it are left out, but are missing in the total.
	Begins  *time.Time     `json:"begins,omitempty"`
	Periods []PeriodReport `json:"periods"`
	Total   PeriodReport   `json:"total"`
	// Register is there where the report goes as far as the history does.
	Register *Register `json:"register,omitempty"`
}

// PeriodReport is one [account.Period]. What is null has no measured time to be
// made of.
type PeriodReport struct {
	Start         time.Time `json:"start"` // of the whole period
	End           time.Time `json:"end"`
	AccountedFrom time.Time `json:"accounted_from"` // of the part that the figures are for
	AccountedTo   time.Time `json:"accounted_to"`
	Given         float64   `json:"given_J"`
	Taken         float64   `json:"taken_J"`
	Uncertainty   float64   `json:"uncertainty_J"` // standard, of the one less the other
	Measured      float64   `json:"measured_s"`
	Bridged       float64   `json:"bridged_s"`
	Missing       float64   `json:"missing_s"`
	Coverage      float64   `json:"coverage"`
	Mean          *float64  `json:"mean_duty_W"`
	MeanU         *float64  `json:"mean_duty_uncertainty_W"` // standard
	Lowest        *Extreme  `json:"lowest"`
	Highest       *Extreme  `json:"highest"`
	Demand        *Demand   `json:"demand,omitempty"`
}

// Extreme is the least or the greatest figure of the duty, and the minute or the hour
// that holds it.
type Extreme struct {
	Duty  float64   `json:"duty_W"`
	Start time.Time `json:"start"`
	End   time.Time `json:"end"`
}

// Demand is what [account.Demand] tells.
type Demand struct {
	Windows int   `json:"windows"`
	Full    int   `json:"windows_covered_throughout"`
	Peak    *Peak `json:"peak"`
}

// Peak is the window of the greatest demand.
type Peak struct {
	Duty     float64   `json:"duty_W"`
	Start    time.Time `json:"start"`
	End      time.Time `json:"end"`
	Coverage float64   `json:"coverage"`
}

// Register is the total of a load since it was first accounted for.
type Register struct {
	Given    float64 `json:"given_J"`
	Taken    float64 `json:"taken_J"`
	Measured float64 `json:"measured_s"`
	Missing  float64 `json:"missing_s"`
}

func registerOf(r store.Register) *Register {
	return &Register{r.Given, r.Taken, r.Measured, r.Missing}
}

// periodReport tells p by the clock of the plan's zone.
func periodReport(p *account.Period, plan *account.Plan) PeriodReport {
	at := func(ns int64) time.Time { return time.Unix(0, ns).In(plan.Zone) }
	r := PeriodReport{
		Start: at(p.Start), End: at(p.End), AccountedFrom: at(p.From), AccountedTo: at(p.To),
		Given: p.Given, Taken: p.Taken, Uncertainty: p.Uncertainty,
		Measured: seconds(p.Measured), Bridged: seconds(p.Bridged), Missing: seconds(p.Missing), Coverage: p.Coverage(),
	}
	if p.Covered() {
		mean, u := p.Mean()
		r.Mean, r.MeanU = &mean, &u
		r.Lowest = &Extreme{p.Lowest.Duty, at(p.Lowest.Start), at(p.Lowest.End)}
		r.Highest = &Extreme{p.Highest.Duty, at(p.Highest.Start), at(p.Highest.End)}
	}
	if d := p.Demand; plan.Demand != 0 {
		r.Demand = &Demand{Windows: d.Windows, Full: d.Full}
		if d.PeakEnd > d.PeakStart {
			r.Demand.Peak = &Peak{d.Peak, at(d.PeakStart), at(d.PeakEnd), d.PeakCoverage}
		}
	}
	return r
}
