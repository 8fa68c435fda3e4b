package loads

import (
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/ingest/quality"

	"pgregory.net/rapid"
)

// telling is the plant with a counter that tells what has passed since its last message.
func telling() Config {
	cfg := countingPlant()
	cfg.Tags[flow].Counter = &Counter{Largest: 10, Each: true}
	return cfg
}

// Amounts of 4, 2 and 30 kg, of which the first is of a time that nobody knows, and the second
// and third come within a step of the grid: 32 kg in 40 s, over 20 K.
func TestAmountsAddUp(t *testing.T) {
	e := engine(t, telling())
	e.Advance(Beat{append(counts(0, 4), temps(0, 350, 330)...), through(20)}, nil)
	l := accounted(t, e, 0, 0, 0, 20)
	if f := l.Figure; f.Fault != NoReading || !strings.Contains(f.Reason, "has told one count") {
		t.Errorf("after the first: fault %v, reason %q", f.Fault, f.Reason)
	}
	e.Advance(Beat{slices.Concat(counts(39.2, 2), counts(39.9, 30)), through(41)}, nil)
	l = accounted(t, e, 40, 0, 0, 1)
	near(t, "given", l.Given, 32*80e3, 1e-6)
	near(t, "live flow", l.Figure.MassFlow, 0.8, 1e-12)
	e.Advance(Beat{counts(50, 5), through(51)}, nil)
	near(t, "given later", accounted(t, e, 50, 0, 0, 1).Given, 37*80e3, 1e-6)
}

// What comes twice counts once, in whatever step of the grid, and what comes late is counted
// as late and is in no figure.
func TestAmountsTwiceAndLate(t *testing.T) {
	e := engine(t, telling())
	e.Advance(Beat{append(counts(0, 4), temps(0, 350, 330)...), through(1)}, nil)
	twice := slices.Concat(counts(9.2, 1), counts(9.5, 2), counts(9.2, 1), counts(9.5, 2))
	e.Advance(Beat{twice, through(5)}, nil)
	e.Advance(Beat{append(twice, counts(9.9, 3)...), through(11)}, nil)
	e.Advance(Beat{append(twice, counts(9.7, 100)...), through(12)}, nil)
	near(t, "given", accounted(t, e, 10, 0, 0, 2).Given, 6*80e3, 1e-6)
	if got, want := e.Snapshot().Tags[flow].Tally, (Tally{Repeated: 2 + 4 + 4, Late: 1}); got != want {
		t.Errorf("tally %+v, want %+v", got, want)
	}
}

// A bad message has an amount that nobody knows: the time up to the next good one is missing,
// whatever the reason, also where both fall to one step of the grid.
func TestAmountThatIsBad(t *testing.T) {
	for _, at := range []float64{15, 19.5} {
		e := engine(t, telling())
		e.Advance(Beat{append(counts(0, 4), temps(0, 350, 330)...), through(1)}, nil)
		bad := Reading{Tag: flow, At: through(at), Mark: quality.NoValue}
		e.Advance(Beat{slices.Concat(counts(10, 10), []Reading{bad}, counts(19.9, 10), counts(30, 10), counts(40, 20)), through(41)}, nil)
		l := e.Snapshot().Loads[0]
		lost := map[float64]int64{15: 10, 19.5: 20}[at] // where both fall to one step, no good one is held there
		if l.Missing != lost*second || l.Measured != (40-lost)*second {
			t.Errorf("bad at %v s: %v s missing, %v s measured; want %v and %v", at, l.Missing/second, l.Measured/second, lost, 40-lost)
		}
		near(t, "given", l.Given, (10+20+float64(20-lost))*80e3, 1e-6)
	}
}

func TestAmountsBeyondBelief(t *testing.T) {
	e := engine(t, telling())
	for i, kg := range []float64{4, 20, math.MaxFloat64, -5, 30} {
		s := float64(20 * i)
		e.Advance(Beat{append(counts(s, kg), temps(s, 350, 330)...), through(s + 1)}, nil)
	}
	near(t, "given", accounted(t, e, 40, 0, 40, 1).Given, 50*80e3, 1e-6)
	if got, want := e.Snapshot().Tags[flow].Tally, (Tally{Reset: 1, Implausible: 1}); got != want {
		t.Errorf("tally %+v, want %+v", got, want)
	}
}

// A step of 6 kg blurs an amount as it does the difference of two totals.
func TestResolutionOfAmounts(t *testing.T) {
	var random [2]float64
	for i, each := range []bool{false, true} {
		cfg := countingPlant()
		cfg.Tags[flow].Resolution, cfg.Tags[flow].Counter.Each = 6, each
		e := engine(t, cfg)
		var closed []Minute
		for s := 0.0; s <= 120; s += 20 {
			kg := 2 * s
			if each {
				kg = 40
			}
			closed = e.Advance(Beat{append(counts(s, kg), temps(s, 350, 330)...), through(s + 1)}, closed)
		}
		random[i] = closed[0].Random
	}
	near(t, "variance", random[1], random[0], 1e-6)
	blur := 80e3 * 6 / math.Sqrt(6)
	near(t, "variance by hand", random[1], 3*blur*blur, 1e-3)
}

