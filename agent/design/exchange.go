package design

import (
	"math"
	"time"

	"heatreeve/agent/design/balance"
	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/design/expect"
)

// Exchanger is one of which both streams are loads.
type Exchanger struct {
	Name      string
	Hot, Cold int // indexes into [Config.Loads]
	Model     exchanger.Model
	// Uncertainty is the standard uncertainty of the clean conductance, as a fraction.
	// Calibrated says that the same instruments told it, so that what lasts of their errors is
	// in it as well and drops out of a comparison with it.
	Uncertainty float64
	Calibrated  bool
	Loss        float64       // to the surroundings, W
	Allowance   float64       // of the fouling resistance, K/W; 0 for none
	Lasting     time.Duration // as of a load
	// FalseWarnings a year of each kind, as of a load.
	FalseWarnings float64
}

// Standing is what an exchanger did in its last window: minutes in a row in which both
// streams were measured, flowed and were steady. At is its end, 0 before the first.
type Standing struct {
	At    int64
	State exchanger.State // means
	exchanger.Statistics
	Errors   exchanger.Statistics // standard uncertainties by what lasts
	Observed exchanger.Observed
	Weight   float64      // of the hot side's duty in that of both
	Pair     balance.Pair // the readings reconciled
	Why      string       // there is no conductance, or nothing at all: why
	// RatioError is the standard uncertainty of ln(UA/UA_clean) by what lasts: of the clean
	// conductance, and of the readings unless it was told by the same instruments.
	RatioError       float64
	FoulingError     float64 // standard uncertainty of the fouling resistance likewise, K/W
	Fouling, Balance Drift
	Course           exchanger.Course // of the fouling resistance by days
}

// Zeta is the closure in its standard uncertainties.
func (s *Standing) Zeta() float64 {
	if s.Errors.Closure == 0 {
		return 0
	}
	return s.Closure / s.Errors.Closure
}

// Exchange follows the two streams of one exchanger. Its exported fields are its state.
type Exchange struct {
	Of      uint64 // of the exchanger; see fingerprint
	Pairing pairing
	Window  [2][]Minute // minutes in a row that are whole on both sides
	Block   int         // since the last window ended
	Last    Standing
	Minute  exchanger.State // of the last minute by which a duty was expected
	Fouling Monitor         // of ln(UA/UA_clean)
	Balance Monitor         // of the closure as a fraction of the duty
	Days    Days
	Trend   exchanger.Trend // of the fouling resistance
	Roll
	of      Exchanger
	lasting int
}

func newExchange(of Exchanger, l limits) *Exchange {
	n := max(1, int(of.Lasting/time.Minute))
	return &Exchange{
		Of: fingerprint(of), of: of, lasting: n, Last: Standing{Why: "no minutes in a row yet in which both sides flow and are steady"},
		Fouling: l.monitor(n, of.FalseWarnings), Balance: l.monitor(n, of.FalseWarnings),
	}
}

// restore takes up a saved state.
func (x *Exchange) restore(was Exchange) {
	if was.Of != x.Of {
		x.Roll = was.Roll
		return
	}
	was.of, was.lasting = x.of, x.lasting
	was.Fouling.limit, was.Balance.limit = x.Fouling.limit, x.Balance.limit
	*x = was
	x.Last.Course = x.Trend.Course() // of which gob keeps but the exported fields
}

// observe takes in a minute of both sides, of which one may be missing; steady tells whether
// both are.
func (x *Exchange) observe(pair [2]*Minute, steady bool) {
	if !both(pair) || !steady {
		x.lapse()
		return
	}
	if n := len(x.Window[0]); n > 0 && pair[0].Start != x.Window[0][n-1].Start+nanosecondsPerMinute {
		x.lapse()
	}
	for i, m := range pair {
		w := append(x.Window[i], *m)
		if n := len(w); n > x.lasting {
			w = append(w[:0], w[n-x.lasting:]...)
		}
		x.Window[i] = w
	}
	if x.Block++; x.Block >= x.lasting && len(x.Window[0]) == x.lasting {
		x.Block = 0
		x.weigh()
	}
}

func both(pair [2]*Minute) bool {
	return pair[0] != nil && pair[1] != nil && pair[0].Whole && pair[1].Whole
}

func (x *Exchange) lapse() {
	x.Window[0], x.Window[1], x.Block = x.Window[0][:0], x.Window[1][:0], 0
}

// weigh tells of the window that has ended.
func (x *Exchange) weigh() {
	first := x.Window[0][0].Start
	s := Standing{At: x.Window[0][x.lasting-1].Start + nanosecondsPerMinute}
	s.State = exchanger.State{Hot: streamOf(x.Window[0]), Cold: streamOf(x.Window[1])}
	s.Weight = weightOf(&s.State)
	slopes := x.of.Model.Slopes(&s.State, s.Weight, x.of.Loss)
	s.Statistics, s.Errors = x.of.Model.Tell(&s.State, s.Weight, x.of.Loss), s.State.Errors(&slopes)
	x.reconcile(&s)
	if d := s.duty(); d > 0 {
		x.Balance.Observe(first, s.Closure/d, s.Errors.Closure/d, 0)
	}
	x.conductance(&s, first)
	s.Fouling, s.Balance = x.Fouling.Drift(), x.Balance.Drift()
	s.Course = x.Trend.Course()
	x.Last = s
}

