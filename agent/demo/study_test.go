package demo

import (
	"flag"
	"fmt"
	"math"
	"runtime"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"gonum.org/v1/gonum/stat/distuv"

	"heatreeve/agent/design"
	"heatreeve/agent/design/cause"
	"heatreeve/agent/site"
)

var seeds = flag.Int("seeds", 8, "of each scenario in the study of verdicts; 200 in full")

const (
	day  = 24 * time.Hour
	year = 365.25 * 24 * time.Hour
	// begins is when things go wrong: the monitors have seen the plant in order until then.
	begins = 7 * day
	// chosen is how many false warnings a year are put up with, of each of the figures that are
	// followed: the duties of both loads, the conductance, and the closure.
	chosen, figures = 1, 4
	platesName      = "plates"
)

// studied is a scenario with what its outcome is held against.
type studied struct {
	Scenario
	runs time.Duration // at most
	side int           // whose warnings and causes are looked at
	// first is what should be looked at first, and tells whether the figures of that load by
	// itself can tell it from all else.
	first cause.Kind
	tells bool
	// look is when to look at the causes where there is nothing to warn of; 0 for at the
	// warning.
	look time.Duration
}

// scenarios were chosen, and which of them the evidence can tell, before any result was seen.
// What can be told of a load by itself is what runs away from its design point, moves, rests
// or stands in the wrong order. That one of its instruments is off by less than the
// uncertainty stated of all cannot be. The film on the plates can be told by both sides of
// the exchanger together, after a week in order.
func scenarios() []studied {
	of := func(s Scenario, runs time.Duration, side int, first cause.Kind) studied {
		s.Begins = begins
		return studied{Scenario: s, runs: runs, side: side, first: first}
	}
	told := func(c studied, look time.Duration) studied {
		c.tells, c.look = true, look
		return c
	}
	return []studied{
		of(Scenario{Name: "clean"}, 37*day, hotSide, ""),
		told(of(Scenario{Name: "pump off", Stops: true}, 14*day, hotSide, cause.FlowAway), begins+30*time.Minute),
		told(of(Scenario{Name: "unsteady", Sways: true}, 14*day, hotSide, cause.Unsteady), begins+time.Hour),
		told(of(Scenario{Name: "fouling in 15 d", FoulsIn: 15 * day}, 27*day, hotSide, cause.Fouling), 0),
		told(of(Scenario{Name: "fouling in 30 d", FoulsIn: 30 * day}, 47*day, hotSide, cause.Fouling), 0),
		told(of(Scenario{Name: "fouling in 60 d", FoulsIn: 60 * day}, 87*day, hotSide, cause.Fouling), 0),
		of(Scenario{Name: "hot flow +3 %", Flow: [2]float64{0.03, 0}}, 11*day, hotSide, cause.FlowMeter),
		of(Scenario{Name: "milk flow +3 %", Flow: [2]float64{0, 0.03}}, 11*day, coldSide, cause.FlowMeter),
		of(Scenario{Name: "hot inlet +0.5 K", Inlet: [2]float64{0.5, 0}}, 11*day, hotSide, cause.InletSensor),
		of(Scenario{Name: "hot outlet +0.5 K", Outlet: [2]float64{0.5, 0}}, 11*day, hotSide, cause.OutletSensor),
		of(Scenario{Name: "milk inlet +0.5 K", Inlet: [2]float64{0, 0.5}}, 11*day, coldSide, cause.InletSensor),
		of(Scenario{Name: "milk outlet +0.5 K", Outlet: [2]float64{0, 0.5}}, 11*day, coldSide, cause.OutletSensor),
		told(of(Scenario{Name: "swapped", Swapped: true}, 8*day, hotSide, cause.Swapped), 0),
		told(of(Scenario{Name: "low difference", Surplus: 0.5, Bypass: 0.5}, 8*day, hotSide, cause.LowDifference), 0),
	}
}

// outcome is what became of one trial.
type outcome struct {
	warned time.Duration // since it went wrong; 0 for never
	lost   float64       // of the conductance by then
	looked bool          // the causes were
	causes []cause.Cause
	raised int // warnings on both loads where nothing was wrong with their duties
	sound  time.Duration
	err    error
}

