package expect

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

const hour = int64(3600e9)

// norris is a set of the NIST Statistical Reference Datasets, linear regression, lower level of
// difficulty (NIST 1979): y and x of 36 ozone monitors' calibrations; written from memory, and
// held to the certified values, which a wrong number would miss.
var norris = [][2]float64{
	{0.1, 0.2}, {338.8, 337.4}, {118.1, 118.2}, {888.0, 884.6}, {9.2, 10.1}, {228.1, 226.5}, {668.5, 666.3}, {998.5, 996.3}, {449.1, 448.6},
	{778.9, 777.0}, {559.2, 558.2}, {0.3, 0.4}, {0.1, 0.6}, {778.1, 775.5}, {668.8, 666.9}, {339.3, 338.0}, {448.9, 447.5}, {10.8, 11.6},
	{557.7, 556.0}, {228.3, 228.1}, {998.0, 995.8}, {888.8, 887.6}, {119.6, 120.2}, {0.3, 0.3}, {0.6, 0.3}, {557.6, 556.8}, {339.3, 339.1},
	{888.0, 887.2}, {998.5, 999.0}, {778.9, 779.0}, {10.2, 11.1}, {117.6, 118.3}, {228.9, 229.2}, {668.4, 669.1}, {449.2, 448.9}, {0.2, 0.5},
}

func TestLeastSquaresOfNorris(t *testing.T) {
	var samples []Sample
	for _, p := range norris {
		samples = append(samples, Sample{Drivers: []float64{p[1]}, Duty: p[0]})
	}
	o := Options{Scales: []Scale{{Tag: "X"}}, Span: hour}
	m, err := solve(samples, shape{habit: NoHabit}, o)
	if err != nil {
		t.Fatal(err)
	}
	b := m.baseline(samples, o)
	near(t, "slope", b.Terms[0].Slope, 1.00211681802045, 1e-12)
	near(t, "its standard uncertainty", b.Terms[0].Error, 0.429796848199937e-3, 1e-13)
	near(t, "intercept", b.Duty-b.Terms[0].Slope*b.Terms[0].Centre, -0.262323073774029, 1e-10)
	near(t, "residual standard deviation", b.Residual, 0.884796396144373, 1e-11)
	var fit Fit
	m.tell(&fit, samples)
	near(t, "R²", fit.R2, 0.999993745883712, 1e-12)
}

// plant makes samples of 500 kW − 20 kW/K·(T − 273.15 K) + 3 kW/(kg/s)·m, with bend, habit and
// noise as asked for, over so many hours.
type plant struct {
	hours       int
	noise, rho  float64 // standard deviation, W, and correlation of successive hours
	limit       float64 // of heating, K; 0 for none
	night       float64 // W that a night is less
	seed        uint64
	together    bool // both drivers go the same way
	outliers    int  // hours of 3 MW
	constantOne bool
}

func (p plant) samples() (all []Sample) {
	r := rand.New(rand.NewPCG(p.seed, 1))
	e := 0.0
	for h := range p.hours {
		temperature := 275 + 8*math.Sin(float64(h)/130) + 4*math.Sin(2*math.Pi*float64(h)/24) + r.NormFloat64()
		rate := 5 + 2*r.Float64()
		if p.together {
			rate = temperature / 50
		}
		if p.constantOne {
			rate = 5
		}
		z := temperature - 273.15
		if p.limit > 0 {
			z = -max(0, p.limit-temperature)
		}
		e = p.rho*e + math.Sqrt(1-p.rho*p.rho)*p.noise*r.NormFloat64()
		duty := 500e3 - 20e3*z + 3e3*rate + e
		if h%24 < 6 {
			duty -= p.night
		}
		if h >= 50 && h < 50+p.outliers {
			duty = 3e6
		}
		all = append(all, Sample{At: int64(h) * hour, Hour: h % HoursAWeek, Drivers: []float64{temperature, rate}, Duty: duty})
	}
	return all
}

func options(drivers int) Options {
	return Options{Scales: []Scale{outdoor, {Tag: "PR", Unit: "kg/s"}}[:drivers], Span: hour}
}

func TestLearnFindsThePlant(t *testing.T) {
	for _, tt := range []struct {
		name  string
		p     plant
		habit Habit
		bend  Bend
	}{
		{"a line", plant{hours: 1400, noise: 10e3}, NoHabit, Straight},
		{"with a limit", plant{hours: 1400, noise: 10e3, limit: 279}, NoHabit, Below},
		{"with nights", plant{hours: 1400, noise: 10e3, night: 80e3}, DayHabit, Straight},
		{"with all of it, and outliers", plant{hours: 1400, noise: 10e3, night: 80e3, limit: 279, outliers: 30}, DayHabit, Below},
	} {
		b, fit, err := Learn(tt.p.samples(), options(2))
		if err != nil {
			t.Fatalf("%s: %v", tt.name, err)
		}
		if err := b.Check(); err != nil {
			t.Errorf("%s: %v", tt.name, err)
		}
		slope := -20e3
		if tt.bend == Below {
			slope = 20e3
			near(t, tt.name+": limit", b.Terms[0].Limit, tt.p.limit, 0.4)
		}
		if fit.Habit != tt.habit || b.Terms[0].Bend != tt.bend || fit.Excluded < tt.p.outliers || fit.Excluded > tt.p.outliers+20 {
			t.Errorf("%s: habit %v, bend %d, %d excluded; want %v, %d, %d or a few more", tt.name, fit.Habit, b.Terms[0].Bend, fit.Excluded, tt.habit, tt.bend, tt.p.outliers)
		}
		near(t, tt.name+": slope", b.Terms[0].Slope, slope, 500)
		near(t, tt.name+": slope of the rate", b.Terms[1].Slope, 3e3, 4*b.Terms[1].Error)
		near(t, tt.name+": residual", b.Residual, 10e3, 700)
		if tt.p.night > 0 {
			near(t, tt.name+": a night less a day", b.Hours[3]-b.Hours[12], -80e3, 6e3)
		}
		again, _, _ := Learn(tt.p.samples(), options(2))
		if again.Duty != b.Duty || again.Terms[0] != b.Terms[0] {
			t.Errorf("%s: learned again is another", tt.name)
		}
	}
}

