package account

import (
	"math"
	"math/big"
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"

	"heatreeve/agent/loads"
)

// history draws minutes of some days around a change of the clock, with gaps.
func history(t *rapid.T) (p Plan, records []Record) {
	zone := place(t, rapid.SampledFrom(zones).Draw(t, "zone"))
	from := rapid.SampledFrom([]string{"2026-03-07T12:00Z", "2026-03-27T22:00Z", "2026-04-03T00:00Z", "2026-10-02T09:00Z", "2026-10-23T20:00Z", "2026-10-30T12:00Z"}).Draw(t, "from")
	p = Plan{From: at(t, from) + rapid.Int64Range(0, 1500).Draw(t, "later")*minute, By: Hour, Zone: zone}
	p.To = p.From + rapid.Int64Range(1, 5*1440).Draw(t, "span")*minute
	p.Through = p.To + rapid.Int64Range(-2000, 10).Draw(t, "through")*minute
	p.Demand = rapid.SampledFrom(append(DemandLengths(), 0)).Draw(t, "demand")
	step := rapid.Int64Range(1, 40).Draw(t, "step")
	random := uint64(rapid.Uint32().Draw(t, "seed"))
	for x := p.From; x < p.Until(); x += minute {
		random = random*6364136223846793005 + 1442695040888963407 // Knuth's MMIX
		if a := int64(random >> 33); a%step < 3 {
			r := record(x, float64(a%2_000_003)-500e3, float64(a%9973), 1+a%60)
			r.Bridged, r.Latent, r.Uncertain = minute-r.Measured, r.Measured/3, r.Measured/7
			r.BridgedGiven, r.BridgedTaken = float64(a%1009), float64(a%1013)
			r.Uncertainty.Parts[loads.PartFlow], r.Uncertainty.Parts[loads.PartDensity] = float64(a%1999)-999, 1/float64(1+a%83)
			r.Uncertainty.Variance, r.Witness, r.Compared = float64(a%7919), float64(a%6007), float64(a%5003)-99
			records = append(records, r)
		}
	}
	return p, records
}

// exact adds without rounding.
func exact(records []Record, of func(*Record) float64) float64 {
	sum := new(big.Float).SetPrec(2000)
	for i := range records {
		sum.Add(sum, new(big.Float).SetFloat64(of(&records[i])))
	}
	out, _ := sum.Float64()
	return out
}

// Hours add up to days and days to months; times to the nanosecond, heats to the
// rounding of the last bits, and to what the records hold.
func TestAccountsOfAllKindsAgree(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p, records := history(t)
		totals := make(map[By]Period)
		for _, by := range Kinds() {
			p.By = by
			var total Total
			end := p.From
			for _, x := range collect(t, p, records) {
				if x.From != end || x.To <= x.From || x.Measured+x.Bridged+x.Missing != x.To-x.From || x.Missing < 0 {
					t.Fatalf("%v after %s: %+v", by, stamp(end), x)
				}
				end = x.To
				total.Add(x)
			}
			if end != max(p.From, p.Until()) {
				t.Fatalf("%v: ends at %s, want %s", by, stamp(end), stamp(p.Until()))
			}
			totals[by] = total.Period()
		}
		for _, by := range Kinds() {
			checkTotal(t, by, totals[by], totals[Month], records)
		}
	})
}

