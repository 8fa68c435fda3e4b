package account

import (
	"fmt"
	"iter"
	"slices"
	"time"
)

// Plan says what an account is to hold.
type Plan struct {
	From, To int64 // whole minutes; To is not in it any more
	// Through is how far event time has come: nothing is accounted for after the
	// last whole minute before it.
	Through int64
	By      By
	Zone    *time.Location
	Demand  time.Duration // length of a demand window, one of DemandLengths; 0 for none
}

// DemandLengths are the lengths that a demand window may have: they divide the hour.
func DemandLengths() []time.Duration {
	return []time.Duration{5 * time.Minute, 10 * time.Minute, 15 * time.Minute, 20 * time.Minute, 30 * time.Minute, time.Hour}
}

// Accounted is the last whole minute that event time has come to: records of
// the minute under way are not there yet.
func (p *Plan) Accounted() int64 { return p.Through - p.Through%minute }

// Until is where the account ends: at To, or where event time has come to before.
func (p *Plan) Until() int64 { return min(p.To, p.Accounted()) }

// Check tells what is wrong with the plan.
func (p *Plan) Check() error {
	switch {
	case !slices.Contains(Kinds(), p.By):
		return fmt.Errorf("periods of kind %d: there are hour, day and month", p.By)
	case p.Demand != 0 && !slices.Contains(DemandLengths(), p.Demand):
		return fmt.Errorf("demand window of %v: allowed are 5, 10, 15, 20, 30 and 60 minutes", p.Demand)
	case p.From >= p.To:
		return fmt.Errorf("the account ends at %s, not after its beginning at %s", p.stamp(p.To), p.stamp(p.From))
	}
	return nil
}

func (p *Plan) stamp(t int64) string {
	return time.Unix(0, t).In(p.Zone).Format("2006-01-02 15:04 -07:00")
}

// Periods adds records up to the periods of a plan that passes [Plan.Check], in
// their order and without a gap; the first and the last may be there in part. Periods
// without a record are all missing.
//
// Records must come in the order of time and each lie whole in one period. What does
// not is yielded as an error and not counted, and so is an error of records itself; the
// account goes on unless the caller stops. A record that does not lie whole in one
// demand window is in none unless it has a demand of its own, and neither is one that is
// cut.
func Periods(p Plan, records iter.Seq2[Record, error]) iter.Seq2[Period, error] {
	return func(yield func(Period, error) bool) {
		f := fold{plan: p, last: p.From}
		f.begin(p.From)
		for r, err := range records {
			if err == nil {
				err = f.check(&r)
			}
			if err != nil {
				if !yield(Period{}, err) {
					return
				}
				continue
			}
			for r.Start >= f.period.End {
				if !yield(f.close(), nil) {
					return
				}
			}
			if err := f.add(&r); err != nil && !yield(Period{}, err) {
				return
			}
		}
		for f.period.From < f.period.To {
			if !yield(f.close(), nil) {
				return
			}
		}
	}
}

// fold is a period in the making.
type fold struct {
	plan   Plan
	last   int64 // end of the last record
	period Period
	sums   sums
	window demandWindow
}

// begin starts the period that holds t.
func (f *fold) begin(t int64) {
	start, end := f.plan.By.Bounds(t, f.plan.Zone)
	f.period = Period{Start: start, End: end, From: max(start, f.plan.From), To: min(end, f.plan.Until())}
	f.sums, f.window = sums{}, demandWindow{}
}

// check tells what keeps r out of the account.
func (f *fold) check(r *Record) error {
	if err := r.check(); err != nil {
		return err
	}
	if r.Start < f.last || r.End > f.plan.Until() {
		return fmt.Errorf("record at %s: is before %s or goes on after %s", stamp(r.Start), stamp(f.last), stamp(f.plan.Until()))
	}
	return nil
}

func (f *fold) add(r *Record) error {
	p := &f.period
	if r.End > p.End {
		return fmt.Errorf("record at %s: its %v go on after %s, where the %s ends", stamp(r.Start), time.Duration(r.End-r.Start), stamp(p.End), f.plan.By)
	}
	if f.plan.Demand != 0 {
		f.demand(r)
	}
	f.last = r.End
	if r.Measured > 0 {
		start, end := r.holder()
		p.extremes(f.sums.measured > 0, Extreme{r.Lowest, start, end}, Extreme{r.Highest, start, end})
	}
	f.sums.add(&r.Amounts)
	return nil
}

// close ends the period, starts the next one and returns the first.
func (f *fold) close() Period {
	f.settle()
	p := f.period
	p.Amounts = f.sums.amounts()
	p.Missing = p.To - p.From - p.Measured - p.Bridged
	if f.plan.Demand != 0 {
		p.Demand.Windows = windows(&p, int64(f.plan.Demand), f.plan.Zone)
	}
	f.begin(p.End)
	return p
}
