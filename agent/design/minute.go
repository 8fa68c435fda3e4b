package design

import (
	"math"
	"time"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/expect"
)

// Minute is one minute of a load: the mean duty with its standard uncertainty in W by what
// lasts, and the variance in W² by what does not; and the means of what it was worked from.
// Whole is false where part of it was missing or idle.
type Minute struct {
	Start       int64 // Unix nanoseconds
	Whole       bool
	Idle        bool // nothing flowed, or the content rested, for most of it
	Duty        float64
	Uncertainty float64
	Random      float64
	Flow        float64 // kg/s; 0 of a vessel, of which the duty alone is looked at
	Inlet       float64 // K
	Outlet      float64 // K
	// FlowError, InletError and OutletError are the standard uncertainties of these means by
	// what lasts, in their units, and CpError that of the specific heat, as a fraction.
	FlowError, InletError, OutletError, CpError float64
	Drivers                                     []float64 // SI; NaN where a tag told nothing
	// Counted is what the load's witness counted, J, in the spans between two of its readings
	// that ended in this minute, and Served the heat that the load served in them.
	Counted, Served float64
	Latent          bool       // for a part of it vapour condensed, or may have: the duty is the sensible part
	Doubt           cause.Mark // of the worst reading that was used; its tag is empty where none is uncertain
}

// Point is where a stream runs: kg/s and K. What is 0 is not known.
type Point struct{ Flow, Inlet, Outlet float64 }

const nanosecondsPerMinute = int64(time.Minute)

// capacity returns the capacity rate of the stream, W/K, 0 where its ends are as warm as
// each other.
func (m *Minute) capacity() float64 {
	if d := math.Abs(m.Inlet - m.Outlet); d > 0 {
		return math.Abs(m.Duty) / d
	}
	return 0
}

// Seen is what of a minute a verdict goes by: the duty that was measured, and what was
// expected of it.
type Seen struct {
	Start int64
	Whole bool
	Idle  bool
	Duty  float64 // W
	expect.Expected
	Lasting, Random float64 // of the measured duty: standard uncertainty, W, and variance, W²
	At, Errors      Point   // where the stream ran, and the standard uncertainties of that by what lasts
	Latent          bool
	Doubt           cause.Mark
	Moving          bool // the load was not steady by then
}

// compare sets a minute beside what is expected of it.
func compare(m *Minute, e expect.Expected) Seen {
	return Seen{
		Start: m.Start, Whole: m.Whole, Idle: m.Idle, Duty: m.Duty, Expected: e,
		Lasting: m.Uncertainty, Random: m.Random,
		At: Point{m.Flow, m.Inlet, m.Outlet}, Errors: Point{m.FlowError, m.InletError, m.OutletError},
		Latent: m.Latent, Doubt: m.Doubt,
	}
}

// apart returns the standard uncertainty of the deviation by what lasts, W.
func (s *Seen) apart() float64 {
	if s.Joint {
		return s.DeviationLasting
	}
	return math.Hypot(s.Lasting, s.Expected.Lasting)
}

// Mean is what some minutes in a row come to; W.
type Mean struct {
	Duty, Expected, Deviation float64
	// Systematic and Random are the standard uncertainties of Deviation by what lasts and by
	// what averages out.
	Systematic, Random float64
	ExpectedLasting    float64 // standard uncertainty of Expected by what lasts
	Measured           float64 // standard uncertainty of Duty
	Least, Most        float64 // of the deviations of the minutes
	Below, Above       int     // minutes that lie beyond the allowance
}

// Uncertainty is the standard uncertainty of the deviation, W.
func (m *Mean) Uncertainty() float64 { return math.Hypot(m.Systematic, m.Random) }

// Part is the deviation as a fraction of what is expected, within ±10.
func (m *Mean) Part() float64 { return part(m.Deviation, m.Expected) }

func part(d, expected float64) float64 {
	if d == 0 {
		return 0
	}
	return min(10, max(-10, d/math.Abs(expected)))
}

// mean adds minutes up: what lasts does not average out, what is random does. Allow is the
// allowance as a fraction of what is expected.
func mean(all []Seen, allow float64) Mean {
	m := Mean{Least: math.Inf(1), Most: math.Inf(-1)}
	var random, own float64
	for i := range all {
		s := &all[i]
		m.Duty += s.Duty
		m.Expected += s.Expected.Duty
		m.Systematic += s.apart()
		m.ExpectedLasting += s.Expected.Lasting
		m.Measured += s.Lasting
		random += s.Random + s.Expected.Random
		own += s.Random
		d, a := s.Duty-s.Expected.Duty, allow*math.Abs(s.Expected.Duty)
		m.Least, m.Most = min(m.Least, d), max(m.Most, d)
		if d < -a {
			m.Below++
		} else if d > a {
			m.Above++
		}
	}
	n := float64(len(all))
	m.Duty /= n
	m.Expected /= n
	m.Deviation = m.Duty - m.Expected
	m.Systematic /= n
	m.ExpectedLasting /= n
	m.Random = math.Sqrt(random) / n
	m.Measured = math.Hypot(m.Measured, math.Sqrt(own)) / n
	return m
}
