package metrics

import (
	"strings"
	"testing"

	"github.com/prometheus/client_golang/prometheus/testutil"

	"heatreeve/agent/view"
)

func TestSparkplugCounts(t *testing.T) {
	s := snapshot()
	if n, err := testutil.GatherAndCount(registry(s, instant), "heatreeve_sparkplug_messages_total", "heatreeve_sparkplug_gaps_total"); err != nil || n != 0 {
		t.Errorf("%d series, %v, of a site without Sparkplug", n, err)
	}
	s.Sparkplug = &view.Sparkplug{Births: 1, Deaths: 2, LateDeaths: 3, Unborn: 4, Malformed: 5, Retained: 6, Crowded: 7, Gaps: 8, Missed: 9, Reordered: 10, UnknownAlias: 11, Requests: 12}
	const want = `
# HELP heatreeve_sparkplug_messages_total Messages of Sparkplug B since the agent started that are no data of a source that is born, by kind.
# TYPE heatreeve_sparkplug_messages_total counter
heatreeve_sparkplug_messages_total{kind="before-birth"} 4
heatreeve_sparkplug_messages_total{kind="birth"} 1
heatreeve_sparkplug_messages_total{kind="crowded"} 7
heatreeve_sparkplug_messages_total{kind="death"} 2
heatreeve_sparkplug_messages_total{kind="late-death"} 3
heatreeve_sparkplug_messages_total{kind="malformed"} 5
heatreeve_sparkplug_messages_total{kind="retained"} 6
# HELP heatreeve_sparkplug_gaps_total Gaps in the sequences of Sparkplug nodes.
# TYPE heatreeve_sparkplug_gaps_total counter
heatreeve_sparkplug_gaps_total 8
# HELP heatreeve_sparkplug_missed_messages_total Messages missing in the sequences of Sparkplug nodes; some may have come later.
# TYPE heatreeve_sparkplug_missed_messages_total counter
heatreeve_sparkplug_missed_messages_total 9
# HELP heatreeve_sparkplug_reordered_messages_total Sparkplug messages that were missing and came later.
# TYPE heatreeve_sparkplug_reordered_messages_total counter
heatreeve_sparkplug_reordered_messages_total 10
# HELP heatreeve_sparkplug_unknown_alias_total Sparkplug metrics whose alias no birth has told.
# TYPE heatreeve_sparkplug_unknown_alias_total counter
heatreeve_sparkplug_unknown_alias_total 11
# HELP heatreeve_sparkplug_rebirth_requests_total Births that Sparkplug nodes were asked for.
# TYPE heatreeve_sparkplug_rebirth_requests_total counter
heatreeve_sparkplug_rebirth_requests_total 12
`
	err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(want), "heatreeve_sparkplug_messages_total", "heatreeve_sparkplug_gaps_total",
		"heatreeve_sparkplug_missed_messages_total", "heatreeve_sparkplug_reordered_messages_total", "heatreeve_sparkplug_unknown_alias_total", "heatreeve_sparkplug_rebirth_requests_total")
	if err != nil {
		t.Error(err)
	}
}
