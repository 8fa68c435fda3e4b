package answer

import (
	"errors"
	"fmt"
	"net/url"
	"slices"
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
		return Wrongf("demand %q is no length of time; write 15m, 30m, 1h or none", text)
	case !slices.Contains(account.DemandLengths(), d):
		return Wrongf("demand %v: allowed are 5m, 10m, 15m, 20m, 30m, 1h and none", d)
	}
	q.Demand = d
	return nil
}

// QueryError tells what of a [Query] cannot be answered. Its text begins with the
// name of the parameter, in lower case.
type QueryError struct{ Text string }

func (e *QueryError) Error() string { return e.Text }

// ErrNoRecord says that there is nothing to answer with.
var ErrNoRecord = errors.New("the history holds no record")

// Wrongf returns a *[QueryError].
func Wrongf(format string, args ...any) error { return &QueryError{fmt.Sprintf(format, args...)} }

// Values are the parameters of q as the agent's page takes them.
func (q Query) Values() url.Values {
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

// QueryOf reads the parameters back.
func QueryOf(v url.Values) (q Query, err error) {
	known := map[string]*string{"from": &q.From, "to": &q.To, "by": &q.By, "zone": &q.Zone, "demand": new(string)}
	for name, texts := range v {
		switch field := known[name]; {
		case name == "load":
			q.Loads = texts
		case field == nil:
			return q, Wrongf("%s is no parameter; known: from, to, by, load, demand, zone", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	return q, q.SetDemand(*known["demand"])
}
