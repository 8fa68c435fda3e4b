package exchanger

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"
)

func near(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %.7g, want %.7g ± %g", what, got, want, within)
	}
}

// The formulas of Kays and London, Compact Heat Exchangers, worked by another implementation.
// That of crossflow with both streams unmixed is exact here.
func TestEffectiveness(t *testing.T) {
	for _, row := range []struct{ ntu, c, counter, parallel, shell, cross, maxMixed, minMixed, twoShells float64 }{
		{0.5, 0.5, .36227, .35176, .35691, .35783, .35718, .35751, .36091},
		{1, 0.25, .59829, .57080, .58411, .58801, .58470, .58720, .59473},
		{1, 0.75, .53186, .47213, .49952, .51031, .50340, .50516, .52325},
		{1, 1, .50000, .43233, .46267, .47622, .46854, .46854, .48988},
		{2, 0.5, .77460, .63348, .69309, .73241, .70201, .71755, .75223},
		{3, 0.75, .81712, .56843, .65355, .74941, .67955, .69663, .76343},
		{5, 1, .83333, .49998, .58537, .75090, .62963, .62963, .72739},
	} {
		for _, x := range []struct {
			a        Arrangement
			hotIsMin bool
			want     float64
		}{
			{Arrangement{Kind: Counterflow}, true, row.counter}, {Arrangement{Kind: Parallel}, true, row.parallel},
			{Arrangement{Kind: Shells}, true, row.shell}, {Arrangement{Kind: Crossflow}, true, row.cross},
			{Arrangement{Kind: HotMixed}, false, row.maxMixed}, {Arrangement{Kind: ColdMixed}, true, row.maxMixed},
			{Arrangement{Kind: HotMixed}, true, row.minMixed}, {Arrangement{Kind: ColdMixed}, false, row.minMixed},
			{Arrangement{Shells, 2}, true, row.twoShells},
		} {
			near(t, x.a.String(), x.a.Effectiveness(row.ntu, row.c, x.hotIsMin), x.want, 6e-6)
		}
	}
	// Values of an open heat-transfer library at NTU 5 and C 0.7.
	for a, want := range map[Arrangement]float64{
		{Kind: Parallel}: 0.588116, {Kind: Crossflow}: 0.844482, {Kind: Counterflow}: 0.920670, {Kind: Shells}: 0.683498, {Shells, 50}: 0.920506,
	} {
		near(t, a.String(), a.Effectiveness(5, 0.7, true), want, 6e-7)
	}
}

// Near equal capacity rates, and where a stream's is next to none, the closed forms lose no
// digits: ε of counterflow at C = 1 − d is NTU/(1 + NTU)·(1 + d·NTU/2/(1 + NTU)), but for terms
// with d².
func TestEffectivenessNearEqualRates(t *testing.T) {
	for _, ntu := range []float64{0.3, 1, 5, 40} {
		for _, d := range []float64{1e-12, 1e-9, 1e-8} {
			want := ntu / (1 + ntu) * (1 + d*ntu/2/(1+ntu))
			near(t, "counterflow", Arrangement{}.Effectiveness(ntu, 1-d, true), want, 1e-14)
			if got, err := (Arrangement{}).NTU(want, 1-d, true); err != nil || math.Abs(got/ntu-1) > 1e-12 {
				t.Errorf("NTU of counterflow at C = 1 − %g: %v, %v; want %v", d, got, err, ntu)
			}
		}
	}
	for _, a := range []Arrangement{{Shells, 1}, {Shells, 3}, {Kind: Crossflow}, {Kind: HotMixed}, {Kind: ColdMixed}} {
		near(t, a.String()+" at C = 1", a.Effectiveness(2, 1-1e-10, true), a.Effectiveness(2, 1, true), 1e-9)
		near(t, a.String()+" at C = 0", a.Effectiveness(2, 1e-8, true), -math.Expm1(-2), 1e-7)
	}
}

