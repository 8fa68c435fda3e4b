package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// Tables keep within 100 columns whatever is asked for, the first with the least.
func TestReportTable(t *testing.T) {
	data := keep(t)
	for _, tt := range []struct {
		args string
		want []string
	}{
		{"--from 2026-10-25 --to 2026-10-26 --load dryer-air --by hour --shares", []string{
			"Brackwater Creamery", "dryer-air, 2026-10-25 00:00 +01:00 to 2026-10-26 00:00 +00:00, Europe/Dublin",
			"2026-10-25 01:00 +01:00 ", "2026-10-25 01:00 +00:00 ", "0 %  1:00:00", "\ntotal ", "Highest: the highest figure", "flow 64 %, outlet 36 %", "Shares: "}},
		{"--from 2026-10-24T06:30 --by day", []string{
			"hot-water, ", "chilled-glycol, ", "dryer-air, ", "2026-10-24 +01:00*", "2026-10-25 +01:00 ", "2026-10-27 +00:00*",
			"* in part: 2026-10-24 06:30 +01:00 to 2026-10-25 00:00 +01:00", "* in part: 2026-10-27 00:00 +00:00 to 2026-10-27 07:00 +00:00",
			"Registers at the last commit: 0 MWh given, 0 MWh taken.", "Peak: heat over time of the highest 15 min"}},
		{"--from 2026-10 --to 2027-01 --by month --demand 1h", []string{"2026-10 +01:00*", "10-24 ", "The first record is of 2026-10-24 00:00 +01:00",
			"The history is accounted for up to 2026-10-27 07:00 +00:00."}},
		{"--from 2026-10-24 --by day --demand none", []string{"Highest: the highest figure"}},
		{"--from 2026-10-24 --by hour --demand 5m --zone Asia/Kolkata", []string{"2026-10-24 04:00 +05:30 ", "  0:30:00  ", "2026-10-27 12:00 +05:30*", "Asia/Kolkata"}},
	} {
		status, out, errs := report(t, append([]string{"--data", data}, strings.Fields(tt.args)...)...)
		if status != exitGood || errs != "" {
			t.Errorf("%s: status %d, %s", tt.args, status, errs)
		}
		for _, want := range append(tt.want, "no billing meter") {
			if !strings.Contains(out, want) {
				t.Errorf("%s: %q is not in\n%s", tt.args, want, out)
			}
		}
		for line := range strings.Lines(out) {
			if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > 100 {
				t.Errorf("%s: %d columns: %s", tt.args, n, line)
			}
		}
	}
}

// rich is a report of one load with all that there may be to tell.
func rich(by string, demand float64) *answer.Report {
	zone := time.FixedZone("", 3600)
	at := func(hours int) time.Time { return time.Date(2026, 10, 24, hours, 0, 0, 0, zone) }
	period := func(from, to int) answer.PeriodReport {
		mean, u := 480e3, 4e3
		p := answer.PeriodReport{
			Start: at(from), End: at(to), AccountedFrom: at(from), AccountedTo: at(to),
			Given: 1.08e11, Taken: 3.6e9, BridgedGiven: 7.2e9, Uncertainty: 1.8e9, Systematic: 1.799e9, Random: 6e7, Expanded: 3.6e9,
			Shares:   []answer.Share{{Part: "outlet pressure", Fraction: 0.62}, {Part: "heat capacity", Fraction: 0.3}, {Part: "matched pair", Fraction: 0.05}, {Part: "random", Fraction: 0.005}},
			Measured: 80000, Bridged: 6000, Missing: 400, Latent: 7300, Uncertain: 4321, Coverage: 0.92, Mean: &mean, MeanU: &u,
			Lowest: &answer.Extreme{Duty: 1e3, Start: at(from), End: at(from + 1)}, Highest: &answer.Extreme{Duty: 6e5, Start: at(from), End: at(from + 1)},
			Witness: &answer.Witness{Counted: 1.008e11, Served: 1.0206e11, Deviation: 0.0125},
		}
		if demand != 0 {
			p.Demand = &answer.Demand{Windows: 96, Full: 80, Peak: &answer.Peak{Duty: 5.8e5, Start: at(from).UTC(), End: at(from + 1), Coverage: 0.987}}
		}
		return p
	}
	l := answer.LoadReport{Load: "coil", Periods: []answer.PeriodReport{period(0, 24), period(24, 48)}, Total: period(0, 48), Register: &answer.Register{Given: 5e11, Bridged: 12000, BridgedGiven: 1.44e10}}
	start, end := at(5), at(7)
	events := []answer.Event{
		{At: start, Until: &start, Kind: "started", Text: "heatreeve 1.0"},
		{At: start, Until: &end, Kind: "disk", Text: "the disk took nothing: " + strings.Repeat("no room ", 20)},
		{At: end, Kind: "silent", Subject: "TT-1", Text: "no reading"},
	}
	return &answer.Report{Zone: "Etc/GMT-1", By: by, From: at(0), To: at(48), Accounted: at(48), Demand: demand, Factor: 2, Loads: []answer.LoadReport{l}, Events: events}
}