func checkTotal(t *rapid.T, by By, got, month Period, records []Record) {
	for _, f := range []struct {
		what string
		got  float64
		of   func(*Record) float64
	}{
		{"given", got.Given, func(r *Record) float64 { return r.Given }},
		{"taken", got.Taken, func(r *Record) float64 { return r.Taken }},
		{"served", got.Served, func(r *Record) float64 { return r.Served }},
		{"bridged heat given", got.BridgedGiven, func(r *Record) float64 { return r.BridgedGiven }},
		{"bridged heat taken", got.BridgedTaken, func(r *Record) float64 { return r.BridgedTaken }},
		{"flow's part", got.Uncertainty.Parts[loads.PartFlow], func(r *Record) float64 { return r.Uncertainty.Parts[loads.PartFlow] }},
		{"density's part", got.Uncertainty.Parts[loads.PartDensity], func(r *Record) float64 { return r.Uncertainty.Parts[loads.PartDensity] }},
		{"variance", got.Uncertainty.Variance, func(r *Record) float64 { return r.Uncertainty.Variance }},
		{"uncertainty without parts", got.Uncertainty.Unparted, func(r *Record) float64 { return r.Uncertainty.Unparted }},
		{"witness", got.Witness, func(r *Record) float64 { return r.Witness }},
		{"compared", got.Compared, func(r *Record) float64 { return r.Compared }},
	} {
		want := exact(records, f.of)
		scale := exact(records, func(r *Record) float64 { return math.Abs(f.of(r)) })
		if math.Abs(f.got-want) > 1e-14*scale {
			t.Fatalf("by %v: %s %.17g, the records hold %.17g", by, f.what, f.got, want)
		}
	}
	if got.Measured != month.Measured || got.Bridged != month.Bridged || got.Latent != month.Latent || got.Uncertain != month.Uncertain {
		t.Fatalf("by %v: %d, %d and %d ns, by month %d, %d and %d", by, got.Measured, got.Bridged, got.Latent, month.Measured, month.Bridged, month.Latent)
	}
	got.Amounts = month.Amounts
	got.Start, got.End = month.Start, month.End
	if got != month {
		t.Fatalf("by %v: %+v,\nby month: %+v", by, got, month)
	}
}

// The demand of each window against a second way to find it: by what a wall clock
// shows at each minute.
func TestDemandByTheWallClock(t *testing.T) {
	type mark struct {
		shown  string
		number int
	}
	rapid.Check(t, func(t *rapid.T) {
		p, records := history(t)
		p.Demand = rapid.SampledFrom(DemandLengths()).Draw(t, "length")
		wall := func(x int64) mark {
			at := time.Unix(0, x).In(p.Zone)
			return mark{at.Format("2006-01-02 15 -07:00"), at.Minute() / int(p.Demand/time.Minute)}
		}
		minutes := make(map[mark]int64)
		served, covered := make(map[mark]float64), make(map[mark]int64)
		for x := p.From; x < p.Until(); x += minute {
			minutes[wall(x)]++
		}
		if p.Until() > p.From { // the windows at both ends may be cut
			for x := p.From - minute; wall(x) == wall(p.From); x -= minute {
				delete(minutes, wall(x))
			}
			if wall(p.Until()) == wall(p.Until()-minute) {
				delete(minutes, wall(p.Until()))
			}
		}
		for i := range records {
			if m := wall(records[i].Start); minutes[m] > 0 {
				served[m] += records[i].Served
				covered[m] += records[i].Measured
			}
		}
		peak, full := math.Inf(-1), 0
		for m, s := range served {
			peak = max(peak, s/float64(60*minutes[m]))
			if covered[m] == minutes[m]*minute {
				full++
			}
		}
		var total Total
		p.By = Day
		for _, x := range collect(t, p, records) {
			total.Add(x)
		}
		d := total.Period().Demand
		if d.Windows != len(minutes) || d.Full != full || (d.PeakEnd > d.PeakStart) != (len(served) > 0) {
			t.Fatalf("%+v; by the wall clock %d windows, %d full, %d covered", d, len(minutes), full, len(served))
		}
		if m := wall(d.PeakStart); len(served) > 0 && (math.Abs(d.Peak-peak) > 1e-9*math.Abs(peak)+1e-6 ||
			math.Abs(d.PeakCoverage-float64(covered[m])/float64(minutes[m]*minute)) > 1e-12 || d.PeakEnd-d.PeakStart != minutes[m]*minute) {
			t.Fatalf("%+v; by the wall clock the peak is %g", d, peak)
		}
	})
}

