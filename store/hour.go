package store

import "math"

const (
	hourNanos    = 3600 * 1_000_000_000
	quarterNanos = hourNanos / 4
)

// Hour is what a load did in the UTC hour that begins at Start (Unix
// nanoseconds): the sum of its minutes, each counted once. Several hours put
// together by [Hour.Add] are a day or a month, told by the same figures.
type Hour struct {
	Load  uint32
	Start int64
	// Minutes is how many minutes there are in it. One that measured nothing may
	// have none, so that what they miss of the hour is missing as well.
	Minutes uint32

	Measured, Bridged, Missing float64 // s
	Given, Taken               float64 // J, in the measured time
	BridgedGiven, BridgedTaken float64 // J
	Latent                     float64 // s within Measured
	Uncertain                  float64 // s within Measured; 0 of minutes from before it was kept
	Duty                       float64 // W, mean over Measured
	DutyMin, DutyMax           float64 // W, of the minutes that measured; 0 where none did
	// Demand is the greatest mean duty of a quarter of an hour by the clock, in W:
	// the sum of duty and measured time of its minutes over 900 s.
	Demand float64
	// Systematic, J, and Random, J², are the sums of those of the minutes. The variance
	// of Given less Taken is the sum of Random and of the squares of Systematic.
	Systematic [Shares]float64
	Random     float64
	// HeatUncertainty is the sum of standard uncertainty and measured time, in J: what
	// that of Given less Taken is at most. Untold is what of it comes from minutes that
	// do not tell its parts, as those of the first layout, and are not in these.
	HeatUncertainty, Untold float64

	Witness, Compared float64 // J, the sums of those of the minutes
	Mass              float64 // kg, the sum of flow and measured time
	// Inlet and Outlet in K and Pressure in Pa, absolute, are means over the
	// measured time of the minutes that have them, and 0 where none has. So is Content,
	// K, of a vessel.
	Inlet, Outlet, Pressure, Content float64
	// Expected is the duty that was expected, W, and ExpectedError its standard uncertainty by
	// what lasts, both means over the measured time of the minutes in which something was;
	// both are 0 where nothing was.
	Expected, ExpectedError float64
}

func (h *Hour) expects() bool { return h.Expected != 0 || h.ExpectedError != 0 }

// Add makes h the sum of h and o: times, heat and mass add up, means are weighted by
// Measured, and of Start and the extremes the least or greatest stands. What measured
// nothing has no extremes.
func (h *Hour) Add(o Hour) {
	if h.Minutes == 0 {
		*h = o
		return
	}
	h.Start = min(h.Start, o.Start)
	h.Minutes += o.Minutes
	h.DutyMin, h.DutyMax = extremes(h.DutyMin, h.DutyMax, h.Measured, o.DutyMin, o.DutyMax, o.Measured)
	h.Duty = weighted(h.Duty, h.Measured, o.Duty, o.Measured)
	h.Inlet = present(h.Inlet, h.Measured, o.Inlet, o.Measured)
	h.Outlet = present(h.Outlet, h.Measured, o.Outlet, o.Measured)
	h.Pressure = present(h.Pressure, h.Measured, o.Pressure, o.Measured)
	h.Content = present(h.Content, h.Measured, o.Content, o.Measured)
	h.addExpected(&o)
	h.Measured += o.Measured
	h.Bridged += o.Bridged
	h.Missing += o.Missing
	h.Given += o.Given
	h.Taken += o.Taken
	h.BridgedGiven += o.BridgedGiven
	h.BridgedTaken += o.BridgedTaken
	h.Latent += o.Latent
	h.Uncertain += o.Uncertain
	h.Demand = max(h.Demand, o.Demand)
	for i, x := range o.Systematic {
		h.Systematic[i] += x
	}
	h.Random += o.Random
	h.HeatUncertainty += o.HeatUncertainty
	h.Untold += o.Untold
	h.Witness += o.Witness
	h.Compared += o.Compared
	h.Mass += o.Mass
}

// addExpected weighs what was expected by all of the measured time of the hours in which
// anything was.
func (h *Hour) addExpected(o *Hour) {
	switch {
	case !o.expects():
	case !h.expects():
		h.Expected, h.ExpectedError = o.Expected, o.ExpectedError
	default:
		h.Expected = weighted(h.Expected, h.Measured, o.Expected, o.Measured)
		h.ExpectedError = weighted(h.ExpectedError, h.Measured, o.ExpectedError, o.Measured)
	}
}

// extremes leaves out those of what measured nothing.
func extremes(lowA, highA, measuredA, lowB, highB, measuredB float64) (low, high float64) {
	switch {
	case measuredB == 0:
		return lowA, highA
	case measuredA == 0:
		return lowB, highB
	}
	return min(lowA, lowB), max(highA, highB)
}

func weighted(a, wa, b, wb float64) float64 {
	if wa+wb == 0 {
		return a
	}
	return (a*wa + b*wb) / (wa + wb)
}

// present is weighted for figures of which 0 says that there is none.
func present(a, wa, b, wb float64) float64 {
	switch {
	case b == 0:
		return a
	case a == 0:
		return b
	}
	return weighted(a, wa, b, wb)
}

// hourOf returns the start of the hour that holds t. The hour that begins before
// the least int64 is taken to begin there.
func hourOf(t int64) int64 { return floorTo(t, hourNanos) }

// hourAfter returns the start of the next hour, or the greatest int64 where
// there is none.
func hourAfter(start int64) int64 { return nextOf(start, hourNanos) }

// floorTo returns the greatest multiple of step up to t, or the least int64.
func floorTo(t, step int64) int64 {
	into := t % step
	if into < 0 {
		into += step
	}
	if t < math.MinInt64+into {
		return math.MinInt64
	}
	return t - into
}

// nextOf returns the multiple of step after the one that start is in.
func nextOf(start, step int64) int64 {
	if start > math.MaxInt64-step {
		return math.MaxInt64
	}
	return floorTo(start+step, step)
}
