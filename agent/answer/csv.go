package answer

import (
	"encoding/csv"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"
	"time"
)

var reportHeader = []string{
	"load", "start", "end", "accounted_from", "accounted_to",
	"given_kWh", "taken_kWh", "expanded_uncertainty_kWh",
	"measured_s", "bridged_s", "missing_s", "coverage",
	"mean_duty_kW", "mean_duty_expanded_uncertainty_kW",
	"lowest_duty_kW", "lowest_start", "lowest_end", "highest_duty_kW", "highest_start", "highest_end",
	"peak_demand_kW", "peak_demand_start", "peak_demand_end", "peak_demand_coverage",
	"demand_windows", "demand_windows_covered_throughout",
	"bridged_given_kWh", "bridged_taken_kWh", "latent_s", "uncertain_s",
	"systematic_expanded_uncertainty_kWh", "random_expanded_uncertainty_kWh",
	"witness_counted_kWh", "witness_served_kWh", "witness_deviation",
}

// shareColumn names the column of a share of the variance.
func shareColumn(part string) string { return "share_" + strings.ReplaceAll(part, " ", "_") }

// CSV writes a line a period and load (RFC 4180), heat in kWh, duty in kW, with the shares of
// the variance where they are asked for. What there is none of is an empty field.
func (r *Report) CSV(w io.Writer, withShares bool) error {
	c := csv.NewWriter(w)
	c.UseCRLF = true
	header := slices.Clone(reportHeader)
	if withShares {
		for _, part := range ShareNames() {
			header = append(header, shareColumn(part))
		}
	}
	if err := c.Write(header); err != nil {
		return err
	}
	for i := range r.Loads {
		for k := range r.Loads[i].Periods {
			p := &r.Loads[i].Periods[k]
			record := reportRecord(r.Loads[i].Load, p)
			if withShares {
				record = append(record, shareFields(p.Shares)...)
			}
			if err := c.Write(record); err != nil {
				return err
			}
		}
	}
	c.Flush()
	if err := c.Error(); err != nil {
		return fmt.Errorf("write csv: %w", err)
	}
	return nil
}

func reportRecord(load string, p *PeriodReport) []string {
	fields := []string{
		TextField(load), instantField(p.Start), instantField(p.End), instantField(p.AccountedFrom), instantField(p.AccountedTo),
		energyField(p.Given), energyField(p.Taken), energyField(p.Expanded),
		field(p.Measured), field(p.Bridged), field(p.Missing), field(p.Coverage),
	}
	if p.Mean == nil {
		fields = append(fields, make([]string, 8)...)
	} else {
		fields = append(fields, field(*p.Mean/1e3), field(CoverageFactor**p.MeanU/1e3),
			field(p.Lowest.Duty/1e3), instantField(p.Lowest.Start), instantField(p.Lowest.End),
			field(p.Highest.Duty/1e3), instantField(p.Highest.Start), instantField(p.Highest.End))
	}
	fields = append(append(fields, demandFields(p.Demand)...),
		energyField(p.BridgedGiven), energyField(p.BridgedTaken), field(p.Latent), field(p.Uncertain),
		energyField(CoverageFactor*p.Systematic), energyField(CoverageFactor*p.Random))
	if p.Witness == nil {
		return append(fields, "", "", "")
	}
	return append(fields, energyField(p.Witness.Counted), energyField(p.Witness.Served), field(p.Witness.Deviation))
}

// shareFields has the fraction of each part that there may be.
func shareFields(all []Share) (fields []string) {
	for _, part := range ShareNames() {
		fraction := 0.0
		if i := slices.IndexFunc(all, func(s Share) bool { return s.Part == part }); i >= 0 {
			fraction = all[i].Fraction
		}
		fields = append(fields, field(fraction))
	}
	return fields
}

func demandFields(d *Demand) []string {
	if d == nil {
		return make([]string, 6)
	}
	var peak []string
	if k := d.Peak; k != nil {
		peak = []string{field(k.Duty / 1e3), instantField(k.Start), instantField(k.End), field(k.Coverage)}
	} else {
		peak = make([]string, 4)
	}
	return append(peak, strconv.Itoa(d.Windows), strconv.Itoa(d.Full))
}

// energyField shows J in kWh.
func energyField(joules float64) string { return field(joules / 3.6e6) }

// field shows a number with all its digits, and never with an exponent.
func field(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

// TextField shows a name so that no spreadsheet works it as a formula: quotes do not keep
// one from that, an apostrophe in front does (common practice, no source).
func TextField(name string) string {
	if name != "" && strings.ContainsRune("=+-@\t\r\n＝＋－＠", []rune(name)[0]) {
		return "'" + name
	}
	return name
}

func instantField(t time.Time) string { return t.Format("2006-01-02T15:04:05-07:00") }
