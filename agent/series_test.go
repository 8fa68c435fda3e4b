package agent

import (
	"context"
	"encoding/json"
	"errors"
	"math"
	"path/filepath"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"

	"heatreeve/agent/answer"
	"heatreeve/store"
)

// slope is a minute of a duty that rises by 100 W each minute, of which 3 % more was expected.
// Each tenth is bridged, and nothing is told from the 200th to the 229th.
func slope(_ string, k int) (store.Minute, bool) {
	m, _ := ramp("", k)
	m.Flow, m.Inlet, m.Outlet = 2, 350, 330+float64(k%60)
	m.Expected, m.ExpectedError = 1.03*m.Duty, 25
	m.Systematic[0], m.Random = 0.01*m.Duty*m.Measured, 49
	if k%10 == 9 {
		m = store.Minute{Bridged: 60, BridgedGiven: 5, Expected: m.Expected, ExpectedError: 25}
	}
	return m, k < 200 || k >= 230
}

// add adds a minute to what a point is to have.
func (p *pointWanted) add(m store.Minute) {
	p.bridged += m.Bridged
	if m.Measured == 0 {
		return
	}
	if p.measured == 0 {
		p.lowest, p.highest = m.DutyMin, m.DutyMax
	}
	p.lowest, p.highest = min(p.lowest, m.DutyMin), max(p.highest, m.DutyMax)
	p.measured += m.Measured
	p.given += m.Given
	p.lasting += m.Systematic[0]
	p.variance += m.Random
	p.outlet += m.Outlet * m.Measured
	p.expected += m.Expected * m.Measured
}

type pointWanted struct {
	measured, bridged, given, lowest, highest, lasting, variance, outlet, expected float64
}

func same(got *float64, want, relative float64) bool {
	return got != nil && math.Abs(*got-want) <= relative*math.Abs(want)
}

// checkPoints compares a series with the minutes of the slope that lie in it.
func checkPoints(t *testing.T, s *answer.Series, from, to int) {
	t.Helper()
	origin := week.Unix()
	for i, start := range s.Start {
		if i > 0 && start != s.Start[i-1]+int64(s.Span) || start%int64(s.Span) != 0 {
			t.Fatalf("point %d of %g s begins at %d, the one before at %d", i, s.Span, start, s.Start[max(0, i-1)])
		}
		var want pointWanted
		for k := max(from, int(start-origin)/60); k < min(to, int(start-origin)/60+int(s.Span)/60); k++ {
			if m, ok := slope("", k); ok {
				want.add(m)
			}
		}
		if s.Measured[i] != want.measured || s.Bridged[i] != want.bridged || !near12(s.Given[i], want.given) || s.Taken[i] != 0 {
			t.Fatalf("point %d: %g s measured, %g s bridged, %g J; want %+v", i, s.Measured[i], s.Bridged[i], s.Given[i], want)
		}
		if want.measured == 0 {
			for _, x := range []*float64{s.Lowest[i], s.Highest[i], s.Mean[i], s.Uncertainty[i], s.Expected[i], s.ExpectedU[i], s.Inlet[i], s.Outlet[i], s.Flow[i]} {
				if x != nil {
					t.Errorf("point %d, of which nothing was measured, has %g", i, *x)
				}
			}
			continue
		}
		const single = 1.2e-7 // what a float32 keeps
		// The shares of the uncertainty are kept to a part in a thousand.
		if !same(s.Lowest[i], want.lowest, single) || !same(s.Highest[i], want.highest, single) || !same(s.Mean[i], want.given/want.measured, 1e-12) ||
			!same(s.Uncertainty[i], math.Hypot(want.lasting, math.Sqrt(want.variance))/want.measured, 1e-3) ||
			!same(s.Expected[i], want.expected/want.measured, 2*single) || !same(s.ExpectedU[i], 25, 0) ||
			!same(s.Inlet[i], 350, 0) || !same(s.Outlet[i], want.outlet/want.measured, 2*single) || !same(s.Flow[i], 2, 1e-12) {
			t.Fatalf("point %d: %s; want %+v", i, pointText(s, i), want)
		}
	}
}

func pointText(s *answer.Series, i int) string {
	b, _ := json.Marshal([]any{s.Lowest[i], s.Highest[i], s.Mean[i], s.Uncertainty[i], s.Expected[i], s.ExpectedU[i], s.Inlet[i], s.Outlet[i], s.Flow[i]})
	return string(b) // what is not finite is none
}

