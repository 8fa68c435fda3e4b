package relay

import (
	"maps"
	"math"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/ingest/quality"
)

// document is what is told of a load. Its keys are those of configs/result.schema.json.
type document struct {
	Site        string             `json:"site"`
	Load        string             `json:"load"`
	Time        string             `json:"time"`
	Duty        *float64           `json:"duty_watts"`
	Uncertainty *float64           `json:"uncertainty_watts"`
	Verdict     string             `json:"verdict"`
	Quality     string             `json:"quality"`
	Reason      string             `json:"reason,omitempty"`
	Given       float64            `json:"heat_given_joules"`
	Taken       float64            `json:"heat_taken_joules"`
	BridgedOut  float64            `json:"bridged_given_joules"`
	BridgedIn   float64            `json:"bridged_taken_joules"`
	Measured    float64            `json:"measured_seconds"`
	Uncertain   float64            `json:"uncertain_seconds"`
	Bridged     float64            `json:"bridged_seconds"`
	Missing     float64            `json:"missing_seconds"`
	Coverage    map[string]float64 `json:"coverage_ratio"`
}

// windows are the keys of the coverages, in the order of [loads.Windows].
var windows = [len(loads.Windows)]string{"1m", "15m", "1h"}

func (r *Relay) document(s *view.Snapshot, i int, now int64) document {
	figure, verdict := s.Current(i, now)
	l := &s.Loads[i]
	d := document{
		Site: r.site, Load: l.Name, Time: time.Unix(0, s.At).UTC().Format(time.RFC3339Nano),
		Verdict: verdict.String(), Quality: quality.Bad.String(), Reason: figure.Reason,
		Given: math.Round(l.Booked.Given), Taken: math.Round(l.Booked.Taken),
		BridgedOut: math.Round(l.Booked.BridgedGiven), BridgedIn: math.Round(l.Booked.BridgedTaken),
		Measured: seconds(l.Booked.Measured), Uncertain: seconds(l.Booked.Uncertain),
		Bridged: seconds(l.Booked.Bridged), Missing: seconds(l.Booked.Missing),
		Coverage: make(map[string]float64, len(windows)),
	}
	if figure.Measured() {
		d.Duty, d.Uncertainty = tenth(figure.Duty), tenth(figure.Uncertainty)
		d.Quality = figure.Mark.Quality().String()
	}
	for k, name := range windows {
		d.Coverage[name] = math.Round(s.Mean(i, k, now).Coverage*1e4) / 1e4
	}
	return d
}

// same tells whether two documents differ in their time at most.
func (d *document) same(o *document) bool {
	return equal(d.Duty, o.Duty) && equal(d.Uncertainty, o.Uncertainty) &&
		d.Verdict == o.Verdict && d.Quality == o.Quality && d.Reason == o.Reason &&
		d.Given == o.Given && d.Taken == o.Taken && d.BridgedOut == o.BridgedOut && d.BridgedIn == o.BridgedIn &&
		d.Measured == o.Measured && d.Uncertain == o.Uncertain && d.Bridged == o.Bridged && d.Missing == o.Missing &&
		maps.Equal(d.Coverage, o.Coverage)
}

func equal(a, b *float64) bool { return a == b || a != nil && b != nil && *a == *b }

// tenth rounds to a tenth of a watt; what is no number is none.
func tenth(x float64) *float64 {
	x = math.Round(x*10) / 10
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

// seconds of a span in ns, to the millisecond.
func seconds(ns int64) float64 { return math.Round(float64(ns)/1e6) / 1e3 }
