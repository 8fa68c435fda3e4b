package learning

import (
	"math"
	"testing"
	"time"

	"go.yaml.in/yaml/v3"
)

const minute = int64(time.Minute)

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= 1e-9) && !(got != got && want != want) {
		t.Errorf("%s = %g, want %g", what, got, want)
	}
}

// 10 for six minutes and 20 for four are 14 on the mean; what is held too long is not known.
func TestMeanOfSteps(t *testing.T) {
	s := Steps{Hold: 8 * minute}
	s.Add(6*minute, 20)
	s.Add(-minute, 10) // late
	near(t, "mean", s.Mean(0, 10*minute), 14)
	near(t, "of the first three", s.Mean(0, 3*minute), 10)
	near(t, "where the last holds four minutes of six", s.Mean(10*minute, 16*minute), 20)
	near(t, "where it holds four of nine", s.Mean(10*minute, 19*minute), math.NaN())
	near(t, "before all", s.Mean(-9*minute, -minute), math.NaN())
	s.Add(8*minute, math.NaN())
	near(t, "with a bad one", s.Mean(0, 10*minute), (10.*6+20*2)/8)
	s.Hold = 0
	s.Add(9*minute, 30)
	near(t, "on change", s.Mean(1000*minute, 2000*minute), 30)
}

// Of two hours the first has 53 minutes that count, and the second 54: only that is whole.
func TestSamplesAreWhole(t *testing.T) {
	zone := time.FixedZone("", 3600)
	monday := time.Date(2026, 1, 5, 0, 0, 0, 0, zone).UnixNano()
	var minutes []Minute
	for k := range int64(120) {
		m := Minute{Start: monday + k*minute, Measured: 60, Duty: float64(k)}
		m.Idle = k < 7 || k >= 60 && k < 66
		minutes = append(minutes, m)
	}
	outdoor := Steps{}
	outdoor.Add(monday, 280)
	all := Samples(minutes, []Steps{outdoor}, 60*minute, zone)
	if len(all) != 1 || all[0].Hour != 1 || all[0].At != monday+60*minute || all[0].Drivers[0] != 280 {
		t.Fatalf("samples %+v, want that from one o'clock on Monday", all)
	}
	near(t, "duty", all[0].Duty, (66+119)/2.)
}

// Names of tags come back as they were.
func TestNamesAsKeys(t *testing.T) {
	for _, name := range []string{"OT-1", "on", "~", "a: b", "1", "#3", `wärme "A"`, "network/outdoor temperature", "plant, east", "{x}", "null", "0x1F", "- a"} {
		var back map[string]int
		if err := yaml.Unmarshal([]byte(key(name)+": 1"), &back); err != nil || back[name] != 1 {
			t.Errorf("%q is written %s and read %v, %v", name, key(name), back, err)
		}
	}
}
