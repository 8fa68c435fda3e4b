package account

import (
	"time"

	"heatreeve/agent/loads"
)

// Demand tells of the demand windows of a period: those of one length, aligned to
// the local clock, that lie whole in its accounted part. A change of the clock ends
// a window before its time; it then counts with the length that it has.
type Demand struct {
	Windows int // how many there are
	Full    int // how many of them are known to be measured throughout
	// Peak is the greatest demand of a window that was measured at all, from
	// PeakStart to PeakEnd. The demand is the heat served over the length of the
	// window. Where it was not measured throughout, PeakCoverage < 1, the heat of the
	// other time is not in it: what was bridged makes no peak.
	//
	// Where only a longer record tells of the window, PeakStart and PeakEnd are those of
	// the record, and PeakCoverage is what the window was measured at least.
	Peak               float64 // W
	PeakStart, PeakEnd int64   // equal where no window was measured
	PeakCoverage       float64
}

// add joins the demand of a later part.
func (d *Demand) add(p Demand) {
	d.Windows += p.Windows
	d.Full += p.Full
	if p.PeakEnd > p.PeakStart && (d.PeakEnd == d.PeakStart || p.Peak > d.Peak) {
		d.Peak, d.PeakStart, d.PeakEnd, d.PeakCoverage = p.Peak, p.PeakStart, p.PeakEnd, p.PeakCoverage
	}
}

// demandWindow is a demand window in the making; none where end is 0.
type demandWindow struct {
	start, end int64
	measured   int64
	served     loads.Sum
}

// demand adds r to its window, and settles the one before. A record that goes on after
// the window tells what of it was in there only where it has a demand of its own, and one
// that is cut does not.
func (f *fold) demand(r *Record) {
	w := &f.window
	if r.Start >= w.end {
		f.settle()
		w.start, w.end = window(r.Start, int64(f.plan.Demand), f.plan.Zone)
	}
	switch {
	case r.HasDemand && f.plan.Windowed(r.Start, r.End):
		f.period.Demand.add(r.demand(int64(f.plan.Demand)))
		*w = demandWindow{}
	case r.End <= w.end && r.seen == (span{}):
		w.measured += r.Measured
		w.served.Add(r.Served)
	}
}

// demand is what a record tells of the windows of a length that it consists of.
func (r *Record) demand(length int64) (d Demand) {
	if r.Measured == 0 {
		return d
	}
	unmeasured := r.End - r.Start - r.Measured
	if unmeasured == 0 {
		d.Full = int((r.End - r.Start) / length)
	}
	d.Peak, d.PeakStart, d.PeakEnd = r.Demand, r.Start, r.End
	d.PeakCoverage = max(0, float64(length-unmeasured)/float64(length))
	return d
}

// settle counts the window where it lies whole in the accounted time, and ends it.
func (f *fold) settle() {
	w, d := f.window, &f.period.Demand
	f.window = demandWindow{}
	if w.measured == 0 || w.start < f.period.From || w.end > f.period.To {
		return
	}
	length := w.end - w.start
	of := Demand{Peak: w.served.Value() / (float64(length) / 1e9), PeakStart: w.start, PeakEnd: w.end, PeakCoverage: float64(w.measured) / float64(length)}
	if w.measured == length {
		of.Full = 1
	}
	d.add(of)
}

// Windowed tells whether the time from start to end, which lies in one period, consists of
// whole demand windows of the full length.
func (p *Plan) Windowed(start, end int64) bool {
	for start < end {
		from, to := window(start, int64(p.Demand), p.Zone)
		if from != start || to-from != int64(p.Demand) {
			return false
		}
		start = to
	}
	return start == end
}

// windows counts the windows that lie whole in the accounted part of p.
func windows(p *Period, length int64, zone *time.Location) (n int) {
	for t := p.From; t < p.To; {
		start, end := window(t, length, zone)
		if start >= p.From && end <= p.To {
			n++
		}
		t = end
	}
	return n
}