// Records by the hour give the days that those by the minute give, where the clock is
// off UTC by full hours.
func TestRecordsByTheHour(t *testing.T) {
	zone, from := place(t, "Europe/Dublin"), at(t, "2026-10-24T00:00+01:00")
	var minutes, hours []Record
	for x := from; x < from+49*hour; x += minute {
		minutes = append(minutes, record(x, float64(x/minute%977)*1e3, 5e3, 60))
	}
	for some := range slices.Chunk(minutes, 60) {
		h := Record{Start: some[0].Start, End: some[59].End, Lowest: math.Inf(1), Highest: math.Inf(-1)}
		for _, r := range some {
			h.Measured += r.Measured
			h.Given += r.Given
			h.Served += r.Served
			h.Uncertainty.Unparted += r.Uncertainty.Unparted
			h.Lowest, h.Highest = min(h.Lowest, r.Lowest), max(h.Highest, r.Highest)
		}
		hours = append(hours, h)
	}
	p := Plan{From: from, To: from + 49*hour, Through: from + 49*hour, By: Day, Zone: zone, Demand: 30 * time.Minute}
	fine, coarse := collect(t, p, minutes), collect(t, p, hours)
	if len(fine) != 2 || len(coarse) != 2 {
		t.Fatalf("%d and %d days, want 2", len(fine), len(coarse))
	}
	for i := range fine {
		near(t, "heat by the hour", coarse[i].Given, fine[i].Given, 1e-14)
		near(t, "uncertainty by the hour", coarse[i].Uncertainty.Standard(), fine[i].Uncertainty.Standard(), 1e-14)
		if coarse[i].Measured != fine[i].Measured || coarse[i].Highest.Duty != fine[i].Highest.Duty {
			t.Errorf("by the hour %+v, by the minute %+v", coarse[i], fine[i])
		}
		if fine[i].Demand.Full != fine[i].Demand.Windows || coarse[i].Demand != (Demand{Windows: fine[i].Demand.Windows}) {
			t.Errorf("half hours by the minute %+v, by the hour %+v; an hour does not tell them", fine[i].Demand, coarse[i].Demand)
		}
	}
}

// Hours that tell their greatest quarter give the demand that their minutes give, to the
// hour, wherever the clock's offset is one of full quarters; also through its changes.
func TestDemandOfHours(t *testing.T) {
	for name, begin := range map[string]string{"Europe/Dublin": "2026-10-24T00:00Z", "Asia/Kolkata": "2026-06-01T00:00Z", "Asia/Kathmandu": "2026-06-01T00:00Z", "Australia/Lord_Howe": "2026-10-03T00:00Z"} {
		zone, from := place(t, name), at(t, begin)
		var minutes, hours []Record
		for x := from; x < from+49*hour; x += minute {
			minutes = append(minutes, record(x, float64(x/minute*7919%977)*1e3-400e3, 0, 60))
		}
		for some := range slices.Chunk(minutes, 60) {
			h := Record{Start: some[0].Start, End: some[59].End, Demand: math.Inf(-1), HasDemand: true}
			for quarter := range slices.Chunk(some, 15) {
				served := 0.0
				for _, r := range quarter {
					served += r.Served
				}
				h.Demand = max(h.Demand, served/900)
			}
			for _, r := range some {
				h.Measured += r.Measured
				h.Served += r.Served
			}
			hours = append(hours, h)
		}
		p := Plan{From: from, To: from + 49*hour, Through: from + 49*hour, By: Month, Zone: zone, Demand: 15 * time.Minute}
		fine, coarse := collect(t, p, minutes)[0].Demand, collect(t, p, hours)[0].Demand
		if fine.Windows != 4*49 || fine.Full != fine.Windows || coarse.Full != coarse.Windows || coarse.Windows != fine.Windows || math.Abs(coarse.Peak-fine.Peak) > 1e-9*fine.Peak ||
			coarse.PeakStart != fine.PeakStart-fine.PeakStart%hour || coarse.PeakEnd != coarse.PeakStart+hour || coarse.PeakCoverage != 1 {
			t.Errorf("%s: by the minute %+v, by the hour %+v", name, fine, coarse)
		}
	}
}

// An hour with gaps tells of its windows only what they were measured at least.
func TestDemandOfAnHourWithGaps(t *testing.T) {
	from := at(t, "2026-06-01T10:00Z")
	for _, tt := range []struct {
		measured int64
		coverage float64
		full     int
	}{{60 * minute, 1, 4}, {57 * minute, 0.8, 0}, {45 * minute, 0, 0}, {20 * minute, 0, 0}} {
		r := Record{Start: from, End: from + hour, Demand: 5e3, HasDemand: true}
		r.Measured = tt.measured
		d := collect(t, Plan{From: from, To: from + hour, Through: from + hour, By: Hour, Zone: time.UTC, Demand: 15 * time.Minute}, []Record{r})[0].Demand
		if d != (Demand{Windows: 4, Full: tt.full, Peak: 5e3, PeakStart: from, PeakEnd: from + hour, PeakCoverage: tt.coverage}) {
			t.Errorf("%v measured: %+v", time.Duration(tt.measured), d)
		}
	}
}
