package account

import (
	"errors"
	"iter"
	"math"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/loads"
)

func wantError(t *testing.T, what string, err error, want string) {
	t.Helper()
	if err == nil || !strings.Contains(err.Error(), want) {
		t.Errorf("%s: error %v, want ...%q...", what, err, want)
	}
}

// all yields records that carry no error.
func all(records []Record) iter.Seq2[Record, error] {
	return func(yield func(Record, error) bool) {
		for _, r := range records {
			if !yield(r, nil) {
				return
			}
		}
	}
}

func collect(t interface{ Fatal(...any) }, p Plan, records []Record) []Period {
	if err := p.Check(); err != nil {
		t.Fatal(err)
	}
	var out []Period
	for x, err := range Periods(p, all(records)) {
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, x)
	}
	return out
}

// record is a minute of one duty, in the load's service, measured for some seconds.
func record(start int64, duty, uncertainty float64, seconds int64) Record {
	r := Record{Start: start, End: start + minute, Lowest: duty, Highest: duty}
	r.Measured, r.Served = seconds*int64(time.Second), duty*float64(seconds)
	r.Given, r.Taken = max(0, r.Served), max(0, -r.Served)
	r.Uncertainty.Unparted = uncertainty * float64(seconds)
	return r
}

func near(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if math.Abs(got-want) > relative*math.Abs(want) {
		t.Errorf("%s is %.17g, want %.17g", what, got, want)
	}
}

// A duty that rises by d each minute through the 25 hours of a day gives
// d·60 s·n(n−1)/2, its quarters rise with it, and its uncertainty, 1 % of it, does not
// average out.
func TestRampOverALongDay(t *testing.T) {
	zone, from := place(t, "Europe/Dublin"), at(t, "2026-10-25T00:00+01:00")
	const n, d = 1500, 400.0
	var records []Record
	for k := range int64(n) {
		records = append(records, record(from+k*minute, d*float64(k), 0.01*d*float64(k), 60))
	}
	day := collect(t, Plan{From: from, To: from + 25*hour, Through: from + 26*hour, By: Day, Zone: zone, Demand: 15 * time.Minute}, records)
	if len(day) != 1 {
		t.Fatalf("%d days, want 1", len(day))
	}
	p := day[0]
	want := d * 60 * n * (n - 1) / 2
	near(t, "heat given", p.Given, want, 1e-15)
	near(t, "heat served", p.Served, want, 1e-15)
	near(t, "uncertainty", p.Uncertainty.Standard(), 0.01*want, 1e-15)
	mean, u := p.Mean()
	near(t, "mean duty", mean, d*(n-1)/2, 1e-15)
	near(t, "its uncertainty", u, 0.01*d*(n-1)/2, 1e-15)
	if p.Measured != 25*hour || p.Missing != 0 || p.Taken != 0 || p.Coverage() != 1 || !whole(&p) {
		t.Errorf("a day all measured: %+v", p)
	}
	if p.Lowest != (Extreme{0, from, from + minute}) || p.Highest != (Extreme{d * (n - 1), from + (n-1)*minute, from + n*minute}) {
		t.Errorf("lowest %+v, highest %+v", p.Lowest, p.Highest)
	}
	near(t, "peak", p.Demand.Peak, d*(n-8), 1e-15) // the last quarter: the mean of n−15 to n−1
	if end := from + 25*hour; p.Demand.PeakEnd != end || p.Demand.PeakStart != end-hour/4 || p.Demand.Windows != 100 || p.Demand.Full != 100 || p.Demand.PeakCoverage != 1 {
		t.Errorf("demand %+v", p.Demand)
	}
}

// Steps with gaps: what is missing has no heat, and lowers the demand of its window
// but not the mean duty.
func TestStepsWithGaps(t *testing.T) {
	from := at(t, "2026-06-01T10:00Z")
	var records []Record
	for k := range int64(60) {
		switch {
		case k < 10: // nothing of it is there
		case k < 15:
			records = append(records, record(from+k*minute, 900e3, 9e3, 60))
		case k < 30:
			records = append(records, record(from+k*minute, 500e3, 5e3, 30))
		default:
			records = append(records, record(from+k*minute, -200e3, 2e3, 60))
		}
	}
	p := collect(t, Plan{From: from, To: from + hour, Through: from + hour, By: Hour, Zone: time.UTC, Demand: 15 * time.Minute}, records)[0]
	near(t, "heat given", p.Given, 900e3*300+500e3*450, 0)
	near(t, "heat taken", p.Taken, 200e3*1800, 0)
	near(t, "heat served", p.Served, p.Given-p.Taken, 1e-15)
	near(t, "uncertainty", p.Uncertainty.Standard(), 9e3*300+5e3*450+2e3*1800, 1e-15)
	if s := int64(time.Second); p.Measured != 2550*s || p.Missing != 1050*s || p.Bridged != 0 {
		t.Errorf("measured %d, missing %d", p.Measured/s, p.Missing/s)
	}
	mean, _ := p.Mean()
	near(t, "mean duty", mean, (900e3*300+500e3*450-200e3*1800)/2550, 1e-15)
	// 900 kW for a third of a quarter are 300 kW of demand, 500 kW for half of one 250 kW.
	near(t, "peak", p.Demand.Peak, 300e3, 1e-15)
	near(t, "its coverage", p.Demand.PeakCoverage, 1.0/3, 1e-15)
	if p.Demand.PeakStart != from || p.Demand.Windows != 4 || p.Demand.Full != 2 {
		t.Errorf("demand %+v", p.Demand)
	}
}

