package agent

import (
	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"slices"
	"strings"
	"time"
)

// windows is the length of the demand windows by a kind of period; 0 for none.
func windows(q answer.Query, by account.By) time.Duration {
	switch {
	case q.Demand == answer.NoDemand, q.Demand == 0 && by == account.Hour:
		return 0
	case q.Demand == 0:
		return 15 * time.Minute
	}
	return q.Demand
}

// planOf is q as the account takes it, event time having come to through.
func planOf(q answer.Query, zone *time.Location, through int64) (p account.Plan, err error) {
	p = account.Plan{Through: through, Zone: zone, By: account.Day}
	if q.By != "" {
		kinds := account.Kinds()
		i := slices.IndexFunc(kinds, func(b account.By) bool { return b.String() == q.By })
		if i < 0 {
			return p, answer.Wrongf("by %q: allowed are hour, day, month", q.By)
		}
		p.By = kinds[i]
	}
	if p.Demand = windows(q, p.By); p.Demand != 0 && !slices.Contains(account.DemandLengths(), p.Demand) {
		return p, answer.Wrongf("demand %v: allowed are 5m, 10m, 15m, 20m, 30m, 1h and none", p.Demand)
	}
	if q.From == "" {
		return p, answer.Wrongf("from is missing; write a date such as 2026-12-01")
	}
	if p.From, err = account.Instant(q.From, zone); err != nil {
		return p, answer.Wrongf("from %v", err)
	}
	p.To = p.Accounted()
	if q.To == "" {
		return p, nil
	}
	if p.To, err = account.Instant(q.To, zone); err != nil {
		return p, answer.Wrongf("to %v", err)
	}
	if p.From >= p.To {
		return p, answer.Wrongf("to %s is not after from %s; it is the end, and not in the report itself: for one day write the next", q.To, q.From)
	}
	return p, nil
}

// placeOf is the zone of a name that was asked for, else its own.
func placeOf(zone string, own *time.Location) (*time.Location, error) {
	switch {
	case zone == "" && own == nil:
		return nil, answer.Wrongf("zone is missing: the history does not say where the plant is; write an IANA name such as Europe/Dublin")
	case zone == "":
		return own, nil
	case strings.EqualFold(zone, "local"):
		return nil, answer.Wrongf("zone %q: write an IANA name such as Europe/Dublin", zone)
	}
	place, err := time.LoadLocation(zone)
	if err != nil {
		return nil, answer.Wrongf("zone %q is not known; write an IANA name such as Europe/Dublin", zone)
	}
	return place, nil
}
