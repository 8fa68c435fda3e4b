package metrics

import (
	"strings"
	"testing"

	"github.com/prometheus/client_golang/prometheus/testutil"

	"heatreeve/agent/design"
	"heatreeve/agent/design/balance"
	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/view"
)

// The figures of an exchanger are of its last window, and leave with it.
func TestExchangers(t *testing.T) {
	s := &view.Snapshot{At: instant, Exchangers: []view.Exchanger{{Name: "plates", Allowance: 1e-5, Standing: design.Standing{
		At: instant - 60e9, Statistics: exchanger.Statistics{Closure: 1500}, Errors: exchanger.Statistics{Closure: 2000},
		Observed: exchanger.Observed{Conductance: 16e3, Clean: 17e3, Effectiveness: 0.57, Fouling: 3.68e-6, Approach: 30},
		Pair:     balance.Pair{Duty: 638e3}, RatioError: 0.02, FoulingError: 1.25e-6,
	}}}}
	const want = `
# HELP heatreeve_exchanger_conductance_watts_per_kelvin Conductance UA that both sides tell; left out where the effectiveness is too near its limit.
# TYPE heatreeve_exchanger_conductance_watts_per_kelvin gauge
heatreeve_exchanger_conductance_watts_per_kelvin{exchanger="plates"} 16000
# HELP heatreeve_exchanger_conductance_uncertainty_watts_per_kelvin Standard uncertainty of the conductance beside that of the clean exchanger, by what lasts.
# TYPE heatreeve_exchanger_conductance_uncertainty_watts_per_kelvin gauge
heatreeve_exchanger_conductance_uncertainty_watts_per_kelvin{exchanger="plates"} 320
# HELP heatreeve_exchanger_reconciled_duty_watts Duty of the hot side with the readings of both sides reconciled.
# TYPE heatreeve_exchanger_reconciled_duty_watts gauge
heatreeve_exchanger_reconciled_duty_watts{exchanger="plates"} 638000
# HELP heatreeve_exchanger_closure_watts Duty of the hot side less that of the cold side and the loss.
# TYPE heatreeve_exchanger_closure_watts gauge
heatreeve_exchanger_closure_watts{exchanger="plates"} 1500
`
	names := []string{
		"heatreeve_exchanger_conductance_watts_per_kelvin", "heatreeve_exchanger_conductance_uncertainty_watts_per_kelvin",
		"heatreeve_exchanger_reconciled_duty_watts", "heatreeve_exchanger_closure_watts",
	}
	if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(want), names...); err != nil {
		t.Error(err)
	}
	s.Exchangers[0].Why = "the effectiveness is too near its limit"
	if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(want[strings.Index(want, "# HELP heatreeve_exchanger_reconciled"):]), names...); err != nil {
		t.Errorf("without a conductance: %v", err)
	}
	s.At += 3600e9
	if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(""), names...); err != nil {
		t.Errorf("an hour later: %v", err)
	}
}