// The first and the last period are there in part, as asked and as far as event time
// has come; windows that are cut do not count.
func TestPeriodsInPart(t *testing.T) {
	zone := place(t, "Asia/Kolkata")
	from, to := at(t, "2026-06-01T10:20+05:30"), at(t, "2026-06-03T00:00+05:30")
	through := at(t, "2026-06-02T09:07+05:30") + 59*int64(time.Second)
	p := collect(t, Plan{From: from, To: to, Through: through, By: Day, Zone: zone, Demand: time.Hour}, []Record{record(from, 1, 0, 60)})
	if len(p) != 2 || p[0].From != from || whole(&p[0]) || p[1].To != at(t, "2026-06-02T09:07+05:30") || p[1].End != to || whole(&p[1]) {
		t.Fatalf("periods %+v", p)
	}
	if p[0].Demand.Windows != 13 || p[1].Demand.Windows != 9 || p[0].Demand.PeakEnd != 0 || p[0].Demand.Full != 0 {
		t.Errorf("windows %+v, %+v; want 13 and 9, and no peak of a window that is cut", p[0].Demand, p[1].Demand)
	}
	if p[0].Missing != p[0].To-p[0].From-minute || p[1].Missing != p[1].To-p[1].From || p[1].Begun() || p[1].Coverage() != 0 {
		t.Errorf("missing %v, %v", p[0].Missing, p[1].Missing)
	}
	if late := collect(t, Plan{From: to, To: to + hour, Through: through, By: Hour, Zone: zone}, nil); len(late) != 0 {
		t.Errorf("%d periods that event time has not come to", len(late))
	}
}

func TestWrongRecordsAreNotCounted(t *testing.T) {
	from := at(t, "2026-06-01T10:30Z")
	good := record(from+30*minute, 1e3, 0, 60)
	wrong := func(change func(*Record)) Record { r := good; change(&r); return r }
	gone := errors.New("gone")
	for _, tt := range []struct {
		record Record
		err    error
		want   string
	}{
		{wrong(func(r *Record) { r.Given = math.NaN() }), nil, "heat given is NaN"},
		{wrong(func(r *Record) { r.Taken = -1 }), nil, "heat taken is -1"},
		{wrong(func(r *Record) { r.Served = math.Inf(1) }), nil, "heat served is +Inf"},
		{wrong(func(r *Record) { r.Lowest = math.NaN() }), nil, "lowest duty is NaN"},
		{wrong(func(r *Record) { r.BridgedTaken = -1 }), nil, "bridged heat taken is -1"},
		{wrong(func(r *Record) { r.Uncertainty.Parts[loads.PartFlow] = math.NaN() }), nil, "uncertainty is NaN"},
		{wrong(func(r *Record) { r.Uncertainty.Variance = -1 }), nil, "random variance is -1"},
		{wrong(func(r *Record) { r.Uncertainty.Unparted = -1 }), nil, "uncertainty is -1"},
		{wrong(func(r *Record) { r.Witness = -1 }), nil, "heat of the witness is -1"},
		{wrong(func(r *Record) { r.Demand, r.HasDemand = math.Inf(-1), true }), nil, "demand is -Inf"},
		{wrong(func(r *Record) { r.Bridged = 1 }), nil, "1m0s measured and 1ns bridged of 1m0s"},
		{wrong(func(r *Record) { r.Latent = minute + 1 }), nil, "latent of 1m0s measured"},
		{wrong(func(r *Record) { r.Uncertain = minute + 1 }), nil, "uncertain of 1m0s measured"},
		{wrong(func(r *Record) { r.Measured, r.Bridged = math.MaxInt64, math.MaxInt64 }), nil, "bridged of 1m0s"},
		{wrong(func(r *Record) { r.Measured = 61 * int64(time.Second) }), nil, "1m1s measured"},
		{wrong(func(r *Record) { r.End = r.Start; r.Measured = 0 }), nil, "of 0s"},
		{wrong(func(r *Record) { r.Start -= hour; r.End -= hour }), nil, "is before"},
		{wrong(func(r *Record) { r.Start += 2 * hour; r.End += 2 * hour }), nil, "goes on after"},
		{wrong(func(r *Record) { r.End += hour }), nil, "where the hour ends"},
		{Record{}, gone, "gone"},
	} {
		plan := Plan{From: from, To: from + 2*hour, Through: from + 2*hour, By: Hour, Zone: time.UTC, Demand: 15 * time.Minute}
		records := func(yield func(Record, error) bool) { _ = yield(tt.record, tt.err) && yield(good, nil) }
		var faults []error
		var total Total
		for p, err := range Periods(plan, records) {
			if err != nil {
				faults = append(faults, err)
				continue
			}
			total.Add(p)
		}
		if len(faults) != 1 {
			t.Errorf("%d errors, want one: ...%q...", len(faults), tt.want)
			continue
		}
		wantError(t, "record", faults[0], tt.want)
		if p := total.Period(); p.Given != good.Given || p.Measured != minute || p.Demand.Windows != 8 {
			t.Errorf("beside a record with %q the good one gives %+v", tt.want, p)
		}
	}
}

func TestPlanCheck(t *testing.T) {
	good := Plan{From: 0, To: 1, By: Day, Zone: time.UTC}
	for _, tt := range []struct {
		change func(*Plan)
		want   string
	}{
		{func(p *Plan) { p.By = 9 }, "kind 9"},
		{func(p *Plan) { p.Demand = 7 * time.Minute }, "demand window of 7m0s"},
		{func(p *Plan) { p.To = 0 }, "not after its beginning"},
	} {
		p := good
		tt.change(&p)
		wantError(t, tt.want, p.Check(), tt.want)
	}
}

// whole tells whether all of a period is accounted for.
func whole(p *Period) bool { return p.From == p.Start && p.To == p.End }
