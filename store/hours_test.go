package store

import (
	"compress/gzip"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
	"pgregory.net/rapid"
)

// compareHours adds up the hours of load 2 from the model's minutes, and compares
// what no order of adding can change.
func (m *model) compareHours(t *rapid.T, s *Store) {
	want := map[int64]uint32{}
	for _, x := range m.minutes {
		if x.Load == 2 {
			want[hourOf(x.Start)]++
		}
	}
	got := drain(t, s.Hours(2, math.MinInt64, math.MaxInt64))
	for i, h := range got {
		if h.Load != 2 || want[h.Start] != h.Minutes || i > 0 && got[i-1].Start >= h.Start {
			t.Fatalf("hour %d of %d is %+v; want %v", i, len(got), h, want)
		}
		delete(want, h.Start)
	}
	if len(want) != 0 {
		t.Fatalf("hours %v are missing", want)
	}
}

// wave is a minute of a load whose figures are all told by its number, so that
// sums have a closed form.
func wave(load uint32, start int64) Minute {
	n := float64(start/(60*second)%60) + 1
	return Minute{Load: load, Start: start, Measured: 50, Missing: 10, Given: 100 * n, Taken: n,
		Duty: 2 * n, DutyMin: -n, DutyMax: 3 * n, DutyUncertainty: n / 4, Flow: 0.5,
		Inlet: 300 + n, Outlet: 290, Pressure: 2e5,
		Bridged: 4, BridgedGiven: 7 * n, BridgedTaken: 2, Latent: n / 2, Uncertain: n / 3, Content: 310 - n, Witness: 90 * n, Compared: 99 * n,
		Systematic: [Shares]float64{0: n, 2: -2 * n, Shares - 1: 3}, Random: n * n,
		Expected: 4 * n, ExpectedError: n / 2}
}

// TestHourFigures compares an hour with the sums of the numbers 1 to 60.
func TestHourFigures(t *testing.T) {
	s := newStore(t, Options{})
	const start = 480_000 * hourNanos
	for minute := range int64(61) { // the last one ends the hour
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+minute*60*second)}})
	}
	// 1 + .. + 60 = 1830; the last quarter holds 46 + .. + 60 = 795.
	want := Hour{Load: 3, Start: start, Minutes: 60, Measured: 3000, Missing: 600, Given: 183_000, Taken: 1830,
		Duty: 61, DutyMin: -60, DutyMax: 180, Demand: 2 * 795 * 50.0 / 900, HeatUncertainty: 1830 * 50.0 / 4, Mass: 1500,
		Inlet: 330.5, Outlet: 290, Pressure: 2e5,
		Bridged: 240, BridgedGiven: 7 * 1830, BridgedTaken: 120, Latent: 915, Uncertain: 610, Content: 279.5, Witness: 90 * 1830, Compared: 99 * 1830,
		Systematic: [Shares]float64{0: 1830, 2: -3660, Shares - 1: 180}, Random: 60 * 61 * 121 / 6,
		Expected: 122, ExpectedError: 15.25}
	want.Demand = float64(float32(want.Demand))
	got := drain(t, s.Hours(3, start-hourNanos, start+hourNanos))
	if len(got) != 1 || got[0] != want {
		t.Fatalf("got  %+v\nwant %+v", got, want)
	}
	running := drain(t, s.Hours(3, start, start+2*hourNanos))
	if len(running) != 2 || running[1].Minutes != 1 || running[1].Given != 100 {
		t.Errorf("with the running hour: %+v", running)
	}
	if from := drain(t, s.Hours(3, start+1, start+hourNanos)); len(from) != 0 {
		t.Errorf("an hour that begins before: %+v", from)
	}
	sum := got[0]
	sum.Add(Hour{Load: 3, Start: start + hourNanos, Minutes: 60, Measured: 1000, Duty: 101, DutyMax: 200, Demand: 90, Mass: 1, Outlet: 330,
		Bridged: 10, BridgedGiven: 1, BridgedTaken: 2, Latent: 85, Uncertain: 90, Content: 319.5, Witness: 3, Compared: 4,
		Systematic: [Shares]float64{2: 60, 3: -1}, Random: 10, Untold: 5, HeatUncertainty: 5,
		Expected: 42, ExpectedError: 3.25})
	if sum.Minutes != 120 || sum.Measured != 4000 || sum.Duty != 71 || sum.Demand != 90 || sum.DutyMax != 200 ||
		sum.Inlet != 330.5 || sum.Outlet != 300 || sum.Start != start || sum.Expected != 102 || sum.ExpectedError != 12.25 {
		t.Errorf("two hours together are %+v", sum)
	}
	if sum.Bridged != 250 || sum.BridgedGiven != 12_811 || sum.BridgedTaken != 122 || sum.Latent != 1000 || sum.Uncertain != 700 || sum.Content != 289.5 ||
		sum.Witness != 164_703 || sum.Compared != 181_174 || sum.Random != 73_820 || sum.HeatUncertainty != 22_880 || sum.Untold != 5 ||
		sum.Systematic != [Shares]float64{0: 1830, 2: -3600, 3: -1, Shares - 1: 180} {
		t.Errorf("two hours together are %+v", sum)
	}
}