// Points have the figures of their minutes, by minutes and by hours, also where the ends lie
// within a point or an hour, where a gap is, and where minutes are bridged.
func TestSeriesOfASlope(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, slope, "slope")
	for _, zone := range []string{"UTC", "Asia/Kolkata"} {
		h := historyIn(t, db, zone)
		for _, tt := range []struct {
			from, to, points int
			span             time.Duration
			count            int
		}{
			{0, n, 2000, 3 * time.Minute, 1440},
			{0, n, 1, 6 * 24 * time.Hour, 1},
			{0, n, 72, time.Hour, 72},
			{30, n - 20, 72, time.Hour, 72},
			{30, n - 20, 71, 2 * time.Hour, 37},
			{0, 1440, 0, 3 * time.Minute, 480},
			{180, 260, 2000, time.Minute, 80},
			{181, 259, 40, 2 * time.Minute, 40},
			{181, 259, 9, 10 * time.Minute, 8},
			{185, 235, 1, time.Hour, 1},
			{4, 17, 1, 20 * time.Minute, 1},
		} {
			q := answer.SeriesQuery{Load: "slope", Points: tt.points,
				From: week.Add(time.Duration(tt.from) * time.Minute).Format(time.RFC3339), To: week.Add(time.Duration(tt.to) * time.Minute).Format(time.RFC3339)}
			s, err := h.series(t.Context(), q)
			if err != nil {
				t.Fatal(err)
			}
			if s.Span != tt.span.Seconds() || len(s.Start) != tt.count {
				t.Errorf("%+v: %d points of %v s, want %d of %v", q, len(s.Start), s.Span, tt.count, tt.span)
			}
			checkPoints(t, s, tt.from, tt.to)
		}
	}
}

// Where an hour has lost its minutes, the whole series is of hours, which have the same figures.
func TestSeriesWithoutMinutes(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{MaxAge: 24 * time.Hour}, n, slope, "slope")
	if _, err := db.Trim(week.Add(n * time.Minute).UnixNano()); err != nil {
		t.Fatal(err)
	}
	h := historyIn(t, db, "UTC")
	for _, tt := range []struct {
		from, to int
		span     float64
	}{
		{60, 600, 3600}, {0, n, 3600}, {n - 600, n, 60},
	} {
		s, err := h.series(t.Context(), answer.SeriesQuery{Load: "slope", Points: 2000,
			From: week.Add(time.Duration(tt.from) * time.Minute).Format(time.RFC3339), To: week.Add(time.Duration(tt.to) * time.Minute).Format(time.RFC3339)})
		if err != nil {
			t.Fatal(err)
		}
		if s.Span != tt.span || len(s.Start) != (tt.to-tt.from)*60/int(tt.span) {
			t.Errorf("minutes %d to %d: %d points of %v s", tt.from, tt.to, len(s.Start), s.Span)
		}
		checkPoints(t, s, tt.from, tt.to)
	}
}

// aYear is a history of so many days of one load, with a peak of 999 kW in one minute that
// lies in the middle of them.
func aYear(t testing.TB, days int) (h history, peak time.Time) {
	t.Helper()
	db, err := store.Open(filepath.Join(t.TempDir(), HistoryFile), store.Options{MaxBytes: 1 << 30, MaxAge: 10 * 366 * 24 * time.Hour})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { db.Close() })
	ids, err := db.IDs("load", []string{"main"})
	if err != nil {
		t.Fatal(err)
	}
	first := time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
	peak = first.Add(time.Duration(days)*12*time.Hour + 7*time.Minute)
	for day := range days {
		var b store.Batch
		for k := range 1440 {
			at := first.Add(time.Duration(1440*day+k) * time.Minute)
			duty := math.Round(300e3 + 100e3*math.Sin(float64(1440*day+k)/200))
			m := store.Minute{Load: ids[0], Start: at.UnixNano(), Measured: 60, Given: 60 * duty, Duty: duty, DutyMin: duty - 500, DutyMax: duty + 500, Flow: 4, Inlet: 350, Outlet: 330, Expected: 320e3, ExpectedError: 3e3}
			if at.Equal(peak) {
				m.DutyMax = 999e3
			}
			b.Minutes = append(b.Minutes, m)
		}
		b.Beats = []store.Beat{{Through: first.Add(time.Duration(day+1) * 24 * time.Hour).UnixNano()}}
		if err := db.Commit(b); err != nil {
			t.Fatal(err)
		}
	}
	end := first.Add(time.Duration(days) * 24 * time.Hour)
	return history{db: db, zone: time.UTC, through: end.UnixNano}, peak
}

