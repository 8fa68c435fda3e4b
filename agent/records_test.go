package agent

import (
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/store"
)

// week is the beginning of the histories in these tests: the day before clocks go back
// in Dublin.
var week = time.Date(2026, 10, 23, 23, 0, 0, 0, time.UTC)

// keep writes a history at path: n minutes of each load from week on, as f has them, or
// none where it says so.
func keep(t *testing.T, path string, o store.Options, n int, f func(load string, k int) (store.Minute, bool), loads ...string) *store.Store {
	t.Helper()
	db, err := store.Open(path, o)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { db.Close() })
	ids, err := db.IDs("load", loads)
	if err != nil {
		t.Fatal(err)
	}
	b := store.Batch{Beats: []store.Beat{{Through: week.UnixNano() + int64(n)*minute}}}
	for k := range n {
		for i, load := range loads {
			if m, ok := f(load, k); ok {
				m.Load, m.Start = ids[i], week.UnixNano()+int64(k)*minute
				b.Minutes = append(b.Minutes, m)
			}
		}
	}
	if err := db.Commit(b); err != nil {
		t.Fatal(err)
	}
	return db
}

// ramp is a minute of a duty that rises by 100 W each minute, measured but for two
// seconds of it.
func ramp(_ string, k int) (store.Minute, bool) {
	duty := 100 * float64(k)
	return store.Minute{Measured: 58, Missing: 2, Given: 58 * duty, Duty: duty, DutyMin: duty - 5, DutyMax: duty + 5, DutyUncertainty: duty / 100}, true
}

// rampHeat is the heat of the ramp's minutes from a up to b.
func rampHeat(a, b int) float64 { return 58 * 100 * float64(b*(b-1)-a*(a-1)) / 2 }

func historyIn(t *testing.T, db *store.Store, zone string, current ...string) history {
	t.Helper()
	place, err := time.LoadLocation(zone)
	if err != nil {
		t.Fatal(err)
	}
	through, err := eventTime(db)
	if err != nil {
		t.Fatal(err)
	}
	return history{db: db, zone: place, through: through.UnixNano, current: current}
}

// nearFloat32 is for figures of which the history keeps the nearest float32.
func nearFloat32(a, b float64) bool { return math.Abs(a-b) <= 6e-8*math.Abs(b) }

func near12(a, b float64) bool { return math.Abs(a-b) <= 1e-12*math.Abs(b) }

// Whatever records serve, hours or minutes, the heat is that of the ramp, and the time
// adds up; by the clocks of places that are off UTC by full hours and by half ones, with
// windows and without, from a full hour and from the middle of one.
func TestReportOfARamp(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, ramp, "ramp")
	for _, zone := range []string{"Europe/Dublin", "America/St_Johns", "Asia/Kolkata", "UTC"} {
		for _, by := range []string{"hour", "day", "month"} {
			for _, demand := range []time.Duration{answer.NoDemand, 0, 15 * time.Minute, time.Hour} {
				for _, span := range [][2]int{{0, n}, {60, 1500}, {80, 1999}, {3, 17}} {
					h := historyIn(t, db, zone)
					q := answer.Query{By: by, Demand: demand,
						From: week.Add(time.Duration(span[0]) * time.Minute).Format(time.RFC3339),
						To:   week.Add(time.Duration(span[1]) * time.Minute).Format(time.RFC3339)}
					checkRamp(t, &h, q, span[0], span[1])
				}
			}
		}
	}
}

