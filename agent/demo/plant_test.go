package demo

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/design/expect"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

func creamery(t testing.TB) *site.Site {
	t.Helper()
	s, err := site.Parse(configs.DemoName, configs.Demo)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func newPlant(t testing.TB, s *site.Site, seed uint64) *Plant {
	t.Helper()
	p, err := NewPlant(s, seed)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func samplesAt(t testing.TB, p *Plant, elapsed time.Duration) []Sample {
	t.Helper()
	samples, err := p.At(elapsed)
	if err != nil {
		t.Fatal(err)
	}
	return samples
}

func dutyAt(t testing.TB, p *Plant, load string, elapsed time.Duration) float64 {
	t.Helper()
	duty, err := p.Duty(load, elapsed)
	if err != nil {
		t.Fatal(err)
	}
	return duty
}

// measured is what the samples of one load tell: the SI values of its five
// inputs, and how far noise and the last digit may have moved each.
type measured struct{ value, bound [5]float64 }

func read(s *site.Site, l *site.HeatLoad, samples []Sample) measured {
	var m measured
	st := l.Stream
	for i, src := range []site.Source{st.Flow, st.Inlet, st.Outlet, st.Pressure, st.OutletPressure} {
		m.value[i] = src.Value
		if src.Constant() {
			continue
		}
		tag, x := &s.Tags[src.Tag], samples[src.Tag]
		m.value[i] = tag.Scale*x.Value + tag.Offset
		m.bound[i] = 0.101*tag.Accuracy.HalfWidth(m.value[i]) + 0.5*math.Pow10(-x.Decimals)*tag.Scale
	}
	return m
}

// heat is the duty that follows from the inputs by the heat equation.
func heat(t *testing.T, l *site.HeatLoad, x [5]float64) float64 {
	t.Helper()
	mass, T := x[0], x[1]
	if l.Stream.MeterAtOutlet {
		T = x[2]
	}
	switch l.Stream.FlowKind {
	case unit.VolumeFlow:
		f, err := l.Stream.Fluid.At(T, x[3])
		if err != nil {
			t.Fatal(err)
		}
		mass *= f.Density
	case unit.MolarFlow:
		mass *= l.Stream.Fluid.MolarMass()
	}
	q, err := thermo.StreamHeat(l.Stream.Fluid, mass, x[1], x[3], x[2], x[4])
	if err != nil {
		t.Fatal(err)
	}
	if l.Stream.Gives {
		return -q
	}
	return q
}

// The duty worked from what is published is the true one but for noise and
// rounding, whose bound is worked input by input; over two days they average out.
func TestPublishedSignalsCarryTheTrueDuty(t *testing.T) {
	t.Run("as the site is", func(t *testing.T) { carryTheTrueDuty(t, creamery(t)) })
	t.Run("meter at the outlet", func(t *testing.T) {
		s := creamery(t)
		for i := range s.Loads {
			s.Loads[i].Stream.MeterAtOutlet = true
		}
		carryTheTrueDuty(t, s)
	})
}

func carryTheTrueDuty(t *testing.T, s *site.Site) {
	t.Helper()
	p := newPlant(t, s, 7)
	for i := range s.Loads {
		l := &s.Loads[i]
		var sum, n float64
		for at := time.Duration(0); at < 2*dayLength; at += 7 * time.Minute {
			m, want := read(s, l, samplesAt(t, p, at)), dutyAt(t, p, l.Name, at)
			got := heat(t, l, m.value)
			var bound float64
			for k, b := range m.bound {
				moved := m.value
				moved[k] += b
				bound += 1.02 * math.Abs(heat(t, l, moved)-got)
			}
			if !(math.Abs(got-want) <= bound) {
				t.Errorf("%s after %v: %.1f W from the signals, true %.1f W, want within %.1f W", l.Name, at, got, want, bound)
			}
			if want > 0 {
				sum, n = sum+got/want-1, n+1
			}
		}
		// The standard error of the mean is below 0.15 % / sqrt(400).
		if bias := sum / n; !(math.Abs(bias) <= 3e-4) {
			t.Errorf("%s: signals are off by %.3f %% on average, want 0 within 0.03 %%", l.Name, bias*100)
		}
	}
}

// Every reading of the day lies in its instrument's range and away from boiling.
func TestReadingsStayInRange(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	for at := time.Duration(0); at < dayLength; at += time.Minute {
		samples := samplesAt(t, p, at)
		for i, x := range samples {
			if v := s.Tags[i].Scale*x.Value + s.Tags[i].Offset; v < s.Tags[i].Min || v > s.Tags[i].Max {
				t.Errorf("%s after %v: %g %v is out of its range", s.Tags[i].Name, at, x.Value, s.Tags[i].Unit)
			}
		}
		for i := range s.Loads {
			l := &s.Loads[i]
			x := read(s, l, samples).value
			lo, hi := l.Stream.Fluid.Span(x[3])
			if T := max(x[1], x[2]); T > hi-l.Stream.Margin || min(x[1], x[2]) < lo {
				t.Errorf("%s after %v: %.1f K is no state to book, span %.1f to %.1f K", l.Name, at, T, lo, hi)
			}
		}
	}
}

func TestTheDayGoesAsTold(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	design := map[string]float64{}
	for _, l := range s.Loads {
		design[l.Name] = l.Design.Duty
	}
	for _, tt := range []struct {
		load    string
		at      time.Duration
		least   float64 // share of the design duty
		most    float64
		meaning string
	}{
		{"hot-water", 0, 0.46, 0.48, "night"},
		{"hot-water", rampBegins, 0.46, 0.48, "the ramp begins"},
		{"hot-water", 45 * time.Minute, 0.70, 0.75, "half of the ramp"},
		{"hot-water", rampEnds, 0.98, 1.02, "the ramp is over"},
		{"hot-water", 7 * time.Hour, 0.92, 0.97, "fouling, and within the allowance"},
		{"hot-water", 8*time.Hour + 30*time.Minute, 0.87, 0.92, "fouled beyond the allowance"},
		{"hot-water", 16 * time.Hour, 0.83, 0.87, "fouled"},
		{"hot-water", 19 * time.Hour, 0.42, 0.45, "night, fouled: a longer stay of both sides makes up for some of it"},
		{"hot-water", 23 * time.Hour, 0.46, 0.48, "night, cleaned"},
		{"hot-water", 25 * time.Hour, 0.98, 1.02, "cleaned, the next day"},
		{"dryer-air", 0, 0.58, 0.62, "night"},
		{"dryer-air", 45 * time.Minute, 0.75, 0.85, "half of the ramp"},
		{"chilled-glycol", 0, 0.96, 0.98, "night"},
		{"chilled-glycol", stopBegins, 0, 0, "the pump stops"},
		{"chilled-glycol", stopEnds - time.Second, 0, 0, "the pump is still off"},
		{"chilled-glycol", stopEnds, 0.96, 1.04, "the pump is back"},
	} {
		if share := dutyAt(t, p, tt.load, tt.at) / design[tt.load]; share < tt.least || share > tt.most {
			t.Errorf("%s after %v (%s): %.3f of its design duty, want %g to %g", tt.load, tt.at, tt.meaning, share, tt.least, tt.most)
		}
	}
}

// A meter whose error has a part that does not vanish with the flow still shows
// zero where nothing flows.
func TestStoppedPumpShowsNoFlow(t *testing.T) {
	s := creamery(t)
	flow := s.Loads[1].Stream.Flow.Tag
	s.Tags[flow].Accuracy.Abs = s.Tags[flow].Scale
	p := newPlant(t, s, 7)
	for at := stopBegins; at < stopEnds; at += time.Minute {
		if x := samplesAt(t, p, at)[flow]; x.Value != 0 || x.Condition != Sends {
			t.Errorf("after %v: %+v, want a flow of 0", at, x)
		}
	}
}

// The sum of three even draws: within its bound, around zero, and with a standard
// deviation of a third.
func TestNoise(t *testing.T) {
	const n = 100_000
	x := signal{key: noiseKey(7, "TT-201")}
	var sum, squares float64
	for i := range n {
		v := x.noise(time.Duration(i) * time.Second)
		if !(math.Abs(v) <= 1) {
			t.Fatalf("noise of %g, want at most 1", v)
		}
		sum, squares = sum+v, squares+v*v
	}
	if mean, deviation := sum/n, math.Sqrt(squares/n); !(math.Abs(mean) <= 0.005) || !(math.Abs(deviation-1.0/3) <= 0.005) {
		t.Errorf("noise has mean %.4f and standard deviation %.4f, want 0 and 0.3333", mean, deviation)
	}
	if x.noise(1500*time.Millisecond) != x.noise(time.Second) {
		t.Error("noise changes within a second")
	}
}

// By day, swings keep within the allowance.
func TestSwingsKeepWithinTheAllowance(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	for _, l := range s.Loads[1:3] {
		var least, most float64 = 2, 0
		for at := rampEnds; at < eveningBegins; at += time.Minute {
			if within(at, stopBegins, stopEnds) && l.Name == "chilled-glycol" {
				continue
			}
			share := dutyAt(t, p, l.Name, at) / l.Design.Duty
			least, most = min(least, share), max(most, share)
		}
		if least < 1-l.Design.Allow || most > 1+l.Design.Allow || most-least < 0.2*l.Design.Allow {
			t.Errorf("%s: %.3f to %.3f of its design duty by day, want swings within %.2f", l.Name, least, most, l.Design.Allow)
		}
	}
}

func TestTransmittersFailWhenTold(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	for _, tt := range []struct {
		tag      string
		from, to time.Duration
		want     Condition
	}{
		{"TT-402", silentBegins, silentEnds, Silent},
		{"TT-302", garbleBegins, garbleEnds, Garbled},
	} {
		for at := time.Duration(0); at < dayLength; at += 15 * time.Second {
			for _, x := range samplesAt(t, p, at) {
				want := Sends
				if s.Tags[x.Tag].Name == tt.tag && tt.from <= at && at < tt.to {
					want = tt.want
				} else if x.Condition != Sends && s.Tags[x.Tag].Name != tt.tag {
					continue // the other fault
				}
				if x.Condition != want {
					t.Fatalf("%s after %v: condition %d, want %d", s.Tags[x.Tag].Name, at, x.Condition, want)
				}
			}
		}
	}
	if silentEnds-silentBegins != 6*time.Minute || garbleEnds-garbleBegins != time.Minute || stopEnds-stopBegins != 10*time.Minute {
		t.Error("the faults last 6 min and 1 min and the pump is off for 10 min")
	}
}

// The verdict on the hot water: holding in the morning, short when the exchanger
// has fouled for eight hours, holding again on the next day.
func TestFoulingTurnsTheVerdict(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	l := &s.Loads[0]
	expected := expect.Fixed{Duty: l.Design.Duty}
	judge := design.NewJudge(design.Target{Expect: expected, Allow: l.Design.Allow, Lasting: l.Design.Lasting})
	verdicts := map[time.Duration]design.Verdict{}
	var short time.Duration
	for at := time.Duration(0); at < 26*time.Hour; at += time.Minute {
		duty := dutyAt(t, p, l.Name, at)
		judge.Observe(&design.Minute{Start: int64(at), Whole: true, Duty: duty, Uncertainty: 0.012 * duty}, expected.At(expect.Conditions{}))
		verdicts[at] = judge.Verdict(false, false)
		if short == 0 && at > rampEnds && verdicts[at] == design.Short {
			short = at
		}
	}
	if short < 7*time.Hour+30*time.Minute || short > 8*time.Hour+30*time.Minute {
		t.Errorf("short after %v, want about 8 h", short)
	}
	for at, want := range map[time.Duration]design.Verdict{
		2 * time.Hour: design.Holding, 5 * time.Hour: design.Holding, 10 * time.Hour: design.Short, 16 * time.Hour: design.Short, 25*time.Hour + 30*time.Minute: design.Holding,
	} {
		if verdicts[at] != want {
			t.Errorf("after %v: %v, want %v", at, verdicts[at], want)
		}
	}
}

func TestSameSeedSameDay(t *testing.T) {
	s := creamery(t)
	a, b, other := newPlant(t, s, 7), newPlant(t, s, 7), newPlant(t, s, 8)
	later := samplesAt(t, a, 3*time.Hour) // At keeps no state
	for _, at := range []time.Duration{0, time.Second, 3 * time.Hour, 30 * time.Hour} {
		x := samplesAt(t, a, at)
		if !reflect.DeepEqual(x, samplesAt(t, b, at)) {
			t.Errorf("after %v: two plants of one seed differ", at)
		}
		if at == 3*time.Hour && !reflect.DeepEqual(x, later) {
			t.Errorf("after %v: the same instant differs the second time", at)
		}
		if reflect.DeepEqual(x, samplesAt(t, other, at)) {
			t.Errorf("after %v: another seed makes no difference", at)
		}
		if reflect.DeepEqual(x, samplesAt(t, a, at+dayLength)) {
			t.Errorf("after %v: the noise repeats the next day", at)
		}
	}
	if _, err := a.Duty("steam", 0); err == nil || !strings.Contains(err.Error(), `"hot-water"`) {
		t.Errorf("duty of an unknown load: %v, want an error that names the known", err)
	}
}

func TestWrongSitesAreRefused(t *testing.T) {
	for name, tt := range map[string]struct {
		spoil func(s *site.Site)
		want  string
	}{
		"load missing":       {func(s *site.Site) { s.Loads = s.Loads[:3] }, `no load "milk"`},
		"load unknown":       {func(s *site.Site) { s.Loads[1].Name = "steam" }, `no load "steam"`},
		"no design":          {func(s *site.Site) { s.Loads[0].Design.Duty = 0 }, "design duty"},
		"no design inlet":    {func(s *site.Site) { s.Loads[0].Design.Inlet = 0 }, "design inlet"},
		"no design pressure": {func(s *site.Site) { s.Loads[0].Design.Pressure = 0 }, "design pressure"},
		"constant flow":      {func(s *site.Site) { s.Loads[0].Stream.Flow = site.Source{Tag: -1, Value: 1} }, "not constants"},
		"tag read twice":     {func(s *site.Site) { s.Loads[1].Stream.Flow = s.Loads[0].Stream.Flow }, `"FT-201" is read twice`},
		"spare tag":          {func(s *site.Site) { s.Tags = append(s.Tags, site.Tag{Name: "TT-999", Topic: "x"}) }, `"TT-999" is read by no load`},
		"topic twice":        {func(s *site.Site) { s.Tags[1].Topic = s.Tags[0].Topic }, "share the topic"},
		"warmer than hot": {func(s *site.Site) {
			s.Loads[slices.IndexFunc(s.Loads, func(l site.HeatLoad) bool { return l.Name == coldLoad })].Design.Outlet = 410
		}, "no heat passes"},
		"stamp format":       {func(s *site.Site) { s.Tags[1].TimeFormat = "rfc3339" }, "stamps in ms"},
		"state out of range": {func(s *site.Site) { s.Loads[0].Design.Inlet = 500 }, `hot-water": inlet`},
	} {
		s := creamery(t)
		s.Loads = slices.Clone(s.Loads)
		tt.spoil(s)
		if _, err := NewPlant(s, 1); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%s: %v, want an error with %s", name, err, tt.want)
		}
	}
}