// TestHourOnce commits minutes in any order, some again and some changed, with
// reopenings between: the hours are those of each minute's last state, counted once.
func TestHourOnce(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		dir, err := os.MkdirTemp("", "heatreeve-store")
		if err != nil {
			t.Fatal(err)
		}
		defer os.RemoveAll(dir)
		last := map[int64]float64{}
		path := filepath.Join(dir, "history.db")
		for range 3 {
			s, err := Open(path, Options{})
			if err != nil {
				t.Fatal(err)
			}
			s.minuteSealing.after = 0
			for range rapid.IntRange(0, 12).Draw(t, "commits") {
				var b Batch
				for _, n := range rapid.SliceOfN(rapid.Int64Range(-200, 200), 0, 20).Draw(t, "minutes") {
					given := float64(rapid.IntRange(0, 100).Draw(t, "given"))
					b.Minutes = append(b.Minutes, Minute{Load: 9, Start: n * 60 * second, Measured: 60, Given: given})
					last[n] = given
				}
				if err := s.Commit(b); err != nil {
					t.Fatal(err)
				}
			}
			total, minutes := 0.0, 0
			for _, given := range last {
				total += given
				minutes++
			}
			var sum Hour
			for _, h := range drain(t, s.Hours(9, -1000*hourNanos, 1000*hourNanos)) {
				if h.Minutes > 60 || h.Measured != 60*float64(h.Minutes) {
					t.Fatalf("an hour is %+v", h)
				}
				sum.Add(h)
			}
			if sum.Given != total || int(sum.Minutes) != minutes {
				t.Fatalf("hours hold %v J of %d minutes, want %v of %d", sum.Given, sum.Minutes, total, minutes)
			}
			if err := s.Close(); err != nil {
				t.Fatal(err)
			}
		}
	})
}

// TestManyLoads reads minutes and hours of a few loads of a thousand, some of which do
// not have every minute.
func TestManyLoads(t *testing.T) {
	t.Parallel()
	s := newStore(t, Options{})
	const start, minutes = 480_000 * hourNanos, 150
	for minute := range int64(minutes) {
		var b Batch
		for load := range uint32(1000) {
			if int64(load)%7 != minute%7 {
				b.Minutes = append(b.Minutes, wave(load, start+minute*60*second))
			}
		}
		commit(t, s, b)
	}
	for _, load := range []uint32{0, 5, 8, 500, 993, 999} {
		var want, sum Hour
		n := 0
		for m, err := range s.Minutes(load, math.MinInt64, math.MaxInt64) {
			if err != nil || m != wave(load, m.Start) {
				t.Fatalf("%+v, %v", m, err)
			}
			want.Given += m.Given
			n++
		}
		for _, h := range drain(t, s.Hours(load, math.MinInt64, math.MaxInt64)) {
			sum.Add(h)
		}
		if n < 128 || n > 129 || int(sum.Minutes) != n || sum.Given != want.Given {
			t.Errorf("load %d: %d minutes of %v J, hours of %d and %v J", load, n, want.Given, sum.Minutes, sum.Given)
		}
	}
	if got := drain(t, s.Minutes(1000, math.MinInt64, math.MaxInt64)); len(got) != 0 {
		t.Errorf("a load that has none: %v", got)
	}
}