// judgesOf are those of the two loads that meet in the exchanger.
func judgesOf(s *site.Site, p *Plant) *design.Plant {
	var cfg design.Config
	for side, i := range p.exchange.sides {
		l := &s.Loads[i]
		tag := func(src site.Source) string { return s.Tags[src.Tag].Name }
		cfg.Loads = append(cfg.Loads, design.Target{
			Name: l.Name, Allow: l.Design.Allow, Lasting: l.Design.Lasting, FalseWarnings: chosen, ByExchanger: true,
			Point: design.Point{Flow: p.exchange.flows[side], Inlet: l.Design.Inlet, Outlet: l.Design.Outlet},
			Tags:  design.Tags{Flow: tag(l.Stream.Flow), Inlet: tag(l.Stream.Inlet), Outlet: tag(l.Stream.Outlet)},
		})
	}
	cfg.Exchangers = []design.Exchanger{{
		Name: platesName, Hot: hotSide, Cold: coldSide, Model: p.exchange.model(), Uncertainty: cleanError, Loss: p.exchange.loss,
		Lasting: cfg.Loads[hotSide].Lasting, FalseWarnings: chosen,
	}}
	return design.NewPlant(cfg)
}

// try runs one trial until what goes wrong was warned of, or to its end.
func try(judges *design.Plant, p *Plant, c *studied, seed uint64) (o outcome) {
	trial, err := p.NewTrial(c.Scenario, seed)
	if err != nil {
		return outcome{err: err}
	}
	fault := c.first != "" && c.look == 0
	for at := time.Duration(0); at < c.runs && !(fault && o.warned > 0); at += time.Minute {
		minutes, truth, err := trial.Next()
		if err != nil {
			return outcome{err: err}
		}
		for side := range minutes {
			judges.Observe(side, minutes[side], int(at/time.Hour)%168)
		}
		right := !fault || at < c.Begins
		if right {
			o.sound += time.Minute
		}
		for _, w := range judges.Changed() {
			switch {
			case w.End != 0:
			case right:
				o.raised++
			case o.warned == 0 && (w.Kind.OfExchanger() || w.Subject == [...]string{hotLoad, coldLoad}[c.side]):
				o.warned, o.lost = at-c.Begins+time.Minute, truth.Lost
				o.looked, o.causes = true, w.Causes
			}
		}
		if c.look != 0 && at == c.look {
			o.looked, o.causes = true, cause.Rank(judges.Evidence(c.side))
		}
	}
	return o
}

// study runs every scenario with as many seeds.
func study(t *testing.T, cases []studied, seeds int) [][]outcome {
	t.Helper()
	s := creamery(t)
	p := newPlant(t, s, 1)
	all := make([][]outcome, len(cases))
	for i := range all {
		all[i] = make([]outcome, seeds)
	}
	jobs := make(chan [2]int)
	var wg sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		wg.Go(func() {
			for j := range jobs {
				all[j[0]][j[1]] = try(judgesOf(s, p), p, &cases[j[0]], uint64(j[1]))
			}
		})
	}
	for seed := range seeds {
		for i := range cases {
			jobs <- [2]int{i, seed}
		}
	}
	close(jobs)
	wg.Wait()
	return all
}

// tally is what the trials of one scenario come to.
type tally struct {
	trials, warned        int
	delays                []time.Duration // sorted
	lost                  []float64       // sorted
	raised                int
	years                 float64
	looked, right, unsure int
}

func tallyOf(t *testing.T, c *studied, outcomes []outcome) tally {
	t.Helper()
	x := tally{trials: len(outcomes)}
	for i, o := range outcomes {
		if o.err != nil {
			t.Fatalf("%s, seed %d: %v", c.Name, i, o.err)
		}
		x.raised += o.raised
		x.years += float64(o.sound) / float64(year)
		if o.warned > 0 {
			x.warned++
			x.delays, x.lost = append(x.delays, o.warned), append(x.lost, o.lost)
		}
		if !o.looked || c.first == "" {
			continue
		}
		x.looked++
		switch verdictOn(o.causes, c.first) {
		case right:
			x.right++
		case unsure:
			x.unsure++
		}
	}
	slices.Sort(x.delays)
	slices.Sort(x.lost)
	return x
}

type ranked uint8