// An exchanger without flow to speak of comes to its limit, and to no more.
func TestEffectivenessFarBeyond(t *testing.T) {
	for kind := Counterflow; kind <= ColdMixed; kind++ {
		for _, c := range []float64{0.01, 0.5, 0.99, 1} {
			a, before := Arrangement{kind, 2}, 0.0
			for _, ntu := range []float64{50, 100, 499, 501, 1e3, 1e5, 1e9} {
				eps, limit := a.Effectiveness(ntu, c, true), a.Limit(c, true)
				if !(eps >= before-3e-6 && eps <= limit+1e-12) {
					t.Errorf("%v at NTU %v and C %v: effectiveness %v, limit %v, before %v", a, ntu, c, eps, limit, before)
				}
				before = eps
			}
			near(t, a.String(), before, a.Limit(c, true), 1e-4)
		}
	}
}

func TestCorrection(t *testing.T) {
	for _, x := range []struct{ p, r, want float64 }{
		{0.2, 1, 0.9895}, {0.3, 1, 0.9686}, {0.4, 1, 0.9209}, {0.5, 1, 0.8023}, {0.5, 0.5, 0.9420}, {0.3, 2, 0.8829}, {0.4, 1.2, 0.8874},
	} {
		near(t, "F", Correction(x.p, x.r, 1), x.want, 6e-5)
	}
	// T 130 to 110, t 15 to 85: an open heat-transfer library.
	near(t, "F", Correction(70.0/115, 20.0/70, 1), 0.943836, 1e-6)
	near(t, "F continuous at R = 1", Correction(0.4, 1+1e-6, 1), Correction(0.4, 1, 1), 1e-5)
}

// duty is the design point of an exchanger by its conductance in two ways.
func TestBooks(t *testing.T) {
	// F. P. Incropera, Fundamentals of Heat and Mass Transfer, example 11.1 (from memory): oil
	// 0.1 kg/s, 2131 J/(kg K), 100 to 60 °C; water 0.2 kg/s, 4178, in at 30 °C.
	q := 0.1 * 2131 * 40
	near(t, "Incropera, duty", q, 8524, 0.5)
	out := 30 + q/(0.2*4178)
	near(t, "Incropera, water out", out, 40.2, 0.05)
	near(t, "Incropera, LMTD", LMTD(100-out, 60-30), 43.2, 0.05)
	// J. P. Holman, Heat Transfer, examples 10-4 and 10-5 (from memory): water 68 kg/min, 35 to
	// 75 °C; oil 110 to 75 °C; U = 320.
	q = 68.0 / 60 * 4180 * 40
	near(t, "Holman, duty", q, 189.5e3, 50)
	near(t, "Holman, LMTD", LMTD(110-75, 75-35), 37.44, 0.005)
	near(t, "Holman, area", q/320/LMTD(35, 40), 15.82, 0.02)
	f := Correction(40.0/75, 35.0/40, 1)
	near(t, "Holman, F", f, 0.81, 0.01) // read from a chart
	// D. Q. Kern, Process Heat Transfer, example 7.3: 390 to 200 °F, 100 to 170 °F.
	near(t, "Kern, LMTD", LMTD(390-170, 200-100), 152.5, 0.5)
	near(t, "Kern, F", Correction(70.0/290, 190.0/70, 1), 0.905, 0.015) // chart
	// Y. A. Çengel, Heat and Mass Transfer (from memory): water 1.2 kg/s, 4.18, 20 to 80 °C; brine 2 kg/s,
	// 4.31, in at 160 °C; U = 640: 301 kW, out at 125 °C, 92.0 K, 5.11 m².
	q = 1.2 * 4180 * 60
	brine := 160 - q/(2*4310)
	near(t, "Çengel, duty", q, 301e3, 100)
	near(t, "Çengel, brine out", brine, 125, 0.15)
	near(t, "Çengel, area", q/640/LMTD(160-80, brine-20), 5.11, 0.005)
	least, c := 1.2*4180.0, 1.2*4180/(2*4310)
	ntu, err := Arrangement{}.NTU(q/least/140, c, false)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "Çengel, NTU", ntu, 0.6524, 5e-5)
	near(t, "Çengel, area by NTU", ntu*least/640, 5.11, 0.005)
	// Counterflow: hot 0.63 kg/s, 2.09, 193 to 65 °C; cold 1 kg/s, 1.67, out at 149; U = 0.7.
	q = 0.63 * 2.09 * 128
	near(t, "counterflow, duty", q, 168.54, 0.005)
	near(t, "counterflow, area", q/0.7/LMTD(193-149, 65-(149-q/1.67)), 8.50, 0.005)
	// Hot 2 kg/s, 2000, 400 to 130 °C; cold 6.857 kg/s, 1050, in at 25 °C.
	cold := 25 + 2*2000*270/(6.857*1050)
	near(t, "shells, LMTD", LMTD(400-cold, 130-25), 157.45, 0.05)
	near(t, "one shell, F", Correction((cold-25)/375, 270/(cold-25), 1), 0.575, 0.002)
	// The same in crossflow, both unmixed: F = 0.85, read from a chart; the ratio of the NTU of
	// counterflow to that of the arrangement, of which the hot stream has the smaller rate.
	eps, ratio := 270.0/375, 2*2000/(6.857*1050)
	counter, _ := Arrangement{}.NTU(eps, ratio, true)
	cross, _ := Arrangement{Kind: Crossflow}.NTU(eps, ratio, true)
	near(t, "crossflow, F", counter/cross, 0.85, 0.01)
	near(t, "two shells, F", Correction((cold-25)/375, 270/(cold-25), 2), 0.927, 0.001)
}