// Twice the standard deviation about a baseline holds 95.45 % of new samples, also of a
// baseline that was learned from few; and half a year's mean lies within twice what lasts.
func TestIntervalHolds(t *testing.T) {
	inside, all := 0, 0
	for seed := range uint64(400) {
		s := plant{hours: 60, noise: 10e3, seed: seed}.samples()
		o := options(1)
		o.Habit, o.Straight = NoHabit, true
		for i := range s { // what the rate does is not learned, and not there
			s[i].Duty -= 3e3 * s[i].Drivers[1]
		}
		m, err := solve(s[:30], shape{habit: NoHabit}, o)
		if err != nil {
			t.Fatal(err)
		}
		m.lag = 0 // as it is; what thirty samples tell of it scatters
		b := m.baseline(s[:30], o)
		for _, x := range s[30:] {
			c := Conditions{Drivers: x.Drivers}
			if e := b.At(c); e.Known {
				all++
				if math.Abs(x.Duty-e.Duty) < 2*b.Interval(c) {
					inside++
				}
			}
		}
	}
	near(t, "share inside the interval", float64(inside)/float64(all), 0.9545, 0.012)
}

// A window of an hour has all of an hourly residual, whether or not one tells the next, and
// what the coefficients leave open lasts: of n = 16 samples with ρ = 0.6 four count.
func TestWhatLastsOfABaseline(t *testing.T) {
	b := Baseline{Duty: 1e5, Terms: []Term{{Scale: outdoor, Low: 260, High: 280, Centre: 270, Slope: -1e3, Error: 30}}, Residual: 1e3, Span: 60}
	for rho, want := range map[float64]float64{0: 250, 0.6: 500, -0.5: 250} {
		b.Samples, b.Cell, b.Lag = 16, 16, rho
		wide := b.widening()
		e := b.At(Conditions{Drivers: []float64{270}})
		if !e.Joint {
			t.Fatal("a baseline is of the same instruments, and does not say so")
		}
		near(t, "what lasts", e.DeviationLasting, wide*want, 1e-9)
		near(t, "what does not, in an hour", math.Sqrt(e.Random/60), wide*1e3, 1e-9)
		cold := b.At(Conditions{Drivers: []float64{265}})
		near(t, "what lasts five kelvins on", cold.DeviationLasting, wide*math.Hypot(want, 150), 1e-9)
	}
	b.Samples, b.Lag = 17, 0 // Student's t for 95.45 % and 15 degrees of freedom is 2.18: JCGM 100:2008, table G.2
	near(t, "half of Student's t", b.widening(), 2.181/2, 1e-3)
}

func TestBaselineRefusesWhatItDidNotLearn(t *testing.T) {
	b := Baseline{Terms: []Term{{Scale: outdoor, Low: 263.15, High: 283.15}}, Residual: 1, Samples: 100, Cell: 100, Span: 60}
	for c, known := range map[float64]bool{-10.9: true, -11.1: false, 10.9: true, 11.1: false} {
		if e := b.At(Conditions{Drivers: []float64{273.15 + c}}); e.Known != known || !known && !strings.Contains(e.Why, "known from -10 °C to 10 °C") {
			t.Errorf("%g °C: %+v", c, e)
		}
	}
	if e := b.At(Conditions{Drivers: []float64{math.NaN()}}); e.Known {
		t.Errorf("without a temperature: %+v", e)
	}
}

func TestLearnRefuses(t *testing.T) {
	short := plant{hours: 20, noise: 1}.samples()
	gone := plant{hours: 100, noise: 1}.samples()
	for i := range gone {
		gone[i].Drivers[0] = math.NaN()
	}
	for _, tt := range []struct {
		samples []Sample
		o       Options
		want    string
	}{
		{short, options(1), "20 samples can be used: at least 30"},
		{gone, options(1), "0 samples can be used"},
		{plant{hours: 500, noise: 1, constantOne: true}.samples(), options(2), `tag "PR" stayed at 5 kg/s`},
		{plant{hours: 500, noise: 1, together: true}.samples(), options(2), `tag "OT" and tag "PR" move together`},
		{short, Options{Span: hour}, "against 0 tags"},
		{short, Options{Scales: []Scale{outdoor}}, "0 ns"},
		{plant{hours: 100, noise: 1}.samples(), Options{Scales: []Scale{outdoor}, Span: hour, Habit: WeekHabit}, "hour 0 of the habit"},
	} {
		if _, _, err := Learn(tt.samples, tt.o); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%d samples: %v, want %q", len(tt.samples), err, tt.want)
		}
	}
}