// meteredTwice are two plants of one load with a witness and bridges: one whose meters show
// totals, and one whose meters tell what passed since the last message.
func meteredTwice(onChange bool) (totals, amounts Config) {
	cfg := mixedPlant(second)
	cfg.Loads = cfg.Loads[1:2]
	for _, i := range []int{mixCount, mixEnergy} {
		cfg.Tags[i].Counter = &Counter{}
	}
	cfg.Tags[mixCount].OnChange, cfg.Tags[mixCount].Alive = onChange, mixAlive
	amounts = cfg
	amounts.Tags = slices.Clone(cfg.Tags)
	for _, i := range []int{mixCount, mixEnergy} {
		amounts.Tags[i].Counter = &Counter{Each: true}
	}
	return cfg, amounts
}

// messages draws readings of both plants, in order of their stamps, which differ: pulses of half
// a kilogram and of 65,536 J, many of them within a step of the grid, and times without any. All their sums are exact.
func messages(t *rapid.T) (totals, amounts []Reading) {
	for _, r := range mixedCourse(t) {
		if r.Tag != mixCount && r.Tag != mixEnergy {
			totals, amounts = append(totals, r), append(amounts, r)
		}
	}
	for _, tag := range []int{mixCount, mixEnergy} {
		worth := map[int]float64{mixCount: 0.5, mixEnergy: 65536}[tag]
		total := 100 * worth
		for s := rapid.Int64Range(0, 5e9).Draw(t, "first"); s < 600e9; {
			n := float64(rapid.IntRange(0, 3).Draw(t, "pulses"))
			total += n * worth
			totals = append(totals, Reading{Tag: tag, At: epoch + s, Value: total})
			amounts = append(amounts, Reading{Tag: tag, At: epoch + s, Value: n * worth})
			s += rapid.Int64Range(1, rapid.SampledFrom([]int64{3e8, 9e9}).Draw(t, "pace")).Draw(t, "step")
			if rapid.IntRange(0, 150).Draw(t, "gap") == 0 {
				s += rapid.Int64Range(10e9, 120e9).Draw(t, "long")
			}
		}
	}
	for _, all := range [][]Reading{totals, amounts} {
		slices.SortStableFunc(all, func(a, b Reading) int { return int(a.At - b.At) })
	}
	return totals, amounts
}

// Amounts keep the same accounts, to the last bit, as the register that shows their sum;
// and no order within the lateness, cut into beats, restart at any point or second delivery
// changes a bit of them.
func TestAmountsAreDifferencesOfTotals(t *testing.T) {
	end := Beat{nil, epoch + 1200*second}
	var seen Minute
	rapid.Check(t, func(t *rapid.T) {
		cfgOfTotals, cfg := meteredTwice(rapid.Bool().Draw(t, "on change"))
		totals, readings := messages(t)
		plain, err := New(cfgOfTotals)
		if err != nil {
			t.Fatal(err)
		}
		var want ledger
		want.keep(t, plain, totals, 0, func() int { return 1 })
		want.take(t, plain, end)

		delay := make(map[Reading]int64)
		for _, r := range readings {
			delay[r] = r.At + rapid.Int64Range(0, lateness-1).Draw(t, "delay")
		}
		slices.SortStableFunc(readings, func(a, b Reading) int { return int(delay[a] - delay[b]) })
		cut := func() int { return rapid.IntRange(1, 80).Draw(t, "beat") }
		e, err := New(cfg)
		if err != nil {
			t.Fatal(err)
		}
		var got ledger
		var newest int64
		from := 0
		for range 3 {
			to := rapid.IntRange(from, len(readings)).Draw(t, "restart")
			newest = got.keep(t, e, readings[max(0, from-20):to], newest, cut)
			e = restart(t, cfg, e, readings[:to])
			from = to
		}
		got.keep(t, e, readings[max(0, from-20):], newest, cut)
		got.take(t, e, end)
		got.sums(t)
		got.check(t, &want)
		for _, m := range got.minutes[0] {
			seen.Measured += m.Measured - m.Idle
			seen.Idle += m.Idle
			seen.Bridged += m.Bridged
			seen.Compared += m.Compared
		}
	})
	if seen.Measured == 0 || seen.Idle == 0 || seen.Bridged == 0 || seen.Compared == 0 {
		t.Errorf("the courses drawn do not show everything: %+v", seen)
	}
}

// Messages that tell amounts are kept one by one while they wait, and event time is pressed
// on before there is no more room for them.
func TestManyAmountsWait(t *testing.T) {
	e := engine(t, telling())
	e.Advance(Beat{append(counts(0, 1), temps(0, 350, 330)...), through(1)}, nil)
	var rr []Reading
	for i := range maxPending {
		rr = append(rr, Reading{Tag: flow, At: through(2) + int64(i)*1e6, Value: 0.001})
	}
	e.Advance(Beat{rr, through(1)}, nil)
	if at := e.Relief(1); at < through(2) {
		t.Errorf("relief at %d; want after %d", at, through(2))
	}
	e.Advance(Beat{temps(6, 350, 330), through(8)}, nil)
	near(t, "given", e.Snapshot().Loads[0].Given, 0.001*maxPending*80e3, 1)
	if y := e.Snapshot().Tags[flow].Tally; y != (Tally{}) {
		t.Errorf("tally %+v, want none", y)
	}
}
