package answer

import (
	"net/url"
	"strconv"
	"time"
)

// LoadsQuery asks for the present figures of the loads, by pages in the order of the site file.
type LoadsQuery struct {
	Limit int    // of a page; 0 is UsualPage
	After string // the load behind which the page begins; empty for the first
}

// Values are the parameters of q.
func (q LoadsQuery) Values() url.Values {
	v := url.Values{}
	if q.Limit != 0 {
		v.Set("limit", strconv.Itoa(q.Limit))
	}
	if q.After != "" {
		v.Set("after", q.After)
	}
	return v
}

// LoadsQueryOf reads the parameters back.
func LoadsQueryOf(v url.Values) (q LoadsQuery, err error) {
	var limit string
	fields := map[string]*string{"limit": &limit, "after": &q.After}
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, Wrongf("%s is no parameter; known: limit, after", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	q.Limit, err = limitOf(limit)
	return q, err
}

// Loads are the present figures, at one instant.
type Loads struct {
	Site string `json:"site"`
	// At is event time: all up to it is accounted for.
	At time.Time `json:"at"`
	// Factor is that of the uncertainty called expanded; the others are standard.
	Factor float64   `json:"coverage_factor"`
	Loads  []Present `json:"loads"`
	Next   string    `json:"next,omitempty"` // where the next page is
}

// Following is where the next page is; empty for none.
func (l *Loads) Following() string { return l.Next }

// Present is the present figure of a load. What is null is not known now, or there is none.
type Present struct {
	Load    string `json:"load"`
	Verdict string `json:"verdict"`
	Quality string `json:"quality"` // of the figure, the worst of its readings
	// Remark is why there is no figure, or what to bear in mind with it.
	Remark   string     `json:"remark,omitempty"`
	At       *time.Time `json:"at"` // of the figure
	Duty     *float64   `json:"duty_W"`
	Expanded *float64   `json:"expanded_uncertainty_W"`
	// Expected is what the design expects, with its uncertainty by what lasts and the allowance
	// to either side.
	Expected  *float64 `json:"expected_W"`
	ExpectedU *float64 `json:"expected_uncertainty_W"`
	Allowance *float64 `json:"allowance_W"`
	// Deviation is the mean duty less what was expected of it, over the minutes that a deviation
	// must last.
	Deviation  *float64 `json:"deviation_W"`
	DeviationU *float64 `json:"deviation_uncertainty_W"`
	Means      []Mean   `json:"means"`
	Register   Register `json:"register"` // as last committed to disk
}

// Mean is a rolling mean of the duty, over the measured part of its window.
type Mean struct {
	Window   float64  `json:"window_s"`
	Duty     *float64 `json:"mean_duty_W"`
	Coverage float64  `json:"coverage"`
}