// A peak of one minute stands in a year that is thinned to 2000 points, in the point that holds
// it and in no other, and so does it in a month and in a day.
func TestSeriesKeepsAPeak(t *testing.T) {
	h, peak := aYear(t, 366)
	for _, tt := range []struct {
		from, to string
		points   int
	}{{"2026-01-01", "", 2000}, {"2026-01-01", "", 3}, {"2026-06-10", "2026-07-10", 2000}, {"2026-07-03", "2026-07-04", 700}} {
		s, err := h.series(t.Context(), answer.SeriesQuery{Load: "main", From: tt.from, To: tt.to, Points: tt.points})
		if err != nil {
			t.Fatal(err)
		}
		if len(s.Start) > tt.points || len(s.Start) < tt.points/3 {
			t.Errorf("from %s to %s: %d points, asked for %d", tt.from, tt.to, len(s.Start), tt.points)
		}
		holds := 0
		for i, start := range s.Start {
			in := peak.Unix() >= start && peak.Unix() < start+int64(s.Span)
			if s.Highest[i] == nil || (*s.Highest[i] == 999e3) != in {
				t.Errorf("from %s to %s: point %d, from %d on, has %s", tt.from, tt.to, i, start, pointText(s, i))
			}
			if in {
				holds++
			}
			if !same(s.Expected[i], 320e3, 0) || s.Measured[i] > s.Span {
				t.Fatalf("point %d: %s", i, pointText(s, i))
			}
		}
		if holds != 1 {
			t.Errorf("from %s to %s: %d points hold the peak", tt.from, tt.to, holds)
		}
	}
}

