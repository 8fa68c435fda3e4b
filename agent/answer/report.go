// Package answer has the shapes of what the agent answers: what may be asked of it, and its reports, events and
// warnings. Terminal, page and JSON interface have the same ones. Their JSON is SI: heat in J, duty in W, temperatures
// in K, times in s, instants as RFC 3339 with the offset of the local clock.
package answer

import "time"

// CoverageFactor is that of the uncertainties that are shown: about 95 % where many
// inputs make one up (JCGM 100:2008, 6.3.3).
const CoverageFactor = 2

// Report is the heat of loads over periods. Its JSON is SI: heat in J, duty in W,
// times in s, instants as RFC 3339 with the offset of the local clock.
type Report struct {
	Site   string    `json:"site,omitempty"`
	Zone   string    `json:"zone"`
	By     string    `json:"by"`
	From   time.Time `json:"from"`
	To     time.Time `json:"to"`
	Demand float64   `json:"demand_window_s,omitempty"`
	// Factor is that of every uncertainty called expanded.
	Factor float64 `json:"coverage_factor"`
	// Accounted is how far event time has come in the history.
	Accounted time.Time    `json:"accounted_to"`
	Loads     []LoadReport `json:"loads"`
	Notes     []string     `json:"notes,omitempty"`
	Events    []Event      `json:"events,omitempty"`
	// SiteFiles are those that were in force in this time, by when each began.
	SiteFiles []SiteFile `json:"site_files,omitempty"`
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
	Given         float64   `json:"given_J"` // measured
	Taken         float64   `json:"taken_J"`
	BridgedGiven  float64   `json:"bridged_given_J"`
	BridgedTaken  float64   `json:"bridged_taken_J"`
	// Uncertainty is the standard one of the one less the other, as measured, and
	// Systematic and Random what it is the root of the sum of squares of.
	Uncertainty float64  `json:"uncertainty_J"`
	Systematic  float64  `json:"systematic_uncertainty_J"`
	Random      float64  `json:"random_uncertainty_J"`
	Expanded    float64  `json:"expanded_uncertainty_J"`
	Shares      []Share  `json:"shares"` // largest first
	Measured    float64  `json:"measured_s"`
	Bridged     float64  `json:"bridged_s"`
	Missing     float64  `json:"missing_s"`
	Latent      float64  `json:"latent_s"`    // within measured
	Uncertain   float64  `json:"uncertain_s"` // within measured
	Coverage    float64  `json:"coverage"`
	Mean        *float64 `json:"mean_duty_W"`
	MeanU       *float64 `json:"mean_duty_uncertainty_W"` // standard
	Lowest      *Extreme `json:"lowest"`
	Highest     *Extreme `json:"highest"`
	Demand      *Demand  `json:"demand,omitempty"`
	Witness     *Witness `json:"witness,omitempty"`
}

// Share is what one part has in the uncertainty of a period.
type Share struct {
	Part        string  `json:"part"`
	Uncertainty float64 `json:"uncertainty_J"` // standard
	Fraction    float64 `json:"fraction"`      // of the variance
}

// Witness is what another meter counted, and the load's heat over the same time. It is
// there only where there is something to compare.
type Witness struct {
	Counted   float64 `json:"counted_J"`
	Served    float64 `json:"served_J"`
	Deviation float64 `json:"deviation"` // of the load from it, as a fraction of it
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

// Peak is the window of the greatest demand, or the hour that holds it where its minutes
// are not left; coverage is then the least that there can be.
type Peak struct {
	Duty     float64   `json:"duty_W"`
	Start    time.Time `json:"start"`
	End      time.Time `json:"end"`
	Coverage float64   `json:"coverage"`
}

// Register is the total of a load since it was first accounted for.
type Register struct {
	Given        float64 `json:"given_J"`
	Taken        float64 `json:"taken_J"`
	BridgedGiven float64 `json:"bridged_given_J"`
	BridgedTaken float64 `json:"bridged_taken_J"`
	Measured     float64 `json:"measured_s"`
	Bridged      float64 `json:"bridged_s"`
	Missing      float64 `json:"missing_s"`
	Uncertain    float64 `json:"uncertain_s"` // within measured
}

// SiteFile is one that was in force from an instant on.
type SiteFile struct {
	From   time.Time `json:"from"`
	SHA256 string    `json:"sha256"`
}

// ShortDigest is enough of the digest to tell files apart.
func (f *SiteFile) ShortDigest() string { return f.SHA256[:min(16, len(f.SHA256))] }

// Always tells that it was the first, before which there is no time.
func (f *SiteFile) Always() bool { return f.From.Unix() <= 0 }

// Minutes is the length of the demand windows in minutes.
func (r *Report) Minutes() float64 { return r.Demand / 60 }
