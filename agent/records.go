package agent

import (
	"context"
	"errors"
	"iter"
	"math"
	"time"

	"heatreeve/agent/account"
	"heatreeve/store"
)

const (
	minute = int64(time.Minute)
	hour   = int64(time.Hour)
)

func hourOf(t int64) int64 { return t - t%hour }

// records are those of one load that a plan asks for: hours where they serve, and
// minutes otherwise.
type records struct {
	db    *store.Store
	load  uint32
	plan  account.Plan
	fine  bool  // minutes where there are any
	brief bool  // hours also where they do not tell how many windows were measured throughout
	first int64 // start of the first record yielded; 0 before
	whole int   // hours yielded where minutes were asked for
	cut   int   // of those, hours that were cut by the ends of periods or of the plan
	mute  int   // of those, hours that do not tell their demand
	err   error // why all ended before its time
}

// all yields the records once, in the order of time, and damaged ones as errors. It ends
// with err when the store fails, or ctx ends.
func (r *records) all(ctx context.Context) iter.Seq2[account.Record, error] {
	return func(yield func(account.Record, error) bool) {
		for h, err := range r.db.Hours(r.load, hourOf(r.plan.From), r.plan.Until()) {
			switch {
			case ctx.Err() != nil:
				r.err = ctx.Err()
				return
			case err != nil && !errors.Is(err, store.ErrDamaged):
				r.err = err
				return
			case err != nil:
				if !yield(account.Record{}, err) {
					return
				}
			case r.coarse(h):
				if !r.tell(r.hourRecord(h), yield) {
					return
				}
			case !r.minutes(h, yield):
				return
			}
		}
	}
}

// coarse tells whether the hour serves as it is: it lies whole in one period and in the
// plan, and tells all of its demand that is asked for.
func (r *records) coarse(h store.Hour) bool {
	if r.fine || h.Start < r.plan.From || h.Start+hour > r.plan.Until() {
		return false
	}
	if r.plan.Demand != 0 && !(r.quarters(h.Start) && (shortSpan(h.Measured) == hour || r.brief && h.Demand > 0)) {
		return false
	}
	_, end := r.plan.By.Bounds(h.Start, r.plan.Zone)
	return h.Start+hour <= end
}

// quarters tells whether the demand windows in the hour from start on are its quarters,
// whose greatest demand an hour tells.
func (r *records) quarters(start int64) bool {
	return r.plan.Demand == 15*time.Minute && r.plan.Windowed(start, start+hour)
}

// minutes yields those of the hour that the plan asks for. Where not all of them are there
// any more, or can be read, the hour must do, cut by length at the ends of periods: its heat
// is not to be lost.
func (r *records) minutes(h store.Hour, yield func(account.Record, error) bool) bool {
	found := make([]store.Minute, 0, 60)
	for m, err := range r.db.Minutes(r.load, h.Start, h.Start+hour) {
		if err == nil {
			found = append(found, m)
		} else if !errors.Is(err, store.ErrDamaged) {
			r.err = err
			return false
		}
	}
	if len(found) < int(h.Minutes) {
		return r.pieces(r.hourRecord(h), yield)
	}
	for _, m := range found {
		if m.Start >= r.plan.From && m.Start < r.plan.Until() && !r.tell(minuteRecord(m), yield) {
			return false
		}
	}
	return true
}

// pieces yields what of an hour lies in the plan, a record a period.
func (r *records) pieces(x account.Record, yield func(account.Record, error) bool) bool {
	r.whole++
	if x.End > r.plan.Accounted() { // what has not come yet is not in it
		x.End, x.HasDemand = r.plan.Accounted(), false
	}
	from, until := max(x.Start, r.plan.From), min(x.End, r.plan.Until())
	_, end := r.plan.By.Bounds(from, r.plan.Zone)
	split := from > x.Start || until < x.End || end < until
	if split {
		r.cut++
	}
	if split || !x.HasDemand {
		r.mute++
	}
	for from < until {
		_, end := r.plan.By.Bounds(from, r.plan.Zone)
		end = min(end, until)
		if !r.tell(x.Cut(from, end), yield) {
			return false
		}
		from = end
	}
	return true
}