// What is asked for is held to what there is; what has no record is empty and no error.
func TestSeriesQueries(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 600, slope, "slope")
	h := historyIn(t, db, "Europe/Dublin")
	for _, tt := range []struct {
		q    answer.SeriesQuery
		want string
	}{
		{answer.SeriesQuery{Load: "slop", From: "2026-10-24"}, `load "slop" is not in the history; did you mean "slope"?`},
		{answer.SeriesQuery{From: "2026-10-24"}, "load is missing"},
		{answer.SeriesQuery{Load: "slope"}, "from is missing"},
		{answer.SeriesQuery{Load: "slope", From: "yesterday"}, `from "yesterday" is no date`},
		{answer.SeriesQuery{Load: "slope", From: "2026-10-24", To: "soon"}, `to "soon" is no date`},
		{answer.SeriesQuery{Load: "slope", From: "2026-10-24", To: "2026-10-24"}, "to 2026-10-24 is not after from 2026-10-24"},
		{answer.SeriesQuery{Load: "slope", From: "2026-10-24", Points: 2001}, "allowed are 1 to 2000"},
		{answer.SeriesQuery{Load: "slope", From: "2026-10-24", Points: -1}, "allowed are 1 to 2000"},
		{answer.SeriesQuery{Load: "slope", From: "2026-10-24", Zone: "Dublin"}, `zone "Dublin" is not known`},
	} {
		var wrong *answer.QueryError
		if _, err := h.series(t.Context(), tt.q); !errors.As(err, &wrong) || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%+v: %v, want %q", tt.q, err, tt.want)
		}
	}
	for _, q := range []answer.SeriesQuery{{Load: "slope", From: "2026-11-24"}, {Load: "slope", From: "2026-11-24", To: "2026-11-25"}} {
		s, err := h.series(t.Context(), q)
		if err != nil || s.Start == nil || len(s.Start) != 0 || s.Mean == nil {
			t.Errorf("%+v: %+v, %v; want columns without an element", q, s, err)
		}
	}
	before, err := h.series(t.Context(), answer.SeriesQuery{Load: "slope", From: "2026-10-23", To: "2026-10-25", Points: 2000})
	if err != nil || len(before.Start) != 34*30 || before.Mean[24*30-1] != nil || before.Mean[24*30] == nil || !before.Accounted.Equal(week.Add(600*time.Minute)) {
		t.Errorf("%v: %d points up to %v, want 34 hours up to the end of the history", err, len(before.Start), before.Accounted)
	}
	odd, err := h.series(t.Context(), answer.SeriesQuery{Load: "slope", From: "2026-10-24T00:00:30", To: "2026-10-24T00:02:01"})
	if err != nil || len(odd.Start) != 3 || odd.Measured[0] != 58 || odd.Measured[2] != 58 {
		t.Errorf("ends within minutes: %+v, %v", odd, err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := h.series(ctx, answer.SeriesQuery{Load: "slope", From: "2026-10-24"}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// A minute that cannot be read makes a series of hours, and an hour that cannot be read is
// missing, and counted.
func TestSeriesOfDamage(t *testing.T) {
	path := filepath.Join(t.TempDir(), HistoryFile)
	db := keep(t, path, store.Options{}, 600, slope, "slope")
	damage := func(bucket string, skip int) {
		t.Helper()
		if err := db.Close(); err != nil {
			t.Fatal(err)
		}
		b, err := bolt.Open(path, 0o600, nil)
		if err != nil {
			t.Fatal(err)
		}
		err = b.Update(func(tx *bolt.Tx) error {
			c := tx.Bucket([]byte(bucket)).Cursor()
			k, v := c.First()
			for n := 0; n < skip || len(k) != 12 || v == nil; n++ {
				k, v = c.Next()
			}
			return tx.Bucket([]byte(bucket)).Put(k, append([]byte{v[0] ^ 1}, v[1:]...))
		})
		if err := errors.Join(err, b.Close()); err != nil {
			t.Fatal(err)
		}
		if db, err = store.Open(path, store.Options{}); err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { db.Close() })
	}
	for _, tt := range []struct {
		bucket string
		points int
		span   float64
		unused int
		none   int
	}{
		{"minutes", 2000, 3600, 0, 0},
		{"hours", 10, 3600, 1, 1},
	} {
		damage(tt.bucket, 3)
		h := historyIn(t, db, "UTC")
		s, err := h.series(t.Context(), answer.SeriesQuery{Load: "slope", From: week.Format(time.RFC3339), Points: tt.points})
		if err != nil {
			t.Fatal(err)
		}
		none := 0
		for _, x := range s.Mean {
			if x == nil {
				none++
			}
		}
		if s.Span != tt.span || s.Unused != tt.unused || none != tt.none || len(s.Start) != 10 {
			t.Errorf("damaged %s: %d points of %g s, %d without a mean, %d records not used; want 10 of %g s, %d and %d", tt.bucket, len(s.Start), s.Span, none, s.Unused, tt.span, tt.none, tt.unused)
		}
	}
}

// A vessel has no flow, and a minute from before its parts were kept has its whole uncertainty.
func TestSeriesOfAVessel(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 60, func(string, int) (store.Minute, bool) {
		return store.Minute{Measured: 60, Taken: 6e5, Duty: -1e4, DutyMin: -2e4, DutyMax: 100, DutyUncertainty: 150, Content: 320}, true
	}, "tank")
	h := historyIn(t, db, "UTC")
	for _, points := range []int{1, 60} {
		s, err := h.series(t.Context(), answer.SeriesQuery{Load: "tank", From: week.Format(time.RFC3339), Points: points})
		if err != nil || len(s.Start) != points {
			t.Fatalf("%+v, %v", s, err)
		}
		if s.Flow[0] != nil || s.Inlet[0] != nil || s.Expected[0] != nil || !same(s.Mean[0], -1e4, 1e-12) || !same(s.Lowest[0], -2e4, 0) || !same(s.Highest[0], 100, 0) || !same(s.Uncertainty[0], 150, 1e-9) || !near12(s.Taken[0], 6e5*60/float64(points)) {
			t.Errorf("%d points: %s", points, pointText(s, 0))
		}
	}
}

// BenchmarkSeries thins a year of one load to 2000 points, by its hours, and a month to as many,
// by its 43 200 minutes.
func BenchmarkSeries(b *testing.B) {
	h, _ := aYear(b, 366)
	for _, tt := range []struct{ what, from, to string }{{"year", "2026-01-01", ""}, {"month", "2026-06-10", "2026-07-10"}, {"day", "2026-06-10", "2026-06-11"}} {
		b.Run(tt.what, func(b *testing.B) {
			b.ReportAllocs()
			points, bytes := 0, 0
			for b.Loop() {
				s, err := h.series(b.Context(), answer.SeriesQuery{Load: "main", From: tt.from, To: tt.to, Points: answer.MostPoints})
				if err != nil {
					b.Fatal(err)
				}
				text, err := json.Marshal(s)
				if err != nil {
					b.Fatal(err)
				}
				points, bytes = len(s.Start), len(text)
			}
			b.ReportMetric(float64(points), "points")
			b.ReportMetric(float64(bytes), "B/JSON")
		})
	}
}
