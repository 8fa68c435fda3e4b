package account

import (
	"time"

	"heatreeve/agent/loads"
)

// demandWindow is a demand window in the making; none where end is 0.
type demandWindow struct {
	start, end int64
	covered    int64
	served     loads.Sum
}

// demand adds r to its window, and settles the one before. A record that goes on after
// the window, or is cut, does not tell what of it was in there.
func (f *fold) demand(r *Record) {
	w := &f.window
	if r.Start >= w.end {
		f.settle()
		w.start, w.end = window(r.Start, int64(f.plan.Demand), f.plan.Zone)
	}
	if r.End <= w.end && r.seen == (span{}) {
		w.covered += r.Measured + r.Bridged
		w.served.Add(r.Duty * r.covered())
	}
}

// settle counts the window where it lies whole in the accounted time, and ends it.
func (f *fold) settle() {
	w, d := f.window, &f.period.Demand
	f.window = demandWindow{}
	if w.covered == 0 || w.start < f.period.From || w.end > f.period.To {
		return
	}
	length := w.end - w.start
	if w.covered == length {
		d.Full++
	}
	if peak := w.served.Value() / (float64(length) / 1e9); d.PeakEnd == d.PeakStart || peak > d.Peak {
		d.Peak, d.PeakStart, d.PeakEnd = peak, w.start, w.end
		d.PeakCoverage = float64(w.covered) / float64(length)
	}
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
