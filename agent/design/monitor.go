package design

import (
	"math"

	"heatreeve/agent/design/drift"
)

const (
	// slack is k of the CUSUM in standard deviations of a window: half of the shift that is
	// found soonest. Common practice, with the tables of the NIST/SEMATECH e-Handbook, 6.3.2.3.
	slack = 0.5
	// dead is how many lasting standard uncertainties a deviation may be off for good: of plants
	// whose instruments are sound one in eighty is off by more. Common practice, no source.
	dead = 2.5
	// leastWindows is how many windows must have shown how they scatter before one counts.
	// Common practice, no source.
	leastWindows = 20
	minutesAYear = 365.25 * 24 * 60
)

// Monitor follows a deviation through windows in a row that do not overlap, by a tabular
// CUSUM of
//
//	x = sign(d)·max(0, |d| − 2.5·u)/s,
//
// d the mean deviation of a window, u what of its standard uncertainty lasts, s its standard
// deviation by what does not: as the windows scatter, and not less than their readings say. A
// constant error within what is stated of the instruments so hardly ever adds up: where the
// errors together come to more than 2.5·u, as in one of eighty plants, it is warned of once.
// The limit h is that which, with windows of scatter alone, gives the chosen number of false warnings in a
// year of windows.
type Monitor struct {
	CUSUM drift.CUSUM
	Scale drift.Scale
	Side  int   // of the deviation that is signalled, −1 or 1; 0 for none
	Since int64 // when that began
	Size  float64
	Last  Drift
	limit float64
}

// Drift is what a monitor tells of its last window.
type Drift struct {
	Windows   int     // that have shown how they scatter
	Waits     int     // for so many more before one counts
	Deviation float64 // of the last window, a fraction
	Dead      float64 // dead band 2.5·u
	Scatter   float64 // s
	X         float64 // what the CUSUM took
	High, Low float64 // its sums
	Limit     float64 // h
	Side      int     // as of the monitor
	Since     int64
	Size      float64 // estimated deviation since then, a fraction
}

// limits are those of monitors by the average run length that they are for: finding one takes
// some milliseconds, and the loads of a site hardly ever differ.
type limits map[float64]float64

// monitor returns one of windows of the given minutes that gives so many false warnings a
// year; 0 is 1.
func (l limits) monitor(minutes int, falseWarnings float64) Monitor {
	if falseWarnings <= 0 {
		falseWarnings = 1
	}
	run := minutesAYear / float64(minutes) / falseWarnings
	if l[run] == 0 {
		l[run] = drift.Threshold(slack, run)
	}
	return Monitor{limit: l[run]}
}

// Observe takes in the mean deviation of a window that began at from, as a fraction, with
// what of its standard uncertainty lasts and what is random. A window of which one of them is
// not finite tells nothing: it would stay in the sums for good.
func (m *Monitor) Observe(from int64, d, lasting, random float64) {
	if sum := math.Abs(d) + lasting + random; !(sum <= math.MaxFloat64) {
		return
	}
	m.Scale.Observe(d)
	x := Drift{Windows: m.Scale.N, Deviation: d, Dead: dead * lasting, Limit: m.limit}
	x.Scatter = max(random, m.Scale.Sigma())
	x.Waits = max(0, leastWindows-m.Scale.N)
	if x.Waits == 0 && x.Scatter > 0 {
		x.X = math.Copysign(max(0, math.Abs(d)-x.Dead), d) / x.Scatter
		m.add(from, &x)
	}
	x.High, x.Low = m.CUSUM.High, m.CUSUM.Low
	x.Side, x.Since, x.Size = m.Side, m.Since, m.Size
	m.Last = x
}

// add puts x into the sums. A side that has signalled stands until its sum has come back to
// zero; it does not rise beyond the limit meanwhile, so that the way back is as long as a
// signal took.
func (m *Monitor) add(from int64, x *Drift) {
	c := &m.CUSUM
	c.Observe(from, x.X, slack)
	if m.Side > 0 && c.High == 0 || m.Side < 0 && c.Low == 0 {
		m.Side, m.Since, m.Size = 0, 0, 0
	}
	switch {
	case c.High >= m.limit && m.Side <= 0:
		m.Side, m.Since, m.Size = 1, c.HighSince, c.Size(1, slack)*x.Scatter+x.Dead
	case c.Low >= m.limit && m.Side >= 0:
		m.Side, m.Since, m.Size = -1, c.LowSince, c.Size(-1, slack)*x.Scatter-x.Dead
	}
	c.Bound(m.limit)
}

// Drift tells of the last window.
func (m *Monitor) Drift() Drift { return m.Last }