func checkRamp(t *testing.T, h *history, q answer.Query, from, to int) {
	t.Helper()
	r, err := h.report(t.Context(), q)
	if err != nil || len(r.Loads) != 1 || len(r.Notes) > 0 {
		t.Fatalf("%+v: %v, %+v", q, err, r)
	}
	l := r.Loads[0]
	minutes := float64(to - from)
	if want := rampHeat(from, to); !near12(l.Total.Given, want) || !near12(l.Total.Uncertainty, want/100) || l.Total.Random != 0 || l.Total.Systematic != l.Total.Uncertainty || l.Total.Measured != 58*minutes || l.Total.Missing != 2*minutes {
		t.Errorf("%+v: total %+v, want %g J", q, l.Total, want)
	}
	if l.Begins != nil && from > 0 {
		t.Errorf("%+v: begins %v", q, l.Begins)
	}
	if l.Total.Highest.Duty != 100*float64(to-1)+5 || l.Total.Lowest.Duty != 100*float64(from)-5 {
		t.Errorf("%+v: from %+v to %+v", q, l.Total.Lowest, l.Total.Highest)
	}
	var given, missing float64
	end := r.From
	for _, p := range l.Periods {
		a, b := int(p.AccountedFrom.Sub(week)/time.Minute), int(p.AccountedTo.Sub(week)/time.Minute)
		if !near12(p.Given, rampHeat(a, b)) || !p.AccountedFrom.Equal(end) || p.Measured+p.Missing != p.AccountedTo.Sub(p.AccountedFrom).Seconds() {
			t.Fatalf("%+v: %+v, want %g J", q, p, rampHeat(a, b))
		}
		given, missing, end = given+p.Given, missing+p.Missing, p.AccountedTo
	}
	if !near12(given, l.Total.Given) || missing != l.Total.Missing || !end.Equal(r.To) {
		t.Errorf("%+v: periods up to %v with %g J and %g s missing, total %+v", q, end, given, missing, l.Total)
	}
	length := r.Demand
	if none := q.Demand == answer.NoDemand || q.Demand == 0 && q.By == "hour"; none != (length == 0) || q.Demand == 0 && !none && length != 900 {
		t.Errorf("%+v: demand windows of %g s", q, length)
	}
	if d := l.Total.Demand; (d != nil) != (length != 0) || d != nil && d.Peak != nil && (d.Peak.End.Sub(d.Peak.Start).Seconds() != length || !near12(d.Peak.Duty,
		rampHeat(int(d.Peak.Start.Sub(week)/time.Minute), int(d.Peak.End.Sub(week)/time.Minute))/length)) {
		t.Errorf("%+v: demand %+v", q, d)
	}
}

// restless is a duty that jumps from minute to minute, and of which some are missing.
func restless(_ string, k int) (store.Minute, bool) {
	duty := 1e3 * float64(k*7919%977-300)
	return store.Minute{Measured: 60, Given: 60 * max(0, duty), Taken: 60 * max(0, -duty), Duty: duty, DutyMin: duty, DutyMax: duty}, k%701 != 0
}

// The peak of each day is that of its quarters one by one, though hours serve where they
// can: by clocks that are off UTC by full hours, halves and quarters, and through a change.
func TestDemandPeaksAgainstTheQuarters(t *testing.T) {
	const n = 4 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, restless, "restless")
	quarter := func(at time.Time) (demand, measured float64) {
		for i := range 15 {
			k := int(at.Sub(week)/time.Minute) + i
			if m, ok := restless("", k); ok && k >= 0 && k < n {
				demand, measured = demand+m.Duty/15, measured+1
			}
		}
		return demand, measured / 15
	}
	for _, zone := range []string{"Europe/Dublin", "Asia/Kolkata", "Asia/Kathmandu", "UTC"} {
		h := historyIn(t, db, zone)
		r, err := h.report(t.Context(), answer.Query{From: "2026-10-24", Demand: 15 * time.Minute})
		if err != nil || len(r.Loads[0].Periods) < 4 {
			t.Fatalf("%s: %v, %+v", zone, err, r)
		}
		brief, err := h.report(t.Context(), answer.Query{From: "2026-10-24"})
		if err != nil {
			t.Fatal(err)
		}
		for i, p := range brief.Loads[0].Periods {
			if want := r.Loads[0].Periods[i].Demand; *p.Demand.Peak != *want.Peak || p.Demand.Windows != want.Windows || p.Demand.Full > want.Full {
				t.Errorf("%s, %v: unasked %+v, asked for %+v", zone, p.Start, p.Demand, want)
			}
		}
		for _, p := range append(r.Loads[0].Periods, r.Loads[0].Total) {
			want, count, full := math.Inf(-1), 0, 0
			for at := p.AccountedFrom; at.Before(p.AccountedTo); at = at.Add(15 * time.Minute) {
				demand, measured := quarter(at)
				if want, count = max(want, demand), count+1; measured == 1 {
					full++
				}
			}
			k := p.Demand.Peak
			demand, coverage := quarter(k.Start)
			if math.Abs(k.Duty-want) > 1e-9*want || math.Abs(demand-want) > 1e-9*want || k.Coverage != coverage || k.End.Sub(k.Start) != 15*time.Minute || p.Demand.Windows != count || p.Demand.Full != full {
				t.Errorf("%s, %v: %+v of %d windows, %d full; want %g of %d, %d full", zone, p.Start, k, p.Demand.Windows, p.Demand.Full, want, count, full)
			}
		}
	}
}

