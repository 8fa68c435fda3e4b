package store

import "testing"

// TestHourWithoutMeasuring has minutes that measured nothing, among others, alone, and in
// hours put together: they have no say in what the duty was at least and at most.
func TestHourWithoutMeasuring(t *testing.T) {
	const start = 480_000 * hourNanos
	hot := Minute{Load: 1, Start: start + 60*second, Measured: 60, Duty: 500, DutyMin: 400, DutyMax: 600}
	cold := Minute{Load: 2, Start: start + 60*second, Measured: 60, Duty: -500, DutyMin: -600, DutyMax: -400}
	s := newStore(t, Options{})
	for _, at := range []int64{start, start + 120*second} {
		for load := range uint32(4) {
			commit(t, s, Batch{Minutes: []Minute{{Load: load, Start: at, Missing: 60}}})
		}
	}
	commit(t, s, Batch{Minutes: []Minute{hot, cold}})
	for range 2 { // while the hour runs, and built
		for load, want := range [][2]float64{{0, 0}, {400, 600}, {-600, -400}, {0, 0}} {
			found, _ := hourOfLoad(s, uint32(load), start)
			if len(found) != 1 || found[0].DutyMin != want[0] || found[0].DutyMax != want[1] || found[0].Missing != 120 {
				t.Errorf("the hour of load %d is %+v, want %v W", load, found, want)
			}
		}
		commit(t, s, Batch{Minutes: []Minute{{Load: 5, Start: start + hourNanos, Measured: 60}}})
	}
	nothing, some := Hour{Minutes: 60, Missing: 3600}, Hour{Minutes: 60, Measured: 3600, Duty: 5, DutyMin: 4, DutyMax: 6}
	for _, pair := range [][2]Hour{{nothing, some}, {some, nothing}} {
		sum := pair[0]
		if sum.Add(pair[1]); sum.DutyMin != 4 || sum.DutyMax != 6 || sum.Missing != 3600 {
			t.Errorf("%+v and %+v are %+v", pair[0], pair[1], sum)
		}
	}
}