// What is bridged or latent, a witness and the shares have their place, within 100 columns.
func TestReportTableOfAllThereIs(t *testing.T) {
	for _, by := range []string{"hour", "day", "month"} {
		for _, demand := range []float64{0, 900} {
			var b strings.Builder
			if err := reportTable(&b, rich(by, demand), details{shares: true}); err != nil {
				t.Fatal(err)
			}
			text := regexp.MustCompile(` +`).ReplaceAllString(b.String(), " ")
			for _, want := range []string{
				"\n bridged 1:40:00 2.0 0\n", "\n latent 2:01:40\n", "\n uncertain 1:12:01\n", " 30.0 1.0 1.0 92.0 % 0:06:40 480.0 ",
				" counted served deviation\n MWh MWh\n", " 28.0 28.4 +1.25 %\n", "\nuncertainty ±2u systematic random shares\n",
				" 1.00 1.00 0.03 outlet pressure 62 %, heat capacity 30 %\n", "; bridged 4.0 MWh given, 0 MWh taken.", "\nBridged: ", "\nLatent: ", "\nUncertain: ", "\nWitness: ", "\nShares: ",
				"\nWhat happened:\n 2026-10-24 05:00 +01:00, started: heatreeve 1.0\n 2026-10-24 05:00 +01:00 to 2026-10-24 07:00 +01:00, disk: the disk took", "\n 2026-10-24 07:00 +01:00 on, silent of TT-1: no reading\n",
			} {
				if !strings.Contains(text, want) {
					t.Errorf("by %s: %q is not in\n%s", by, want, b.String())
				}
			}
			for line := range strings.Lines(b.String()) {
				if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > 100 {
					t.Errorf("by %s, demand %g: %d columns: %s", by, demand, n, line)
				}
			}
		}
	}
	var b strings.Builder
	if err := reportTable(&b, rich("day", 900), details{}); err != nil || strings.Contains(b.String(), "systematic") {
		t.Errorf("shares that are not asked for: %v\n%s", err, b.String())
	}
}

// The csv tells the same, with a column a share where they are asked for.
func TestReportCSVOfAllThereIs(t *testing.T) {
	var b strings.Builder
	if err := rich("day", 900).CSV(&b, true); err != nil {
		t.Fatal(err)
	}
	records, err := csv.NewReader(strings.NewReader(b.String())).ReadAll()
	if err != nil || len(records) != 3 {
		t.Fatalf("%d records, %v", len(records), err)
	}
	for name, want := range map[string]string{
		"given_kWh": "30000", "bridged_given_kWh": "2000", "bridged_taken_kWh": "0", "bridged_s": "6000", "latent_s": "7300", "uncertain_s": "4321",
		"expanded_uncertainty_kWh": "1000", "systematic_expanded_uncertainty_kWh": "999.4444444444445", "random_expanded_uncertainty_kWh": "33.333333333333336",
		"witness_counted_kWh": "28000", "witness_served_kWh": "28350", "witness_deviation": "0.0125",
		"share_outlet_pressure": "0.62", "share_heat_capacity": "0.3", "share_random": "0.005", "share_flow": "0", "share_not_told_apart": "0",
	} {
		if i := slices.Index(records[0], name); i < 0 || records[1][i] != want {
			t.Errorf("%s: column %d of %q, want %s", name, i, records[1], want)
		}
	}
}