// Where minutes have been given up for their age, their hours are still in the account;
// what cannot be told any more is.
func TestReportOfHoursWithoutMinutes(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{MaxAge: 24 * time.Hour}, n, ramp, "ramp")
	if _, err := db.Trim(week.Add(n * time.Minute).UnixNano()); err != nil {
		t.Fatal(err)
	}
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	for range db.Minutes(ids["ramp"], week.UnixNano(), week.Add(24*time.Hour).UnixNano()) {
		t.Fatal("the minutes of the first day are still there")
	}
	h := historyIn(t, db, "Europe/Dublin")
	checkRamp(t, &h, answer.Query{From: "2026-10-24", To: "2026-10-26"}, 0, 49*60)
	// Its last quarter is the highest of the day: known to the hour, and measured for what
	// two seconds a minute, all of them taken from it, leave of it. An hour keeps its
	// demand to a part in ten million.
	r, err := h.report(t.Context(), answer.Query{From: "2026-10-24", To: "2026-10-25"})
	if err != nil {
		t.Fatal(err)
	}
	if k := r.Loads[0].Total.Demand.Peak; len(r.Notes) != 0 || k == nil || !nearFloat32(k.Duty, rampHeat(1425, 1440)/900) || !near12(k.Coverage, 1-120./900) ||
		!k.Start.Equal(week.Add(23*time.Hour)) || !k.End.Equal(week.Add(24*time.Hour)) {
		t.Errorf("peak %+v, notes %q", k, r.Notes)
	}
	r, err = h.report(t.Context(), answer.Query{From: "2026-10-24", To: "2026-10-25", Demand: 10 * time.Minute})
	if err != nil {
		t.Fatal(err)
	}
	if l := r.Loads[0]; !near12(l.Total.Given, rampHeat(0, 1440)) || l.Total.Demand.Peak != nil || l.Total.Demand.Windows != 144 ||
		len(r.Notes) != 1 || !strings.Contains(r.Notes[0], "ramp: of 24 hours not all minutes are left") {
		t.Errorf("total %+v, notes %q", l.Total, r.Notes)
	}
}