// F by P and R, and ε by NTU and C, are the same exchanger.
func TestTwoMethodsAgree(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := Arrangement{Shells, rapid.IntRange(1, 4).Draw(t, "shells")}
		ntu, c := rapid.Float64Range(0.1, 2).Draw(t, "ntu"), rapid.Float64Range(0.05, 0.95).Draw(t, "c")
		eps := a.Effectiveness(ntu, c, false) // the cold side has the smaller rate
		hotOut, coldOut := 100-eps*c*100, eps*100
		f := Correction(coldOut/100, (100-hotOut)/coldOut, a.Number)
		if got := eps * 100 / LMTD(100-coldOut, hotOut) / f; math.Abs(got/ntu-1) > 1e-9 {
			t.Fatalf("NTU by F %v, want %v", got, ntu)
		}
	})
}

func TestInverse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := Arrangement{Kind(rapid.IntRange(0, 5).Draw(t, "kind")), rapid.IntRange(0, 5).Draw(t, "shells")}
		ntu, c := rapid.Float64Range(0.01, 6).Draw(t, "ntu"), rapid.Float64Range(0, 1).Draw(t, "c")
		hotIsMin := rapid.Bool().Draw(t, "hot")
		eps, limit := a.Effectiveness(ntu, c, hotIsMin), a.Limit(c, hotIsMin)
		if !(eps > 0 && eps < limit) {
			if eps > limit*(1-1e-12) && eps < limit*(1+1e-12) {
				return // at its limit to all digits
			}
			t.Fatalf("%v: effectiveness %v beyond its limit %v", a, eps, limit)
		}
		got, err := a.NTU(eps, c, hotIsMin)
		if limit-eps < 1e-9 {
			return
		}
		if err != nil || math.Abs(got/ntu-1) > 1e-6 || limit-eps > 1e-4 && math.Abs(got/ntu-1) > 1e-10 {
			t.Fatalf("%v: NTU %v, %v; want %v", a, got, err, ntu)
		}
		var limits *LimitError
		if _, err := a.NTU(limit*1.001, c, hotIsMin); !errors.As(err, &limits) {
			t.Fatalf("%v beyond the limit: %v", a, err)
		}
	})
}