func (r *records) tell(x account.Record, yield func(account.Record, error) bool) bool {
	if r.first == 0 {
		r.first = x.Start
	}
	return yield(x, nil)
}

// begins is the start of the first minute there is, or of the first hour where its
// minutes are not left.
func (r *records) begins() int64 {
	for m, err := range r.db.Minutes(r.load, r.first, r.first+hour) {
		if err == nil {
			return m.Start
		}
	}
	return r.first
}

func minuteRecord(m store.Minute) account.Record {
	return account.Record{
		Start: m.Start, End: m.Start + minute, Lowest: m.DutyMin, Highest: m.DutyMax,
		Amounts: account.Amounts{
			Measured: shortSpan(m.Measured), Bridged: shortSpan(m.Bridged), Latent: shortSpan(m.Latent), Uncertain: shortSpan(m.Uncertain),
			Given: m.Given, Taken: m.Taken, BridgedGiven: m.BridgedGiven, BridgedTaken: m.BridgedTaken,
			Served:      served(m.Given, m.Taken, m.Duty),
			Uncertainty: uncertainty(&m.Systematic, m.Random, untold(&m)),
			Witness:     m.Witness, Compared: m.Compared,
		},
	}
}

// hourRecord is that of an hour, with its demand where the plan's windows are its quarters
// and the greatest is of one that was measured: a quarter in which nothing was counts as 0.
func (r *records) hourRecord(h store.Hour) account.Record {
	x := account.Record{
		Start: h.Start, End: h.Start + hour, Lowest: h.DutyMin, Highest: h.DutyMax,
		Amounts: account.Amounts{
			Measured: shortSpan(h.Measured), Bridged: shortSpan(h.Bridged), Latent: shortSpan(h.Latent), Uncertain: shortSpan(h.Uncertain),
			Given: h.Given, Taken: h.Taken, BridgedGiven: h.BridgedGiven, BridgedTaken: h.BridgedTaken,
			Served:      served(h.Given, h.Taken, h.Duty),
			Uncertainty: uncertainty(&h.Systematic, h.Random, h.Untold),
			Witness:     h.Witness, Compared: h.Compared,
		},
	}
	if r.quarters(h.Start) && (h.Demand > 0 || x.Measured == hour) {
		x.Demand, x.HasDemand = h.Demand, true
	}
	return x
}

// served is the heat in the load's service: the net heat, by the sign of the mean duty, of
// which the record keeps fewer digits.
func served(given, taken, duty float64) float64 { return math.Copysign(given-taken, duty) }

// uncertainty is that of a record in its parts, and what of it was kept without these.
func uncertainty(parts *[store.Shares]float64, variance, untold float64) account.Uncertainty {
	u := account.Uncertainty{Variance: variance, Unparted: untold}
	copy(u.Parts[:], parts[:])
	return u
}

// untold is the whole uncertainty of a minute from before its parts were kept.
func untold(m *store.Minute) float64 {
	if m.Systematic == ([store.Shares]float64{}) && m.Random == 0 {
		return m.DutyUncertainty * m.Measured
	}
	return 0
}

// shortSpan is a short time in ns.
func shortSpan(s float64) int64 { return int64(math.Round(s * 1e9)) }

// anyBefore tells whether the load has a record of a minute that begins before the
// instant to.
func anyBefore(db *store.Store, load uint32, to int64) (bool, error) {
	for _, err := range db.Hours(load, math.MinInt64, hourOf(to)) {
		if err == nil || !errors.Is(err, store.ErrDamaged) {
			return err == nil, err
		}
	}
	for _, err := range db.Minutes(load, hourOf(to), to) {
		if err == nil || !errors.Is(err, store.ErrDamaged) {
			return err == nil, err
		}
	}
	return false, nil
}