// By a clock that is off UTC by half an hour, or from the middle of an hour, hours without
// minutes are divided: no heat is lost, the time adds up, and it is said.
func TestReportOfHoursThatAreCut(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{MaxAge: 24 * time.Hour}, n, ramp, "ramp")
	if _, err := db.Trim(week.Add(n * time.Minute).UnixNano()); err != nil {
		t.Fatal(err)
	}
	h := historyIn(t, db, "Asia/Kolkata")
	for _, tt := range []struct {
		by       string
		from, to int // minutes of the ramp
		cut      string
	}{
		{"day", 0, n, "ramp: of 2 hours by UTC that reach over the end of a local day"},
		{"hour", 0, n, "ramp: of 48 hours by UTC that reach over the end of a local hour"},
		{"month", 0, n, ""},
		{"month", 90, 1530, "ramp: of 2 hours by UTC"}, // from the middle of an hour to that of one
	} {
		q := answer.Query{By: tt.by, Demand: answer.NoDemand, From: week.Add(time.Duration(tt.from) * time.Minute).Format(time.RFC3339), To: week.Add(time.Duration(tt.to) * time.Minute).Format(time.RFC3339)}
		r, err := h.report(t.Context(), q)
		if err != nil {
			t.Fatal(err)
		}
		l := r.Loads[0]
		want := rampHeat(tt.from, tt.to)
		if tt.from > 0 { // half of each hour that is cut
			want = rampHeat(120, 1500) + rampHeat(60, 120)/2 + rampHeat(1500, 1560)/2
		}
		if !near12(l.Total.Given, want) || !near12(l.Total.Measured, 58*float64(tt.to-tt.from)) || !near12(l.Total.Missing, 2*float64(tt.to-tt.from)) {
			t.Errorf("%+v: total %+v, want %g J", q, l.Total, want)
		}
		for _, p := range l.Periods {
			a, b := int(p.AccountedFrom.Sub(week)/time.Minute), int(p.AccountedTo.Sub(week)/time.Minute)
			// An hour of the ramp divided evenly moves at most 30 min · 30 · 100 W over each end.
			if d := math.Abs(p.Given - rampHeat(a, b)); d > 2*30*58*3000 || p.Missing < 0 || math.Abs(p.Measured+p.Missing-float64(60*(b-a))) > 1e-6 {
				t.Errorf("%+v: %+v, want %g J", q, p, rampHeat(a, b))
			}
		}
		if notes := strings.Join(r.Notes, "\n"); (notes != "") != (tt.cut != "") || !strings.HasPrefix(notes, tt.cut) || strings.Contains(notes, "by the clock of Asia/Kolkata") != (tt.by == "hour") {
			t.Errorf("%+v: notes %q", q, r.Notes)
		}
	}
	r, err := h.report(t.Context(), answer.Query{From: "2026-10-24T04:30", To: "2026-10-25T00:30", Demand: 30 * time.Minute})
	if err != nil || r.Loads[0].Total.Demand.Peak != nil {
		t.Errorf("demand of hours that are cut: %+v, %v", r.Loads[0].Total.Demand, err)
	}
}

// A load that begins within the report shows so; one that is not accounted for any more is
// told of only where it has a record, or is asked for.
func TestReportOfLoadsThatComeAndGo(t *testing.T) {
	const n = 2 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, func(load string, k int) (store.Minute, bool) {
		m, _ := ramp(load, k)
		return m, load == "old" && k < 600 || load == "new" && k >= 1690 || load == "blind" && k < 30
	}, "old", "new", "blind")
	h := historyIn(t, db, "Europe/Dublin", "new", "blind")
	names := func(r *answer.Report) (all []string) {
		for _, l := range r.Loads {
			all = append(all, l.Load)
		}
		return all
	}
	for _, tt := range []struct {
		q    answer.Query
		want []string
	}{
		{answer.Query{From: "2026-10-24"}, []string{"old", "new", "blind"}},
		{answer.Query{From: "2026-10-25"}, []string{"new", "blind"}},
		{answer.Query{From: "2026-10-24", To: "2026-10-25"}, []string{"old", "blind"}},
		{answer.Query{From: "2026-10-25", Loads: []string{"old"}}, []string{"old"}},
	} {
		r, err := h.report(t.Context(), tt.q)
		if err != nil || !slices.Equal(names(r), tt.want) {
			t.Errorf("%+v: %v, %v; want %v", tt.q, names(r), err, tt.want)
		}
	}
	r, err := h.report(t.Context(), answer.Query{From: "2026-10", By: "hour", Loads: []string{"new"}})
	if err != nil {
		t.Fatal(err)
	}
	l := r.Loads[0]
	begins := week.Add(1690 * time.Minute)
	if l.Begins == nil || !l.Begins.Equal(begins) || !l.Periods[0].Start.Equal(begins.Truncate(time.Hour)) || !near12(l.Total.Given, rampHeat(1690, n)) {
		t.Errorf("begins %v, first period %v, total %+v", l.Begins, l.Periods[0].Start, l.Total)
	}
	if all := r.To.Sub(r.From).Seconds(); l.Total.Measured+l.Total.Missing != all {
		t.Errorf("%g s measured and %g s missing of %g s", l.Total.Measured, l.Total.Missing, all)
	}
}

