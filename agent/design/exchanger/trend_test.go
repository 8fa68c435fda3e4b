package exchanger

import (
	"bytes"
	"encoding/gob"
	"math"
	"math/rand/v2"
	"testing"
)

// grow plays days of a film that grows by 1e-6 K/W a day, of 24 windows that scatter by 3e-6,
// from a level on.
func grow(x *Trend, r *rand.Rand, from, to int64, level float64) {
	for day := from; day < to; day++ {
		for range 24 {
			x.Observe(day, level+1e-6*float64(day-from)+3e-6*r.NormFloat64())
		}
	}
}

// The interval of the day on which a limit is reached holds the truth in 95 % of the cases, by
// few days and many, and with a level that is off for good. Of 2,000 trials a share of 0.95
// has a standard deviation of 0.005.
func TestReachHoldsTheTruth(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 4))
	const trials, limit = 2000, 60e-6
	for _, tt := range []struct {
		days    int64
		lasting float64
	}{{5, 0}, {8, 0}, {20, 0}, {20, 5e-6}, {5, 1e-6}} {
		held, open := 0, 0
		for range trials {
			var x Trend
			grow(&x, r, 0, tt.days, tt.lasting*r.NormFloat64())
			c := x.Course()
			days, early, late, ok := c.Reach(limit, tt.lasting)
			truth := 60 - float64(tt.days-1)
			if !ok || !(early <= days && days <= late) {
				t.Fatalf("reached in %v, %v to %v, %v", days, early, late, ok)
			}
			if early <= truth && truth <= late {
				held++
			}
			if math.IsInf(late, 1) {
				open++
			}
		}
		if share := float64(held) / trials; !(share > 0.93 && share < 0.985) {
			t.Errorf("%d days and %g K/W that last: %.4g of the intervals hold the truth, want about 0.95; %d are open", tt.days, tt.lasting, share, open)
		}
	}
}

// Where nothing grows, the late end is open whenever the slope is less than t of its standard
// uncertainties.
func TestReachIsOpenWithoutASlope(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 5))
	open := 0
	for range 200 {
		var x Trend
		for day := range int64(30) {
			x.Observe(day, 1e-6*r.NormFloat64())
		}
		c := x.Course()
		_, early, late, ok := c.Reach(1e-3, 0)
		if !ok {
			continue // it falls
		}
		if low := c.Slope < 2.048*c.SlopeError; low != math.IsInf(late, 1) { // t of 28 degrees of freedom, 0.975
			t.Errorf("slope %v ± %v: reached in %v to %v days", c.Slope, c.SlopeError, early, late)
		}
		if math.IsInf(late, 1) {
			open++
		}
	}
	if open < 80 {
		t.Errorf("%d open intervals", open)
	}
}

// After a cleaning the trend begins afresh, within two days, and tells the same slope; what
// only scatters never does.
func TestTrendBeginsAfreshWhenCleaned(t *testing.T) {
	r := rand.New(rand.NewPCG(6, 6))
	for range 50 {
		var x Trend
		grow(&x, r, 0, 40, 0)
		grow(&x, r, 40, 50, 0)
		if n := len(x.Days); n < 8 || n > 9 {
			t.Errorf("%d days are kept ten days after a cleaning, want 8 or 9", n)
		}
		if c := x.Course(); math.Abs(c.Slope-1e-6) > 4*c.SlopeError {
			t.Errorf("slope %v ± %v a day, want 1e-6", c.Slope, c.SlopeError)
		}
	}
	lost := 0
	for range 50 {
		var x Trend
		grow(&x, r, 0, 100, 0)
		if len(x.Days) < 100 {
			lost++
		}
	}
	if lost > 1 {
		t.Errorf("%d of 50 films that only grew were taken for cleaned", lost)
	}
}

func TestTrendIsBounded(t *testing.T) {
	var x Trend
	grow(&x, rand.New(rand.NewPCG(7, 7)), 0, 300, 0)
	if n := len(x.Days); n != mostDays || x.Days[n-1].Day != 299 {
		t.Errorf("%d days are kept, want %d", n, mostDays)
	}
}

// What is saved of a course tells the same days.
func TestCourseIsSaved(t *testing.T) {
	var x Trend
	grow(&x, rand.New(rand.NewPCG(8, 8)), 0, 12, 0)
	want := x.Course()
	var buf bytes.Buffer
	var got Course
	if err := gob.NewEncoder(&buf).Encode(want); err != nil {
		t.Fatal(err)
	}
	if err := gob.NewDecoder(&buf).Decode(&got); err != nil {
		t.Fatal(err)
	}
	_, early, late, _ := want.Reach(60e-6, 1e-6)
	if _, e, l, ok := got.Reach(60e-6, 1e-6); !ok || e != early || l != late {
		t.Errorf("%v to %v days, saved %v to %v", early, late, e, l)
	}
}

func BenchmarkReach(b *testing.B) {
	var x Trend
	grow(&x, rand.New(rand.NewPCG(9, 9)), 0, 60, 0)
	c := x.Course()
	b.ReportAllocs()
	for b.Loop() {
		c.Reach(60e-6, 1e-6)
	}
}