const (
	wrong ranked = iota
	right
	unsure
)

// verdictOn tells whether the causes name the truth first, or say that it cannot be told.
func verdictOn(causes []cause.Cause, truth cause.Kind) ranked {
	switch {
	case len(causes) == 0:
		return unsure
	case causes[0].Kind == truth:
		return right
	case causes[0].Kind == cause.ExpectationUnsure, causes[0].Kind == cause.InstrumentsUnsure, slices.Contains(causes[0].Alike, truth):
		return unsure
	}
	return wrong
}

// quantile is that of sorted values, by rank.
func quantile[T any](sorted []T, q float64) T {
	return sorted[min(len(sorted)-1, int(q*float64(len(sorted))))]
}

// most is the upper end of the interval in which 97.5 % of Poisson counts around the mean lie.
func most(mean float64) int {
	n := 0
	for p := (distuv.Poisson{Lambda: mean}); p.CDF(float64(n)) < 0.975; n++ {
	}
	return n
}

// rate writes warnings a year with the exact interval of 95 % of a Poisson count (F. Garwood,
// Biometrika 28, 1936; from memory).
func rate(n int, years float64) string {
	low := 0.0
	if n > 0 {
		low = distuv.ChiSquared{K: float64(2 * n)}.Quantile(0.025) / 2
	}
	high := distuv.ChiSquared{K: float64(2*n + 2)}.Quantile(0.975) / 2
	return fmt.Sprintf("%.2f (%.2f to %.2f)", float64(n)/years, low/years, high/years)
}

func share(n, of int) string {
	if of == 0 {
		return "-"
	}
	return fmt.Sprintf("%.0f %%", 100*float64(n)/float64(of))
}

// The study: how soon what goes wrong is warned of, how often nothing is, and whether what is
// told to be looked at first is what is wrong. `go test -v -args -seeds 200` prints it in full.
func TestStudyOfVerdicts(t *testing.T) {
	n := *seeds
	if raced {
		n = 2
	}
	cases := scenarios()
	outcomes := study(t, cases, n)
	var b strings.Builder
	fmt.Fprintf(&b, "%d seeds each\n%-19s %7s %9s %9s %9s %22s %6s %6s %6s\n", n, "", "warned", "median h", "90 % h", "UA lost", "false a year", "right", "unsure", "wrong")
	for i := range cases {
		c := &cases[i]
		x := tallyOf(t, c, outcomes[i])
		median, late, lost := "-", "-", "-"
		if x.warned > 0 {
			median, late = fmt.Sprintf("%.1f", quantile(x.delays, 0.5).Hours()), fmt.Sprintf("%.1f", quantile(x.delays, 0.9).Hours())
			if c.FoulsIn > 0 {
				lost = fmt.Sprintf("< %.1f %%", math.Ceil(1000*quantile(x.lost, 1))/10)
			}
		}
		fmt.Fprintf(&b, "%-19s %7s %9s %9s %9s %22s %6s %6s %6s\n", c.Name, share(x.warned, x.trials), median, late, lost,
			rate(x.raised, x.years), share(x.right, x.looked), share(x.unsure, x.looked), share(x.looked-x.right-x.unsure, x.looked))
		c.hold(t, &x)
	}
	t.Log(b.String())
}

// hold holds a tally against the bounds.
func (c *studied) hold(t *testing.T, x *tally) {
	t.Helper()
	if bound := most(chosen * figures * x.years); x.raised > bound {
		t.Errorf("%s: %d false warnings in %.2f years, want %d or fewer of the %d a year chosen", c.Name, x.raised, x.years, bound, chosen*figures)
	}
	if c.FoulsIn > 0 && (x.warned < x.trials || quantile(x.lost, 1) >= 0.12) {
		t.Errorf("%s: %d of %d warned, at up to %.3f of UA lost, want all before 0.12", c.Name, x.warned, x.trials, x.lost)
	}
	if told := x.looked - x.unsure; c.tells && (x.looked < x.trials || x.right == 0 || float64(x.right) < 0.85*float64(told)) {
		t.Errorf("%s: %d of %d looked at; of %d that tell one cause from others %d name what is wrong, want 85 %%", c.Name, x.looked, x.trials, told, x.right)
	}
}