// model has cp 4180 J/(kg K) and at its design 2 and 3 kg/s, 90 and 40 °C in, UA = 12 kW/K of
// films of 30 and 40 kW/K and a wall, exponents of 0.8.
var model = Model{
	Hot:  Film{Resistance: 1. / 30e3, Flow: 2, Exponent: 0.8},
	Cold: Film{Resistance: 1. / 40e3, Flow: 3, Exponent: 0.8},
	Wall: 0.025e-3,
}

// state is that of the model with a fouling resistance, by its duty.
func state(t *testing.T, hot, cold, hotIn, coldIn, fouling float64) *State {
	t.Helper()
	m := model
	m.Wall += fouling
	s := &State{Stream{Flow: hot, Cp: 4180, Inlet: hotIn}, Stream{Flow: cold, Cp: 4180, Inlet: coldIn}}
	q, err := m.Duty(s)
	if err != nil {
		t.Fatal(err)
	}
	s.Hot.Outlet, s.Cold.Outlet = hotIn-q/s.Hot.Capacity(), coldIn+q/s.Cold.Capacity()
	return s
}

// Off design, worked by another implementation.
func TestOffDesign(t *testing.T) {
	for _, x := range []struct{ hot, cold, hotIn, coldIn, fouling, ua, eps, duty float64 }{
		{2, 3, 90, 40, 0, 12.000, 0.64799, 270.86},
		{1, 3, 90, 40, 0, 9.2561, 0.83511, 174.54},
		{2, 1.5, 90, 40, 0, 9.8173, 0.65712, 206.01},
		{1, 1.5, 80, 40, 0, 7.9011, 0.72476, 121.18},
		{2, 3, 90, 40, 0.02e-3, 9.6774, 0.58552, 244.75},
	} {
		s := state(t, x.hot, x.cold, x.hotIn, x.coldIn, x.fouling)
		o, err := model.Observe(s, 0.5, 0)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "UA, kW/K", o.Conductance/1e3, x.ua, 6e-5)
		near(t, "effectiveness", o.Effectiveness, x.eps, 6e-6)
		near(t, "duty, kW", o.Duty/1e3, x.duty, 6e-3)
		near(t, "fouling, K/kW", o.Fouling*1e3, x.fouling*1e3, 1e-9)
	}
}

func TestFilmFollowsTemperature(t *testing.T) {
	f := Film{Resistance: 1, Flow: 1, Exponent: 0.8, PerKelvin: 0.01, Temperature: 300}
	near(t, "resistance 10 K warmer", f.At(1, 310), 1/1.1, 1e-12)
	near(t, "resistance at twice the flow", f.At(2, 300), math.Pow(2, -0.8), 1e-12)
}

// The standard uncertainties by sensitivities are the scatter of 20,000 draws (JCGM 101).
func TestErrorsAgainstDraws(t *testing.T) {
	s := state(t, 2, 3, 90, 40, 0.005e-3)
	s.Hot.FlowError, s.Cold.FlowError = 0.02, 0.02
	s.Hot.InletError, s.Hot.OutletError, s.Cold.InletError, s.Cold.OutletError = 0.15, 0.12, 0.1, 0.12
	s.Hot.CpError, s.Cold.CpError = 0.002, 0.003
	const weight = 0.4
	slopes := model.Slopes(s, weight, 0)
	want := s.Errors(&slopes)
	r := rand.New(rand.NewPCG(1, 2))
	truth := model.Tell(s, weight, 0)
	const n = 20_000
	var sum Statistics
	for range n {
		x := *s
		for i := range Readings {
			v, u := x.at(i)
			*v += u * r.NormFloat64()
		}
		d := model.Tell(&x, weight, 0).less(truth, 1)
		sum.Closure += d.Closure * d.Closure / n
		sum.Ratio += d.Ratio * d.Ratio / n
		sum.HotBeyond += d.HotBeyond * d.HotBeyond / n
		sum.ColdBeyond += d.ColdBeyond * d.ColdBeyond / n
		sum.Gives += d.Gives * d.Gives / n
	}
	for what, x := range map[string][2]float64{
		"closure": {sum.Closure, want.Closure}, "ratio": {sum.Ratio, want.Ratio}, "hot beyond": {sum.HotBeyond, want.HotBeyond},
		"cold beyond": {sum.ColdBeyond, want.ColdBeyond}, "gives": {sum.Gives, want.Gives},
	} {
		near(t, what+", draws over sensitivities", math.Sqrt(x[0])/x[1], 1, 0.03)
	}
}

