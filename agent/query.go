package agent

import (
	"fmt"
	"net/url"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/account"
)

// Query says what a [Report] is to hold.
type Query struct {
	// From and To are instants as [account.Instant] reads them. To is not in the
	// report any more; empty is as far as the history goes.
	From, To string
	By       string        // hour, day or month; empty is day
	Loads    []string      // empty for all
	Demand   time.Duration // length of the demand windows; 0 for 15 minutes by day and by month and none by hour
	Zone     string        // IANA name of the time zone; empty for the site's
}

// NoDemand is the length of demand windows where there are to be none.
const NoDemand time.Duration = -1

const noDemand = "none"

// SetDemand reads a length of demand windows, or none; what is empty leaves it as it is.
func (q *Query) SetDemand(text string) error {
	switch text {
	case "":
		return nil
	case noDemand:
		q.Demand = NoDemand
		return nil
	}
	d, err := time.ParseDuration(text)
	switch {
	case err != nil:
		return queryErrorf("demand %q is no length of time; write 15m, 30m, 1h or none", text)
	case !slices.Contains(account.DemandLengths(), d):
		return queryErrorf("demand %v: allowed are 5m, 10m, 15m, 20m, 30m, 1h and none", d)
	}
	q.Demand = d
	return nil
}

// windows is the length of the demand windows by a kind of period; 0 for none.
func (q Query) windows(by account.By) time.Duration {
	switch {
	case q.Demand == NoDemand, q.Demand == 0 && by == account.Hour:
		return 0
	case q.Demand == 0:
		return 15 * time.Minute
	}
	return q.Demand
}

// QueryError tells what of a [Query] cannot be answered. Its text begins with the
// name of the parameter, in lower case.
type QueryError struct{ Text string }

func (e *QueryError) Error() string { return e.Text }

func queryErrorf(format string, args ...any) error { return &QueryError{fmt.Sprintf(format, args...)} }

// values are the parameters of q as the agent's page takes them.
func (q Query) values() url.Values {
	v := url.Values{}
	for name, text := range map[string]string{"from": q.From, "to": q.To, "by": q.By, "zone": q.Zone} {
		if text != "" {
			v.Set(name, text)
		}
	}
	for _, l := range q.Loads {
		v.Add("load", l)
	}
	switch q.Demand {
	case 0:
	case NoDemand:
		v.Set("demand", noDemand)
	default:
		v.Set("demand", q.Demand.String())
	}
	return v
}

// queryOf reads the parameters back.
func queryOf(v url.Values) (q Query, err error) {
	known := map[string]*string{"from": &q.From, "to": &q.To, "by": &q.By, "zone": &q.Zone, "demand": new(string)}
	for name, texts := range v {
		switch field := known[name]; {
		case name == "load":
			q.Loads = texts
		case field == nil:
			return q, queryErrorf("%s is no parameter; known: from, to, by, load, demand, zone", name)
		case len(texts) != 1:
			return q, queryErrorf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	return q, q.SetDemand(*known["demand"])
}

// plan is q as the account takes it, event time having come to through.
func (q Query) plan(zone *time.Location, through int64) (p account.Plan, err error) {
	p = account.Plan{Through: through, Zone: zone, By: account.Day}
	if q.By != "" {
		kinds := account.Kinds()
		i := slices.IndexFunc(kinds, func(b account.By) bool { return b.String() == q.By })
		if i < 0 {
			return p, queryErrorf("by %q: allowed are hour, day, month", q.By)
		}
		p.By = kinds[i]
	}
	if p.Demand = q.windows(p.By); p.Demand != 0 && !slices.Contains(account.DemandLengths(), p.Demand) {
		return p, queryErrorf("demand %v: allowed are 5m, 10m, 15m, 20m, 30m, 1h and none", p.Demand)
	}
	if q.From == "" {
		return p, queryErrorf("from is missing; write a date such as 2026-12-01")
	}
	if p.From, err = account.Instant(q.From, zone); err != nil {
		return p, queryErrorf("from %v", err)
	}
	p.To = p.Accounted()
	if q.To == "" {
		return p, nil
	}
	if p.To, err = account.Instant(q.To, zone); err != nil {
		return p, queryErrorf("to %v", err)
	}
	if p.From >= p.To {
		return p, queryErrorf("to %s is not after from %s; it is the end, and not in the report itself: for one day write the next", q.To, q.From)
	}
	return p, nil
}

// place is the zone that q asks for, else its own.
func (q Query) place(own *time.Location) (*time.Location, error) {
	switch {
	case q.Zone == "" && own == nil:
		return nil, queryErrorf("zone is missing: the history does not say where the plant is; write an IANA name such as Europe/Dublin")
	case q.Zone == "":
		return own, nil
	case strings.EqualFold(q.Zone, "local"):
		return nil, queryErrorf("zone %q: write an IANA name such as Europe/Dublin", q.Zone)
	}
	zone, err := time.LoadLocation(q.Zone)
	if err != nil {
		return nil, queryErrorf("zone %q is not known; write an IANA name such as Europe/Dublin", q.Zone)
	}
	return zone, nil
}