// TestHoursOutliveMinutes trims minutes by age: their hours stay, also when a minute of
// one comes again, and go by an age of their own.
func TestHoursOutliveMinutes(t *testing.T) {
	t.Parallel()
	s := newStore(t, Options{MaxAge: 24 * time.Hour, MaxHourAge: 10 * 24 * time.Hour})
	const from, days = 20_000 * day, 20
	var removed Trimmed
	for at := int64(from); at < from+days*day; at += hourNanos {
		var b Batch
		for minute := range int64(60) {
			b.Minutes = append(b.Minutes, wave(1, at+minute*60*second), wave(12, at+minute*60*second))
		}
		commit(t, s, b)
		got, err := s.Trim(at + hourNanos)
		if err != nil {
			t.Fatal(err)
		}
		removed.Hours += got.Hours
	}
	const end = from + days*day
	if n := len(drain(t, s.Minutes(12, math.MinInt64, math.MaxInt64))); n != 1440 {
		t.Errorf("%d minutes kept, want a day of them", n)
	}
	hours := drain(t, s.Hours(12, math.MinInt64, math.MaxInt64))
	if len(hours) != 240 || hours[0].Start != end-10*day || removed.Hours != 2*(days-10)*24 {
		t.Errorf("%d hours kept, %d removed; want 240 and %d", len(hours), removed.Hours, 2*(days-10)*24)
	}
	before := drain(t, s.Hours(12, end-5*day, end-4*day))
	commit(t, s, Batch{Minutes: []Minute{wave(12, end-5*day)}})
	if after := drain(t, s.Hours(12, end-5*day, end-4*day)); !slices.Equal(before, after) || after[0].Minutes != 60 {
		t.Errorf("one minute came again: the hours are %+v, were %+v", after, before)
	}
}

// TestHoursLast gives less room than two years of minutes need: minutes go, all
// hours stay until there are no other minutes than those of the newest hour.
func TestHoursLast(t *testing.T) {
	t.Parallel()
	s := newStore(t, Options{MaxBytes: 1 << 20})
	const from, days = 20_000 * day, 40
	for at := int64(from); at < from+days*day; at += 6 * hourNanos {
		var b Batch
		for minute := range int64(360) {
			b.Minutes = append(b.Minutes, wave(1, at+minute*60*second))
		}
		commit(t, s, b)
		if _, err := s.Trim(at + 6*hourNanos); err != nil {
			t.Fatal(err)
		}
	}
	minutes := drain(t, s.Minutes(1, math.MinInt64, math.MaxInt64))
	if n := len(drain(t, s.Hours(1, math.MinInt64, math.MaxInt64))); n != days*24 || len(minutes) == days*1440 {
		t.Errorf("%d hours and %d minutes are kept, want %d hours and not all minutes", n, len(minutes), days*24)
	}
	s.maxBytes = 120_000
	removed, err := s.Trim(from + days*day)
	if err != nil || removed.Hours == 0 || s.Bytes() > s.maxBytes {
		t.Errorf("with hardly any room: %+v, %v; %d bytes in use", removed, err, s.Bytes())
	}
}

// layout1 unpacks a file that was written when the layout had version 1.
func layout1(t *testing.T) string { return unpacked(t, "layout1.db.gz") }

// unpacked is a file of testdata.
func unpacked(t *testing.T, name string) string {
	t.Helper()
	f, err := os.Open(filepath.Join("testdata", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	b, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "history.db")
	rewrite(t, path, b)
	return path
}

// TestUpgrade opens a file of the first layout: all that it holds is there, with
// hours, before and after the commits that build them.
func TestUpgrade(t *testing.T) {
	s := openStore(t, layout1(t), Options{})
	testNumbered(t, s, 600)
	for n := uint64(601); n < 680; n++ {
		commit(t, s, numbered(n))
		testNumbered(t, s, n)
	}
	err := s.db.View(func(tx *bolt.Tx) error {
		mark, ok := readHourMark(tx)
		if !ok || mark.built != hourOf(679*60*second) {
			t.Errorf("hours are built until %d, %v", mark.built, ok)
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}