func TestRegistersBesideTheSum(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 600, ramp, "ramp")
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	if err := db.Commit(store.Batch{Registers: []store.Register{{Load: ids["ramp"], Given: 5e9, Taken: 7, BridgedGiven: 3, BridgedTaken: 2, Measured: 11, Bridged: 17, Missing: 13, Uncertain: 5}}}); err != nil {
		t.Fatal(err)
	}
	h := historyIn(t, db, "UTC")
	all := &answer.Register{Given: 5e9, Taken: 7, BridgedGiven: 3, BridgedTaken: 2, Measured: 11, Bridged: 17, Missing: 13, Uncertain: 5}
	for _, tt := range []struct {
		to   string
		want *answer.Register
	}{{"", all}, {"2027-01-01", all}, {"2026-10-24T05:00", nil}} {
		r, err := h.report(t.Context(), answer.Query{From: "2026-10-24", To: tt.to})
		if err != nil {
			t.Fatal(err)
		}
		if got := r.Loads[0].Register; (got == nil) != (tt.want == nil) || got != nil && *got != *tt.want {
			t.Errorf("to %q: register %+v, want %+v", tt.to, got, tt.want)
		}
	}
}

// All that a minute tells comes through the store into the report, by hours and by minutes:
// closed forms of equal minutes.
func TestReportOfAllThatAMinuteTells(t *testing.T) {
	const n = 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, func(string, int) (store.Minute, bool) {
		m := store.Minute{
			Measured: 48, Bridged: 9, Missing: 3, Latent: 30, Uncertain: 12, Given: 48e3, BridgedGiven: 8e3, BridgedTaken: 1e3,
			Duty: 1e3, DutyMin: 900, DutyMax: 1100, DutyUncertainty: 12, Witness: 50e3, Compared: 49e3, Random: 96 * 96,
		}
		m.Systematic[loads.PartFlow], m.Systematic[loads.PartCp] = 384, -288 // 3 and 4 of 5, times 96
		return m, true
	}, "all")
	h := historyIn(t, db, "Europe/Dublin")
	for _, q := range []answer.Query{{From: "2026-10-24", To: "2026-10-25"}, {From: "2026-10-24", To: "2026-10-25", By: "hour"}, {From: "2026-10-24", To: "2026-10-25", Demand: 5 * time.Minute}} {
		r, err := h.report(t.Context(), q)
		if err != nil {
			t.Fatal(err)
		}
		p := r.Loads[0].Total
		if p.Given != n*48e3 || p.BridgedGiven != n*8e3 || p.BridgedTaken != n*1e3 || p.Measured != n*48 || p.Bridged != n*9 || p.Missing != n*3 || p.Latent != n*30 || p.Uncertain != n*12 || p.Coverage != 0.8 || *p.Mean != 1e3 {
			t.Errorf("%+v: %+v", q, p)
		}
		if w := p.Witness; w == nil || w.Counted != n*50e3 || w.Served != n*49e3 || !near12(w.Deviation, 49./50-1) {
			t.Errorf("%+v: witness %+v", q, w)
		}
		systematic, random := n*480., math.Sqrt(n)*96 // the parts are kept to a part in a thousand
		off := func(got, want float64) bool { return math.Abs(got/want-1) > 2e-3 }
		if off(p.Systematic, systematic) || off(p.Random, random) || off(p.Uncertainty, math.Hypot(systematic, random)) || p.Expanded != 2*p.Uncertainty || r.Factor != 2 || off(*p.MeanU, p.Uncertainty/(n*48)) {
			t.Errorf("%+v: uncertainty %g of %g and %g, want %g and %g", q, p.Uncertainty, p.Systematic, p.Random, systematic, random)
		}
		if len(p.Shares) != 3 || p.Shares[0].Part != "flow" || off(p.Shares[0].Fraction, 0.64) || p.Shares[1].Part != "heat capacity" || p.Shares[2].Part != "random" {
			t.Errorf("%+v: shares %+v", q, p.Shares)
		}
		// 48 s of 1 kW a minute; the bridged heat is in no peak.
		if d := p.Demand; q.By != "hour" && (d.Peak == nil || !near12(d.Peak.Duty, 800) || d.Peak.Coverage != 0.8 || d.Full != 0) {
			t.Errorf("%+v: demand %+v", q, p.Demand)
		}
	}
}
