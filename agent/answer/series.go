package answer

import (
	"net/url"
	"strconv"
	"time"
)

const (
	// UsualPoints is how many points a [Series] has where no number is asked for, at most.
	UsualPoints = 600
	// MostPoints bounds them.
	MostPoints = 2000
)

// SeriesQuery asks for the course of a load. From and To are instants as [account.Moment] reads
// them.
type SeriesQuery struct {
	Load     string
	From, To string // To is empty for as far as the history goes
	Points   int    // at most; 0 is UsualPoints
	Zone     string // IANA name of the time zone; empty for the site's
}

// Values are the parameters of q as the agent's page takes them.
func (q SeriesQuery) Values() url.Values {
	v := url.Values{}
	for name, text := range map[string]string{"load": q.Load, "from": q.From, "to": q.To, "zone": q.Zone} {
		if text != "" {
			v.Set(name, text)
		}
	}
	if q.Points != 0 {
		v.Set("points", strconv.Itoa(q.Points))
	}
	return v
}

// SeriesQueryOf reads the parameters back.
func SeriesQueryOf(v url.Values) (q SeriesQuery, err error) {
	var points string
	fields := map[string]*string{"load": &q.Load, "from": &q.From, "to": &q.To, "zone": &q.Zone, "points": &points}
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, Wrongf("%s is no parameter; known: load, from, to, points, zone", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	if points != "" {
		if q.Points, err = strconv.Atoi(points); err != nil || q.Points == 0 {
			return q, Wrongf("points %q: allowed are 1 to %d", points, MostPoints)
		}
	}
	return q, q.Check()
}

// Check tells what of q cannot be answered, by a *[QueryError].
func (q *SeriesQuery) Check() error {
	switch {
	case q.Points < 0 || q.Points > MostPoints:
		return Wrongf("points \"%d\": allowed are 1 to %d", q.Points, MostPoints)
	case q.Load == "":
		return Wrongf("load is missing; name the load whose course is asked for")
	case q.From == "":
		return Wrongf("from is missing; write a date such as 2026-12-01")
	}
	return nil
}

// Series is the course of a load, thinned so that no peak is lost: a point is a span of equal
// length, with the least and the greatest duty of its minutes. Points begin at multiples of their
// length by UTC, and follow each other without a gap from the one that holds From to the one that
// holds the end of To or Accounted; the first and the last hold no more than lies within these,
// unless minutes are no longer left. All columns are equally long; what is null was not measured,
// or there is none. Means are by the measured time, what was expected by that in which something
// was.
type Series struct {
	Load string    `json:"load"`
	Zone string    `json:"zone"`
	From time.Time `json:"from"`
	To   time.Time `json:"to"`
	// Accounted is how far event time has come in the history.
	Accounted time.Time `json:"accounted_to"`
	Span      float64   `json:"span_s"` // of a point
	Start     []int64   `json:"start"`  // of each point, Unix s

	Lowest      []*float64 `json:"lowest_duty_W"`
	Highest     []*float64 `json:"highest_duty_W"`
	Mean        []*float64 `json:"mean_duty_W"`
	Uncertainty []*float64 `json:"uncertainty_W"` // standard, of the mean
	Expected    []*float64 `json:"expected_W"`
	ExpectedU   []*float64 `json:"expected_uncertainty_W"` // standard, by what lasts
	Inlet       []*float64 `json:"inlet_K"`
	Outlet      []*float64 `json:"outlet_K"`
	Flow        []*float64 `json:"flow_kg_per_s"`
	Measured    []float64  `json:"measured_s"`
	Bridged     []float64  `json:"bridged_s"`
	Given       []float64  `json:"given_J"`
	Taken       []float64  `json:"taken_J"`
	// Unused is how many records cannot be used, and are missing.
	Unused int `json:"records_not_used,omitempty"`
}
