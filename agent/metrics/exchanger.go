package metrics

import (
	"heatreeve/agent/view"
)

var (
	window         = desc("exchanger_window_timestamp_seconds", "Unix time at which the last minutes ended in which both sides flowed and were steady; the figures of an exchanger are of these, and are left out when they are more than an hour old.", "exchanger")
	closure        = desc("exchanger_closure_watts", "Duty of the hot side less that of the cold side and the loss.", "exchanger")
	closureU       = desc("exchanger_closure_uncertainty_watts", "Standard uncertainty of the closure, by what lasts.", "exchanger")
	reconciled     = desc("exchanger_reconciled_duty_watts", "Duty of the hot side with the readings of both sides reconciled.", "exchanger")
	conductance    = desc("exchanger_conductance_watts_per_kelvin", "Conductance UA that both sides tell; left out where the effectiveness is too near its limit.", "exchanger")
	conductanceU   = desc("exchanger_conductance_uncertainty_watts_per_kelvin", "Standard uncertainty of the conductance beside that of the clean exchanger, by what lasts.", "exchanger")
	cleanly        = desc("exchanger_clean_conductance_watts_per_kelvin", "Conductance UA of the clean exchanger at the same flows.", "exchanger")
	effectiveness  = desc("exchanger_effectiveness_ratio", "Effectiveness of the exchanger.", "exchanger")
	fouling        = desc("exchanger_fouling_kelvins_per_watt", "Resistance to heat beyond that of the clean exchanger.", "exchanger")
	foulingU       = desc("exchanger_fouling_uncertainty_kelvins_per_watt", "Standard uncertainty of that resistance, by what lasts.", "exchanger")
	approach       = desc("exchanger_approach_kelvins", "Least difference of temperature at an end of the exchanger.", "exchanger")
	foulingReached = desc("exchanger_fouling_allowance_reached_days", "In how many days fouling comes to its allowance by its course of days; left out where it does not.", "exchanger")
)

// exchangers are those of the site that have had a window of late.
func (o *sink) exchangers(s *view.Snapshot) {
	for i := range s.Exchangers {
		if x, ok := s.Told(i); ok {
			o.exchanger(x)
		}
	}
}

func (o *sink) exchanger(x *view.Exchanger) {
	o.gauge(window, float64(x.At)/1e9, x.Name)
	o.gauge(closure, x.Closure, x.Name)
	o.gauge(closureU, x.Errors.Closure, x.Name)
	if x.Pair.Duty > 0 {
		o.gauge(reconciled, x.Pair.Duty, x.Name)
	}
	if x.Why != "" {
		return
	}
	seen := &x.Observed
	o.gauge(conductance, seen.Conductance, x.Name)
	o.gauge(conductanceU, x.RatioError*seen.Conductance, x.Name)
	o.gauge(cleanly, seen.Clean, x.Name)
	o.gauge(effectiveness, seen.Effectiveness, x.Name)
	o.gauge(fouling, seen.Fouling, x.Name)
	o.gauge(foulingU, x.FoulingError, x.Name)
	o.gauge(approach, seen.Approach, x.Name)
	if days, _, _, ok := x.Reached(); ok {
		o.gauge(foulingReached, days, x.Name)
	}
}