// duty is the mean of both sides, W.
func (s *Standing) duty() float64 { return (math.Abs(s.Gives) + math.Abs(s.Takes)) / 2 }

// mostRatioError is the uncertainty of ln(UA/UA_clean) from which it tells nothing. Common
// practice, no source.
const mostRatioError = 1

// conductance tells that of the window, and lets it count where it is well told.
func (x *Exchange) conductance(s *Standing, first int64) {
	var err error
	if s.Observed, err = x.of.Model.Observe(&s.State, s.Weight, x.of.Loss); err != nil {
		s.Why = err.Error()
		return
	}
	s.RatioError = x.of.Uncertainty
	if !x.of.Calibrated {
		s.RatioError = math.Hypot(s.RatioError, s.Errors.Ratio)
	}
	if s.FoulingError = s.RatioError / s.Observed.Conductance; !(s.RatioError < mostRatioError) {
		s.Why, s.RatioError, s.FoulingError = "the readings are too unsure to tell the conductance", 0, 0
		return
	}
	if s.Observed.IllConditioned {
		s.Why = "the effectiveness is so near its limit that it does not tell the conductance"
		return
	}
	day := first / nanosecondsPerDay
	x.Fouling.Observe(first, s.Ratio, s.RatioError, 0)
	x.Days.observe(day, s.Ratio, s.Closure)
	x.Trend.Observe(day, s.Observed.Fouling)
}

// reconcile adjusts the readings of the window to each other.
func (x *Exchange) reconcile(s *Standing) {
	side := func(t exchanger.Stream) balance.Stream {
		return balance.Stream{
			Flow: t.Flow, Inlet: t.Inlet, Outlet: t.Outlet, Cp: t.Cp,
			FlowError: math.Hypot(t.FlowError, t.CpError*t.Flow), InletError: t.InletError, OutletError: t.OutletError,
		}
	}
	s.Pair, _ = balance.Reconciled(side(s.State.Hot), side(s.State.Cold), x.of.Loss) // of a gross error the closure tells
}

// streamOf is the mean of the minutes of one side.
func streamOf(minutes []Minute) exchanger.Stream {
	var t exchanger.Stream
	var duty float64
	n := float64(len(minutes))
	for i := range minutes {
		m := &minutes[i]
		duty += math.Abs(m.Duty) / n
		t.Flow += m.Flow / n
		t.Inlet += m.Inlet / n
		t.Outlet += m.Outlet / n
		t.FlowError += m.FlowError / n
		t.CpError += m.CpError / n
		t.InletError += m.InletError / n
		t.OutletError += m.OutletError / n
	}
	if d := math.Abs(t.Inlet - t.Outlet); d > 0 && t.Flow > 0 {
		t.Cp = duty / d / t.Flow
	}
	return t
}

// weightOf is that of the hot side's duty where each counts by its own uncertainty.
func weightOf(s *exchanger.State) float64 {
	var u [2]float64
	for i, t := range [...]*exchanger.Stream{&s.Hot, &s.Cold} {
		d := math.Abs(t.Inlet - t.Outlet)
		if t.Flow > 0 && d > 0 {
			u[i] = t.Capacity() * d * math.Hypot(math.Hypot(t.FlowError/t.Flow, t.CpError), math.Hypot(t.InletError, t.OutletError)/d)
		}
	}
	if u[0] == 0 && u[1] == 0 {
		return 0.5
	}
	return u[1] * u[1] / (u[0]*u[0] + u[1]*u[1])
}

// expected is the duty of both sides at the inlets and flows of a minute, the exchanger clean.
func (x *Exchange) expected(pair [2]*Minute) [2]expect.Expected {
	unknown := func(why string) [2]expect.Expected { return [2]expect.Expected{{Why: why}, {Why: why}} }
	for i, m := range pair {
		if m == nil || !m.Whole {
			return unknown("the " + [...]string{"hot", "cold"}[i] + " side of exchanger " + x.of.Name + " has no whole minute")
		}
	}
	s := exchanger.State{Hot: streamOf([]Minute{*pair[0]}), Cold: streamOf([]Minute{*pair[1]})}
	x.Minute = s
	clean, err := x.of.Model.Duty(&s)
	if err != nil {
		return unknown("exchanger " + x.of.Name + ": " + err.Error())
	}
	own := x.of.Model.Sensitivity(&s) * x.of.Uncertainty
	var readings [2]float64
	if !x.of.Calibrated { // else the same errors made the model
		readings[0], readings[1] = x.of.Model.BeyondErrors(&s)
		if !(readings[0]+readings[1] <= math.MaxFloat64) {
			return unknown("exchanger " + x.of.Name + ": the inlets are as warm as each other within what is known of them")
		}
	}
	var both [2]expect.Expected
	for side, loss := range [...]float64{x.of.Loss, 0} {
		both[side] = expect.Expected{
			Known: true, Duty: clean + loss, Joint: true, Lasting: own, Random: pair[side].Random,
			DeviationLasting: math.Hypot(readings[side], own),
		}
	}
	return both
}
