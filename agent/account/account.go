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

// Record is what a load did from Start to End. The time in it that is neither
// measured nor bridged is missing.
type Record struct {
	Start, End        int64
	Measured, Bridged int64
	Given, Taken      float64 // J over the measured and bridged time, not below zero
	Duty              float64 // mean over that time, W, positive in the load's service
	Lowest, Highest   float64 // least and greatest figure of the duty in it, W
	Uncertainty       float64 // mean standard uncertainty of the duty over that time, W

	seen span
}

// covered is the time that the heat stands for, in s.
func (r *Record) covered() float64 { return float64(r.Measured+r.Bridged) / 1e9 }

// check tells what is wrong with r in itself.
func (r *Record) check() error {
	for _, f := range [...]struct {
		name  string
		value float64
		least float64
	}{
		{"heat given", r.Given, 0}, {"heat taken", r.Taken, 0}, {"uncertainty", r.Uncertainty, 0},
		{"duty", r.Duty, math.Inf(-1)}, {"lowest duty", r.Lowest, math.Inf(-1)}, {"highest duty", r.Highest, math.Inf(-1)},
	} {
		if math.IsNaN(f.value) || math.IsInf(f.value, 0) || f.value < f.least {
			return fmt.Errorf("record at %s: %s is %g", stamp(r.Start), f.name, f.value)
		}
	}
	if r.Measured < 0 || r.Bridged < 0 || r.Measured+r.Bridged > r.End-r.Start || r.End <= r.Start {
		return fmt.Errorf("record at %s: %v measured and %v bridged of %v", stamp(r.Start),
			time.Duration(r.Measured), time.Duration(r.Bridged), time.Duration(r.End-r.Start))
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
	// Measured, Bridged and Missing add up to To − From.
	Measured, Bridged, Missing int64
	Given, Taken               float64 // J
	Served                     float64 // J, the one less the other: positive in the load's service
	// Uncertainty is the standard uncertainty of Served in J: the sum of u·dt. It takes
	// the whole uncertainty u of the duty as systematic, the same throughout the period,
	// which is the safe side: what part of it is random would grow with the root of the
	// time only.
	Uncertainty     float64
	Lowest, Highest Extreme // only where Covered
	Demand          Demand
}

// Covered tells whether any of the period was measured or bridged.
func (p *Period) Covered() bool { return p.Measured+p.Bridged > 0 }

// Coverage is the measured and bridged part of the accounted time, 0 to 1.
func (p *Period) Coverage() float64 {
	if p.To == p.From {
		return 0
	}
	return float64(p.Measured+p.Bridged) / float64(p.To-p.From)
}

// Mean is the mean duty in W over the covered time, and its standard uncertainty;
// both are 0 where nothing is covered.
func (p *Period) Mean() (duty, uncertainty float64) {
	if !p.Covered() {
		return 0, 0
	}
	s := float64(p.Measured+p.Bridged) / 1e9
	return p.Served / s, p.Uncertainty / s
}

// Whole tells whether all of the period is accounted for.
func (p *Period) Whole() bool { return p.From == p.Start && p.To == p.End }

// Extreme is a figure of the duty, and the bounds of the record that holds it.
type Extreme struct {
	Duty       float64 // W
	Start, End int64
}

// Demand tells of the demand windows of a period: those of one length, aligned to
// the local clock, that lie whole in its accounted part. A change of the clock ends
// a window before its time; it then counts with the length that it has.
type Demand struct {
	Windows int // how many there are
	Full    int // how many of them were covered throughout
	// Peak is the greatest demand of a window that was covered at all, from
	// PeakStart to PeakEnd. The demand is the heat served over the length of the
	// window. Where it is not covered throughout, PeakCoverage < 1, the heat of the
	// missing time is not in it.
	Peak               float64 // W
	PeakStart, PeakEnd int64   // equal where no window was covered
	PeakCoverage       float64
}
