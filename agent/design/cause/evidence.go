package cause

import "math"

// Estimate is a figure with its standard uncertainty, both in the same SI unit.
type Estimate struct {
	Known              bool
	Value, Uncertainty float64
}

// zeta is the figure in its standard uncertainties; 0 where that cannot be told.
func (e Estimate) zeta() float64 {
	if !e.sound() {
		return 0
	}
	return e.Value / e.Uncertainty
}

// sound tells that the figure can be weighed.
func (e Estimate) sound() bool {
	return e.Known && finite(e.Value, e.Uncertainty) && e.Uncertainty > 0 && finite(e.Value/e.Uncertainty)
}

// Effect is what one SI unit by which an instrument reads too high does to each statistic.
type Effect struct {
	Deviation   float64 // W, of measured − expected duty of the load
	Duty        float64 // W, of the measured duty of the load, and so against its witness
	Closure     float64 // W, of the closure of the exchanger
	Conductance float64 // of ln(UA/UA_clean)
}

// Operating is one measured quantity, flow in kg/s or a temperature in K, beside its design.
type Operating struct {
	Known  bool
	Tag    string
	Value  float64 // mean of the window
	Design float64 // 0 where the design point does not tell
	// Uncertainty is the standard uncertainty of Value by what lasts, Scatter that by what
	// changes from window to window.
	Uncertainty, Scatter float64
	// ByChange is what a unit of real change does to measured − expected duty, W; 0 where the
	// expectation follows the quantity, which then cannot explain a deviation.
	ByChange float64
	Follows  bool // the expectation follows the quantity
	Error    Effect
}

// away is how far the quantity is from its design.
func (o *Operating) away() Estimate {
	return Estimate{o.Known && o.Design != 0 && finite(o.Design), o.Value - o.Design, math.Hypot(o.Uncertainty, o.Scatter)}
}

// Steadiness is how steady the window was. Where it was not, Worst is the variable that
// moved the duty most.
type Steadiness struct {
	Known, Steady bool
	Worst         string
	Change, Limit float64 // by how much it moved the duty over the window, and how much is let pass, W
	Stands        float64 // its slope in standard errors
	R, RLimit     float64 // its R-statistic, and that beyond which it is not steady; 0 where not known
}

// Test is one of a single instrument, or of a pair: a redundant sensor, or a reading at
// nought heat or nought flow. The instrument of Tag reads too high by Value, or that of
// Against too low; Against may be empty. Both are tags.
type Test struct {
	Name         string // such as "redundant sensor" or "zero test"
	Tag, Against string
	Estimate
}

// Mark is what signal validation says of a tag, without a figure.
type Mark struct {
	Tag    string
	Order  bool   // the temperatures are in the wrong order for the service
	Tested bool   // a test failed by more than two standard uncertainties, such as against a sensor beside it
	Reason string // such as "the readings are doubted: spike"
}

// Margin is how far the nearest temperature is from a change of phase, K.
type Margin struct {
	Kind Kind // NearBoiling, NearDewPoint or NearFreezing
	Tag  string
	Estimate
}

// Share is the part that one input has of the variance of the deviation, 0 to 1.
type Share struct {
	Of          string // tag, or what it is in words
	Expectation bool   // it belongs to what is expected and not to what is measured
	Share       float64
}

// Day is what one day's steady windows come to on average, with standard uncertainties by
// what changes.
type Day struct {
	Day                  int64 // any count of days
	Conductance, Closure Estimate
}

// Exchanger is what the two sides of an exchanger tell. The zero value tells nothing.
type Exchanger struct {
	Name string
	// Closure is the duty of the hot side less that of the cold side and the loss, W;
	// Conductance is ln(UA/UA_clean), with the uncertainty of the clean conductance.
	Closure, Conductance Estimate
	// ClosureShift and ConductanceShift are how far both have moved since they were last in
	// order, with the uncertainty by what changes only: lasting errors cancel, so they tell
	// faults apart far more sharply. Where they are not known, they are told from Days and
	// Since, if these reach far enough.
	ClosureShift, ConductanceShift Estimate
	IllConditioned                 bool    // effectiveness is so near its limit that it tells no conductance
	Effectiveness, Limit           float64 // 0 where not known
	// OnDeviation is what ln(UA/UA_clean) does to measured − expected duty of the load, W.
	OnDeviation float64
	Fouling     Estimate // R_f, K/W
	Trend       Estimate // of R_f, K/W a week
	Days        []Day    // oldest first
	Since       int64    // day on which what is off began, by a monitor; 0 where none says
	// Signalled says that a monitor of many windows has found closure or conductance to be off:
	// the figures of the last window alone need not show it.
	Signalled bool
}

// Evidence is what is known of one load or one exchanger over one window, in SI. What is
// left at its zero value is not known.
type Evidence struct {
	Subject   string   // load or exchanger
	Deviation Estimate // measured − expected duty, W
	Allowance float64  // W
	// Flow, Inlet and Outlet are the load's own, or those of the hot side; the Other ones those
	// of the other side of its exchanger.
	Flow, Inlet, Outlet                Operating
	OtherFlow, OtherInlet, OtherOutlet Operating
	Steadiness                         Steadiness
	Witness                            Estimate // measured duty − that of an independent witness, W
	Tests                              []Test
	Marks                              []Mark
	Margins                            []Margin // those that the load gives a remark of
	Shares                             []Share
	Exchanger                          Exchanger
}

// input is one of the six, with what it is.
type input struct {
	*Operating
	kind  Kind   // where its instrument is suspect
	away  Kind   // where it is away from design; "" of an outlet, which only follows
	words string // for people
	unit  string
}

// inputs lists those that are known.
func (e *Evidence) inputs() []input {
	var known []input
	for _, in := range []input{
		{&e.Flow, FlowMeter, FlowAway, "flow", "kg/s"},
		{&e.Inlet, InletSensor, InletAway, "inlet", "K"},
		{&e.Outlet, OutletSensor, "", "outlet", "K"},
		{&e.OtherFlow, FlowMeter, FlowAway, "flow of the other side", "kg/s"},
		{&e.OtherInlet, InletSensor, InletAway, "inlet of the other side", "K"},
		{&e.OtherOutlet, OutletSensor, "", "outlet of the other side", "K"},
	} {
		x := &in.Error
		if in.Known && finite(in.Value, in.Uncertainty, in.Scatter, in.ByChange, x.Deviation, x.Duty, x.Closure, x.Conductance) {
			known = append(known, in)
		}
	}
	return known
}

// finite tells that all are numbers, and none so great that its square is not.
func finite(xs ...float64) bool {
	for _, x := range xs {
		if !(math.Abs(x) < 1e150) {
			return false
		}
	}
	return true
}
