// Package account adds the records of a load up to periods: hours, days and months
// by the clock of a place, with the heat given and taken, its uncertainty, and how
// much of the time it stands for.
//
// It is pure: no clock and no I/O; records come in through an iterator and may be
// of any length that the periods hold whole. Instants and spans are int64
// nanoseconds (Unix time), heat is in J, duty in W.
package account

import (
	"fmt"
	"math"
	"time"
)

// Amounts are what adds up: over records to a period, and over periods to a longer one.
type Amounts struct {
	Measured, Bridged int64   // ns; what is neither is missing
	Latent            int64   // ns within Measured whose duty is the sensible part only
	Uncertain         int64   // ns within Measured for which an uncertain reading was used
	Given, Taken      float64 // J over the measured time, not below zero
	// BridgedGiven and BridgedTaken are the heat that a straight line puts into the
	// bridged time, J. They are in no other figure.
	BridgedGiven, BridgedTaken float64
	Served                     float64 // J over the measured time, given less taken: positive in the load's service
	Uncertainty                Uncertainty
	// Witness is what the load's witness counted, J, in spans that ended here and were
	// measured throughout, and Compared what the load served in the same spans.
	Witness, Compared float64
}

// Deviation is how far the load is above its witness, as a fraction of what that
// counted; ok tells whether there is anything to compare.
func (a *Amounts) Deviation() (fraction float64, ok bool) {
	if a.Witness <= 0 {
		return 0, false
	}
	return a.Compared/a.Witness - 1, true
}

// Record is what a load did from Start to End.
type Record struct {
	Start, End int64
	Amounts
	Lowest, Highest float64 // least and greatest figure of the duty, W; only where anything was measured
	// Demand is the greatest demand of the windows that make up the record, W, where it
	// is longer than one; only with HasDemand. Of a record that was not measured
	// throughout it must not be that of a window in which nothing was.
	Demand    float64
	HasDemand bool

	seen span
}

// check tells what is wrong with r in itself.
func (r *Record) check() error {
	for _, f := range [...]struct {
		name  string
		value float64
		least float64
	}{
		{"heat given", r.Given, 0}, {"heat taken", r.Taken, 0}, {"heat served", r.Served, math.Inf(-1)},
		{"bridged heat given", r.BridgedGiven, 0}, {"bridged heat taken", r.BridgedTaken, 0},
		{"uncertainty", r.Uncertainty.Unparted, 0}, {"random variance", r.Uncertainty.Variance, 0}, {"uncertainty", r.Uncertainty.Standard(), 0},
		{"lowest duty", r.Lowest, math.Inf(-1)}, {"highest duty", r.Highest, math.Inf(-1)}, {"demand", r.Demand, math.Inf(-1)},
		{"heat of the witness", r.Witness, 0}, {"heat compared with the witness", r.Compared, math.Inf(-1)},
	} {
		if math.IsNaN(f.value) || math.IsInf(f.value, 0) || f.value < f.least {
			return fmt.Errorf("record at %s: %s is %g", stamp(r.Start), f.name, f.value)
		}
	}
	length := r.End - r.Start
	if r.Measured < 0 || r.Bridged < 0 || r.Measured > length || r.Bridged > length-r.Measured || length <= 0 {
		return fmt.Errorf("record at %s: %v measured and %v bridged of %v", stamp(r.Start),
			time.Duration(r.Measured), time.Duration(r.Bridged), time.Duration(length))
	}
	if r.Latent < 0 || r.Latent > r.Measured {
		return fmt.Errorf("record at %s: %v latent of %v measured", stamp(r.Start), time.Duration(r.Latent), time.Duration(r.Measured))
	}
	if r.Uncertain < 0 || r.Uncertain > r.Measured {
		return fmt.Errorf("record at %s: %v uncertain of %v measured", stamp(r.Start), time.Duration(r.Uncertain), time.Duration(r.Measured))
	}
	return nil
}

func stamp(t int64) string { return time.Unix(0, t).UTC().Format(time.RFC3339) }

// Period is one period of the account of a load.
type Period struct {
	Start, End int64 // of the whole period
	// From and To bound the part of it that is accounted for: what was asked for,
	// and how far event time has come.
	From, To int64
	Amounts
	Missing         int64   // with Measured and Bridged, To − From
	Lowest, Highest Extreme // only where anything was measured
	Demand          Demand
}

// Begun tells whether the load had begun: any of the period was measured or bridged.
func (p *Period) Begun() bool { return p.Measured+p.Bridged > 0 }

// Coverage is the measured part of the accounted time, 0 to 1.
func (p *Period) Coverage() float64 {
	if p.To == p.From {
		return 0
	}
	return float64(p.Measured) / float64(p.To-p.From)
}

// Mean is the mean duty in W over the measured time, and its standard uncertainty;
// both are 0 where nothing was measured.
func (p *Period) Mean() (duty, uncertainty float64) {
	if p.Measured == 0 {
		return 0, 0
	}
	s := float64(p.Measured) / 1e9
	return p.Served / s, p.Uncertainty.Standard() / s
}

// Extreme is a figure of the duty, and the bounds of the record that holds it.
type Extreme struct {
	Duty       float64 // W
	Start, End int64
}
