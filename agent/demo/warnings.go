package demo

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/view"
	"heatreeve/agent/warn"
)

// exchangerLine tells what an exchanger does beside what it would do clean, and when fouling
// comes to its allowance.
func exchangerLine(x *view.Exchanger, zone *time.Location) string {
	name := x.Name + " at " + time.Unix(0, x.At).In(zone).Format("15:04")
	if x.Why != "" {
		return name + ": " + x.Why
	}
	ua, u := x.Observed.Conductance/1e3, 2*x.RatioError*x.Observed.Conductance/1e3
	line := fmt.Sprintf("%s: UA %s ± %s kW/K, %.0f %% of clean", name, number(ua, places(u)), number(u, places(u)), 100*math.Exp(x.Ratio))
	if days, early, late, ok := x.Reached(); ok {
		line += fmt.Sprintf("; fouling reaches its allowance in %.3g d, %s", days, between(early, late))
	}
	return line
}

// between is an interval of days.
func between(early, late float64) string {
	if math.IsInf(late, 1) {
		return fmt.Sprintf("%.2g d at the soonest", early)
	}
	return fmt.Sprintf("%.2g to %.2g d", early, late)
}

// places is how many decimals show two digits of u.
func places(u float64) int {
	if !(u > 0) {
		return 1
	}
	return min(6, max(0, 1-int(math.Floor(math.Log10(u)))))
}

// warningLine tells a warning, since when, and what to look at first.
func warningLine(l *warn.Listed, zone *time.Location) string {
	line := fmt.Sprintf("warning: %s %s by %.2g %% since %s", l.Subject, l.Kind, 100*math.Abs(l.Now), time.Unix(0, l.Since).In(zone).Format("Mon 15:04"))
	if len(l.Causes) > 0 {
		line += "; look first: " + l.Causes[0].Says
	}
	return line + " (" + string(l.State()) + ")"
}
