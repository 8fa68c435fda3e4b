package agent

import (
	"context"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/store"
)

// attested adds up, for each load that has a witness, what both told in the present day by
// the clock of the site: from the minutes of the day, those before a restart by the history.
type attested struct {
	zone       *time.Location
	has        []bool // loads with a witness
	start, end int64  // of the day; 0 before the first
	sums       []account.Amounts
}

// newAttested returns the sums of the day that holds now, where there are any yet.
func newAttested(of []loads.Load, zone *time.Location, db *store.Store, ids []uint32, now int64) (*attested, error) {
	a := &attested{zone: zone, has: make([]bool, len(of)), sums: make([]account.Amounts, len(of))}
	for i := range of {
		a.has[i] = of[i].HasWitness
	}
	if now <= 0 {
		return a, nil
	}
	a.turn(now)
	for i, has := range a.has {
		if has {
			if err := a.recall(i, &records{db: db, load: ids[i], plan: account.Plan{From: a.start, To: a.end, Through: now, By: account.Day, Zone: zone}}); err != nil {
				return nil, err
			}
		}
	}
	return a, nil
}

// recall takes in what the history has of the day. What of it is damaged is left out.
func (a *attested) recall(load int, r *records) error {
	for x, err := range r.all(context.Background()) {
		if err == nil {
			a.add(load, x.Start, x.Witness, x.Compared)
		}
	}
	return r.err
}

// turn begins the day that holds t, unless it has begun.
func (a *attested) turn(t int64) {
	if t >= a.end {
		a.start, a.end = account.Day.Bounds(t, a.zone)
		clear(a.sums)
	}
}

// add takes a minute in. One of a day before, which was decided on late, is in the report of
// that day.
func (a *attested) add(load int, start int64, counted, served float64) {
	a.turn(start)
	if start >= a.start {
		a.sums[load].Witness += counted
		a.sums[load].Compared += served
	}
}

// at is what the load's witness and the load have told of the day that holds now; nil of a load
// without a witness, and before the first day.
func (a *attested) at(load int, now int64) *view.Witness {
	if !a.has[load] || now <= 0 {
		return nil
	}
	a.turn(now)
	s := &a.sums[load]
	w := &view.Witness{Counted: s.Witness, Served: s.Compared}
	w.Deviation, w.Told = s.Deviation()
	return w
}