// The csv has a record a period under its header, ends its lines as RFC 4180 says, and
// adds up to the total that json tells.
func TestReportCSVAgainstJSON(t *testing.T) {
	data := keep(t)
	args := []string{"--data", data, "--from", "2026-10-24", "--by", "hour", "--demand", "30m", "--format"}
	status, text, errs := report(t, append(args, "csv")...)
	if status != exitGood || strings.Count(text, "\r\n") != strings.Count(text, "\n") {
		t.Fatalf("status %d, %s, %q", status, errs, text)
	}
	records, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	_, asJSON, _ := report(t, append(args, "json")...)
	var r answer.Report
	if err := json.Unmarshal([]byte(asJSON), &r); err != nil {
		t.Fatal(err)
	}
	if len(records) != 1+4*80 || len(r.Loads) != 4 {
		t.Fatalf("%d lines, %d loads; want a header and 80 hours of 4 loads", len(records), len(r.Loads))
	}
	column := func(name string) int {
		i := slices.Index(records[0], name)
		if i < 0 {
			t.Fatalf("no column %q in %q", name, records[0])
		}
		return i
	}
	for _, l := range r.Loads {
		expanded := 0.0
		for _, p := range l.Periods {
			expanded += 2 * p.Uncertainty
		}
		if expanded <= 2*l.Total.Uncertainty {
			t.Errorf("%s: the uncertainties of the hours add up to %g J, that of the whole is %g J", l.Load, expanded, 2*l.Total.Uncertainty)
		}
		for name, want := range map[string]float64{
			"given_kWh": l.Total.Given / 3.6e6, "taken_kWh": l.Total.Taken / 3.6e6, "expanded_uncertainty_kWh": expanded / 3.6e6, // no sum of a total: what is random averages out
			"measured_s": l.Total.Measured, "missing_s": l.Total.Missing, "bridged_s": 0,
			"demand_windows": float64(l.Total.Demand.Windows), "demand_windows_covered_throughout": float64(l.Total.Demand.Full),
		} {
			sum := 0.0
			for _, record := range records[1:] {
				if record[0] == l.Load {
					x, err := strconv.ParseFloat(record[column(name)], 64)
					if err != nil {
						t.Fatal(err)
					}
					sum += x
				}
			}
			if math.Abs(sum-want) > 1e-12*math.Abs(want) {
				t.Errorf("%s: %s adds up to %v, the total is %v", l.Load, name, sum, want)
			}
		}
		if all := l.Total.Measured + l.Total.Missing; all != keptMinutes*60 {
			t.Errorf("%s: %g s measured and missing, want %d", l.Load, all, keptMinutes*60)
		}
	}
	empty := records[slices.IndexFunc(records, func(f []string) bool { return f[0] == "dryer-air" && f[column("coverage")] == "0" })]
	for _, name := range []string{"mean_duty_kW", "lowest_start", "highest_duty_kW", "peak_demand_kW", "peak_demand_coverage"} {
		if empty[column(name)] != "" {
			t.Errorf("an hour without a record has %s %q", name, empty[column(name)])
		}
	}
}

