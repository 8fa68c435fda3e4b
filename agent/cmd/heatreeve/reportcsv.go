package main

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent"
)

var reportHeader = []string{
	"load", "start", "end", "accounted_from", "accounted_to",
	"given_kWh", "taken_kWh", "expanded_uncertainty_kWh",
	"measured_s", "bridged_s", "missing_s", "coverage",
	"mean_duty_kW", "mean_duty_expanded_uncertainty_kW",
	"lowest_duty_kW", "lowest_start", "lowest_end", "highest_duty_kW", "highest_start", "highest_end",
	"peak_demand_kW", "peak_demand_start", "peak_demand_end", "peak_demand_coverage",
	"demand_windows", "demand_windows_covered_throughout",
}

// reportCSV writes a line a period and load (RFC 4180). What there is none of is an
// empty field.
func reportCSV(w io.Writer, r *agent.Report) error {
	c := csv.NewWriter(w)
	c.UseCRLF = true
	if err := c.Write(reportHeader); err != nil {
		return err
	}
	for i := range r.Loads {
		for k := range r.Loads[i].Periods {
			if err := c.Write(reportRecord(r.Loads[i].Load, &r.Loads[i].Periods[k])); err != nil {
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

func reportRecord(load string, p *agent.PeriodReport) []string {
	fields := []string{
		textField(load), instantField(p.Start), instantField(p.End), instantField(p.AccountedFrom), instantField(p.AccountedTo),
		field(p.Given / 3.6e6), field(p.Taken / 3.6e6), field(2 * p.Uncertainty / 3.6e6),
		field(p.Measured), field(p.Bridged), field(p.Missing), field(p.Coverage),
	}
	if p.Mean == nil {
		fields = append(fields, make([]string, 8)...)
	} else {
		fields = append(fields, field(*p.Mean/1e3), field(2**p.MeanU/1e3),
			field(p.Lowest.Duty/1e3), instantField(p.Lowest.Start), instantField(p.Lowest.End),
			field(p.Highest.Duty/1e3), instantField(p.Highest.Start), instantField(p.Highest.End))
	}
	return append(fields, demandFields(p.Demand)...)
}

func demandFields(d *agent.Demand) []string {
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

// field shows a number with all its digits, and never with an exponent.
func field(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

// textField shows a name so that no spreadsheet works it as a formula: quotes do not keep
// one from that, an apostrophe in front does (common practice, no source).
func textField(name string) string {
	if name != "" && strings.ContainsRune("=+-@\t\r\n＝＋－＠", []rune(name)[0]) {
		return "'" + name
	}
	return name
}

func instantField(t time.Time) string { return t.Format("2006-01-02T15:04:05-07:00") }