func TestObserveRefuses(t *testing.T) {
	s := state(t, 2, 3, 90, 40, 0)
	s.Cold.Inlet = 95
	if _, err := model.Observe(s, 0.5, 0); !errors.Is(err, ErrNoDrive) {
		t.Errorf("a cold side that enters warmer: %v", err)
	}
	s = state(t, 2, 3, 90, 40, 0)
	s.Hot.Outlet, s.Cold.Outlet = 30, 80
	var limit *LimitError
	if _, err := model.Observe(s, 0.5, 0); !errors.As(err, &limit) {
		t.Errorf("outlets that cannot be: %v", err)
	}
	near(t, "gain at ε = 0.9 and C = 0.5", gain(t, 0.9, 0.5), 4.8, 0.05)
}

func gain(t *testing.T, eps, c float64) float64 {
	t.Helper()
	s := &State{Stream{Flow: 1, Cp: 1000, Inlet: 100}, Stream{Flow: 1 / c, Cp: 1000}}
	s.Hot.Outlet, s.Cold.Outlet = 100-100*eps, 100*eps*c
	o, err := model.Observe(s, 0.5, 0)
	if err != nil {
		t.Fatal(err)
	}
	return o.Gain
}

func BenchmarkObserve(b *testing.B) {
	for _, a := range []Arrangement{{}, {Shells, 2}, {Kind: Crossflow}, {Kind: HotMixed}} {
		b.Run(a.String(), func(b *testing.B) { benchmarkObserve(b, a) })
	}
}

func benchmarkObserve(b *testing.B, a Arrangement) {
	m := model
	m.Arrangement = a
	s := &State{Stream{2, 4180, 90, 57.6, 0.02, 0.002, 0.1, 0.1}, Stream{3, 4180, 40, 61.6, 0.03, 0.002, 0.1, 0.1}}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := m.Observe(s, 0.5, 0); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkSlopes(b *testing.B) {
	s := &State{Stream{2, 4180, 90, 57.6, 0.02, 0.002, 0.1, 0.1}, Stream{3, 4180, 40, 61.6, 0.03, 0.002, 0.1, 0.1}}
	b.ReportAllocs()
	for b.Loop() {
		model.Slopes(s, 0.5, 0)
	}
}

// The uncertainties of what is beyond are those that all slopes give.
func TestBeyondErrors(t *testing.T) {
	m := Model{Arrangement: Arrangement{Kind: Counterflow}, Hot: Film{Resistance: 1 / 30e3, Flow: 2, Exponent: 0.8}, Cold: Film{Resistance: 1 / 40e3, Flow: 3, Exponent: 0.8, PerKelvin: 0.004, Temperature: 330}, Wall: 25e-6}
	s := State{
		Hot:  Stream{Flow: 1.8, Cp: 4180, Inlet: 361, Outlet: 330, FlowError: 0.02, CpError: 0.003, InletError: 0.2, OutletError: 0.1},
		Cold: Stream{Flow: 2.9, Cp: 4170, Inlet: 312, Outlet: 331, FlowError: 0.03, InletError: 0.1, OutletError: 0.3},
	}
	slopes := m.Slopes(&s, 0.5, 2e3)
	want := s.Errors(&slopes)
	if hot, cold := m.BeyondErrors(&s); !(hot > 0) || math.Abs(hot/want.HotBeyond-1) > 1e-9 || math.Abs(cold/want.ColdBeyond-1) > 1e-9 {
		t.Errorf("%g and %g W, want %g and %g W", hot, cold, want.HotBeyond, want.ColdBeyond)
	}
}