// What a report has to note goes to stderr where its form has no room for it, and one that
// leaves out records ends with status 1.
func TestReportTellsItsNotes(t *testing.T) {
	data := keep(t)
	db, err := store.Open(filepath.Join(data, agent.HistoryFile), store.Options{MaxAge: 24 * time.Hour})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	end := keptFrom.Add(keptMinutes * time.Minute)
	if _, err := db.Trim(end.UnixNano()); err != nil {
		t.Fatal(err)
	}
	tell := func(wantStatus int, want string) {
		t.Helper()
		if err := db.Close(); err != nil {
			t.Fatal(err)
		}
		args := []string{"--data", data, "--from", "2026-10-24", "--zone", "Asia/Kolkata", "--load", "hot-water", "--format"}
		for _, format := range []string{"csv", "table", "json"} {
			status, out, errs := report(t, append(args, format)...)
			place := out
			if format == "csv" {
				place = errs
			}
			if status != wantStatus || !strings.Contains(strings.Join(strings.Fields(place), " "), want) || (errs != "") != (format == "csv" || wantStatus != exitGood) || strings.Count(out, "\n") < 4 {
				t.Errorf("%s: status %d, %q, %s", format, status, errs, out)
			}
		}
	}
	tell(exitGood, "hot-water: of 2 hours by UTC that reach over the end of a local day")
	if db, err = store.Open(filepath.Join(data, agent.HistoryFile), store.Options{}); err != nil {
		t.Fatal(err)
	}
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	wrong := store.Minute{Load: ids["hot-water"], Start: end.Add(-time.Minute).UnixNano(), Measured: 60, Given: -1e12}
	if err := db.Commit(store.Batch{Minutes: []store.Minute{wrong}}); err != nil {
		t.Fatal(err)
	}
	tell(exitFailed, "hot-water: 1 records cannot be used and are missing")
}

// A name that begins like a formula has an apostrophe before it in csv.
func TestReportCSVHasNoFormulas(t *testing.T) {
	for name, want := range map[string]string{"hot-water": "hot-water", "=1+1": "'=1+1", "+a": "'+a", "-a": "'-a", "@a": "'@a", "\ta": "'\ta", "＝a": "'＝a", "a=1,b": "a=1,b"} {
		var b strings.Builder
		if err := (&answer.Report{Loads: []answer.LoadReport{{Load: name, Periods: make([]answer.PeriodReport, 1)}}}).CSV(&b, false); err != nil {
			t.Fatal(err)
		}
		records, err := csv.NewReader(strings.NewReader(b.String())).ReadAll()
		if err != nil || records[1][0] != want {
			t.Errorf("%q: %q, %v", name, records[1][0], err)
		}
	}
}

