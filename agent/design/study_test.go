package design

import (
	"encoding/csv"
	"math"
	"os"
	"slices"
	"strconv"
	"testing"
	"time"

	"heatreeve/agent/design/expect"
	"heatreeve/thermo/water"
)

// hourly is one hour of a loop.
type hourly struct {
	expect.Sample
	Expected  expect.Expected
	Drift     Drift
	Deviation float64 // W
}

// readLoop returns the hours of a file of which nothing is missing and in which something
// flows, with the heat by the enthalpies of water (IAPWS-IF97) at 0.4 MPa, the meter in the
// supply pipe. The buildings' zone is not known: hours are by UTC less eight.
func readLoop(t *testing.T, path string) (all []hourly) {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	records, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range records[1:] {
		at, err := time.Parse(time.RFC3339, r[0])
		if err != nil {
			t.Fatal(err)
		}
		var v [5]float64
		whole := true
		for i := range v {
			if v[i], err = strconv.ParseFloat(r[i+1], 64); err != nil {
				whole = false
			}
		}
		if !whole || v[2] < 0.05 {
			continue
		}
		supply, err1 := water.Liquid().At(v[0]+273.15, 0.4e6)
		back, err2 := water.Liquid().At(v[1]+273.15, 0.4e6)
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		local := at.Add(-8 * time.Hour)
		all = append(all, hourly{Sample: expect.Sample{
			At: at.UnixNano(), Hour: (int(local.Weekday())+6)%7*24 + local.Hour(),
			Drivers: []float64{v[4] + 273.15}, Duty: v[2] / 1e3 * supply.Density * (supply.Enthalpy - back.Enthalpy),
		}})
	}
	return all
}

// followLoop learns from the first half of the hours and follows the second, an hour a window,
// with one false warning a year; it returns the warnings of the monitor.
func followLoop(t *testing.T, all []hourly) (b expect.Baseline, fit expect.Fit, warnings []Drift) {
	t.Helper()
	half := len(all) / 2
	var samples []expect.Sample
	for i := range all[:half] {
		samples = append(samples, all[i].Sample)
	}
	o := expect.Options{Scales: []expect.Scale{{Tag: "outdoor", Unit: "°C", Factor: 1, Offset: 273.15}}, Span: int64(time.Hour)}
	b, fit, err := expect.Learn(samples, o)
	if err != nil {
		t.Fatal(err)
	}
	m := make(limits).monitor(60, 1)
	side := 0
	for i := range all {
		x := &all[i]
		x.Expected = b.At(expect.Conditions{Hour: x.Hour, Drivers: x.Drivers})
		if !x.Expected.Known {
			x.Deviation = math.NaN()
			continue
		}
		x.Deviation = x.Duty - x.Expected.Duty
		if i < half {
			continue
		}
		m.Observe(x.At, x.Deviation/fit.Mean, x.Expected.DeviationLasting/fit.Mean, math.Sqrt(x.Expected.Random/60)/fit.Mean)
		if x.Drift = m.Drift(); x.Drift.Side != 0 && x.Drift.Side != side {
			w := x.Drift
			warnings = append(warnings, w)
		}
		side = x.Drift.Side
	}
	return b, fit, warnings
}

// seen is a time in which the pictures of a building show its duty to be away from what is
// expected, on one side.
type seen struct {
	from, to string
	side     int
	told     bool // the monitor warns of it
}

// Each warning of the second half is one that the pictures show (set HEATREEVE_PLOTS to a folder
// to have them kept), which were looked at:
//
// Building 34 idles at 10 kW to 20 kW, with peaks of some hours to 77 kW, in the first week and
// hardly ever in the three after it. They come back every morning from 5 February on, to twice
// as high as what January ended with: the warning. They end on 14 February and come back on the 17th: another.
//
// Building 53 knows no weather in these months; it runs at 110 kW. It rises to 145 kW from 4
// December on and to 270 kW on the 8th, to 310 kW on the 17th and to 370 kW on the 22nd, which all three are told, and for
// half days later on, which are not.
//
// Building 58 is heated by day and not by night, and gives 20 kW to 100 kW more than expected from 13
// December on; at the end of 22 December it goes into its holiday at 50 kW by day, which is plain to
// the eye. Neither is told: the sums fall back each night, in which nothing is missed, and the
// scatter, which is taken from the same windows and inflated by their correlation, is 1.5 to
// 1.9 of the mean duty by then.
//
// Building 105 has a sensor that fails from 7 to 16 March, with a duty below zero; it gives 200 kW too
// much from then on. Neither is told: the scatter grows from 1.1 to 2.7 within a day.
func TestBaselinesOfRealLoops(t *testing.T) {
	for _, tt := range []struct {
		file     string
		residual float64 // kW
		habit    expect.Habit
		seen     []seen
	}{
		{"../loads/testdata/building34_2019-01_to_2019-03.csv", 5.49, expect.NoHabit, []seen{
			{"2019-02-05", "2019-02-15", 1, true}, {"2019-02-17", "2019-02-27", 1, true}}},
		{"testdata/building53_2020-11_to_2021-01.csv", 23.21, expect.NoHabit, []seen{
			{"2020-12-04", "2020-12-10", 1, true}, {"2020-12-17", "2020-12-19", 1, true}, {"2020-12-21", "2020-12-23", 1, true},
			{"2020-12-25", "2020-12-27", 1, false}, {"2020-12-31", "2021-01-01", 1, false}}},
		{"../loads/testdata/building58_2020-11_to_2021-01.csv", 35.69, expect.DayHabit, []seen{
			{"2020-12-12", "2020-12-23", 1, false}, {"2020-12-22", "2021-01-01", -1, false}}},
		{"testdata/building105_2020-02_to_2020-04.csv", 40.44, expect.DayHabit, []seen{
			{"2020-03-07", "2020-03-17", -1, false}, {"2020-03-16", "2020-04-01", 1, false}}},
	} {
		all := readLoop(t, tt.file)
		b, fit, warnings := followLoop(t, all)
		drawLoop(t, tt.file, all)
		if math.Abs(b.Residual/1e3-tt.residual) > 0.02 || fit.Habit != tt.habit { // a guard against change, of our own numbers
			t.Errorf("%s: residual %.2f kW, habit %v; was %.2f kW, %v", tt.file, b.Residual/1e3, fit.Habit, tt.residual, tt.habit)
		}
		found := make([]bool, len(tt.seen))
		for _, w := range warnings {
			since := time.Unix(0, w.Since).UTC().Format(time.DateOnly)
			t.Logf("%s: side %d since %s, %+.0f %% of the mean", tt.file, w.Side, time.Unix(0, w.Since).UTC().Format(time.RFC3339), 100*w.Size)
			k := slices.IndexFunc(tt.seen, func(s seen) bool { return s.side == w.Side && since >= s.from && since <= s.to })
			if k < 0 {
				t.Errorf("%s: warns of a drift to side %d since %s, which nobody sees in the picture", tt.file, w.Side, since)
				continue
			}
			found[k] = true
		}
		for k, s := range tt.seen {
			if s.told && !found[k] {
				t.Errorf("%s: no warning of what is seen from %s to %s", tt.file, s.from, s.to)
			}
		}
	}
}