func TestReportRefusals(t *testing.T) {
	data, dir := keep(t), t.TempDir()
	example := "../../../configs/brackwater-creamery.yaml"
	for _, tt := range []struct {
		args   string
		status int
		err    string
	}{
		{"", exitWrong, "--data and --from must be given"},
		{"--data " + data, exitWrong, "--data and --from must be given"},
		{"--data " + data + " --from 2026-10-24 extra", exitWrong, `unexpected "extra"`},
		{"--data " + data + " --from 24.10.2026", exitWrong, `heatreeve report: --from "24.10.2026" is no date; write 2026-12-31`},
		{"--data " + data + " --from 2026-10-25T01:30", exitWrong, `comes twice by the clock of Europe/Dublin, which goes back then; write 2026-10-25T01:30+01:00 or`},
		{"--data " + data + " --from 2026-10-24 --to 2026-10-24", exitWrong, "--to 2026-10-24 is not after from 2026-10-24"},
		{"--data " + data + " --from 2026-10-24 --by week", exitWrong, `--by "week": allowed are hour, day, month`},
		{"--data " + data + " --from 2026-10-24 --demand 7m", exitWrong, "--demand 7m0s: allowed are 5m"},
		{"--data " + data + " --from 2026-10-24 --demand -1ns", exitWrong, "--demand -1ns: allowed are 5m"},
		{"--data " + data + " --from 2026-10-24 --demand soon", exitWrong, `--demand "soon" is no length of time`},
		{"--data " + data + " --from 2026-10-24 --format xml", exitWrong, `--format "xml": allowed are table, csv, json`},
		{"--data " + data + " --from 2026-10-24 --zone Dublin", exitWrong, `--zone "Dublin" is not known`},
		{"--data " + data + " --from 2026-10-24 --load hot-watre", exitWrong, `--load "hot-watre" is not in the history; did you mean "hot-water"?`},
		{"--data " + data + " --from 2026-10-24 --load x", exitWrong, "there are: hot-water, chilled-glycol, dryer-air, milk"},
		{"--data " + data + " --from 2026-12-01", exitFailed, "the history holds no record of hot-water, chilled-glycol, dryer-air, milk from 2026-12-01 00:00 +00:00"},
		{"--data " + data + " --from 2026-01-01 --to 2026-02-01", exitFailed, "it goes up to 2026-10-27 07:00 +00:00"},
		{"--data " + data + " --from 2026-10-24 --site nowhere.yaml", exitWrong, "nowhere.yaml"},
		{"--data " + data + " --from 2026-10-24 --site " + example, exitGood, ""},
		{"--data " + dir + " --from 2026-10-24", exitFailed, "no history in"},
		{"--data " + dir + "/nowhere --from 2026-10-24", exitFailed, "nowhere"},
	} {
		status, out, errs := report(t, strings.Fields(tt.args)...)
		if status != tt.status || !strings.Contains(errs, tt.err) || (status == exitGood) != (out != "") {
			t.Errorf("%s: status %d, said %q, printed %q; want %d, ...%q...", tt.args, status, errs, out, tt.status, tt.err)
		}
	}
	db, err := store.Open(filepath.Join(data, agent.HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	if status, _, errs := report(t, "--data", data, "--from", "2026-10-24"); status != exitFailed || !strings.Contains(errs, "file is locked") || !strings.Contains(errs, "on a copy of the file") {
		t.Errorf("a file that another program has open: status %d, %s", status, errs)
	}
}

// The keys that the README tells of the report's JSON are those that it has.
func TestReadmeNamesTheReportKeys(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "The keys of its JSON: ")
	list, _, closed := strings.Cut(rest, "\n\n")
	if !ok || !closed {
		t.Fatal("the README does not tell the keys of a report")
	}
	status, text, errs := report(t, "--data", keep(t), "--from", "2026-10-23T22:00Z", "--demand", "15m", "--format", "json")
	if status != exitGood {
		t.Fatal(errs)
	}
	var any map[string]any
	if err := json.Unmarshal([]byte(text), &any); err != nil {
		t.Fatal(err)
	}
	have := map[string]bool{"notes": true, "records_not_used": true} // of a damaged history
	gather(have, any)
	for _, part := range []interface{}{answer.Report{Events: []answer.Event{{}}}, answer.PeriodReport{Witness: new(answer.Witness)}} {
		told, err := json.Marshal(part)
		if err != nil || json.Unmarshal(told, &any) != nil {
			t.Fatal(err)
		}
		gather(have, any)
	}
	for key := range have {
		if !strings.Contains(list, "`"+key+"`") {
			t.Errorf("the README does not tell of %q", key)
		}
	}
	for i, key := range strings.Split(list, "`") {
		if i%2 == 1 && !have[key] {
			t.Errorf("the README tells of %q, which is not in the report", key)
		}
	}
}

func gather(keys map[string]bool, v any) {
	switch v := v.(type) {
	case map[string]any:
		for key, x := range v {
			keys[key] = true
			gather(keys, x)
		}
	case []any:
		for _, x := range v {
			gather(keys, x)
		}
	}
}

// What happened is on stderr where the report is csv.
func TestReportCSVTellsEvents(t *testing.T) {
	var b strings.Builder
	if err := tellReport(&b, rich("day", 0), "csv"); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		"event: 2026-10-24 05:00 +01:00, started: heatreeve 1.0\n",
		"event: 2026-10-24 07:00 +01:00 on, silent of TT-1: no reading\n",
	} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("%q is not in\n%s", want, b.String())
		}
	}
}
