package metrics

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/testutil"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/agent/warn"
	"heatreeve/ingest/quality"
)

const instant = int64(1_700_000_000_500_000_000)

func snapshot() *view.Snapshot {
	return &view.Snapshot{
		At: instant, Slack: 7e9,
		Loads: []view.Load{
			{
				Name: "hot-water", Verdict: design.Short, Design: 640e3, Allow: 0.08,
				Figure:  loads.Figure{At: instant, Duty: 500e3, Uncertainty: 6e3, Random: 2e3, MassFlow: 3, Inlet: 403.15, Outlet: 363.15, Mark: quality.Stuck, By: "TT-1"},
				Until:   instant + 30e9,
				Means:   [3]loads.Mean{{Duty: 501e3, Coverage: 1}, {Duty: 510e3, Coverage: 0.9}, {Duty: 520e3, Coverage: 0.25}},
				Booked:  loads.Totals{Given: 1.5e9, Taken: 2, BridgedGiven: 3e6, BridgedTaken: 5, Measured: 3600e9, Bridged: 90e9, Missing: 60e9, Uncertain: 120e9},
				Witness: &view.Witness{Counted: 2e9, Served: 1.5e9, Deviation: -0.25, Told: true},
			},
			{Name: "dryer", Verdict: design.Blind, Figure: loads.Figure{Fault: loads.Stale, Reason: "old"}, Witness: &view.Witness{}},
			{Name: "spare", Verdict: design.Idle, Figure: loads.Figure{Idle: true}, Until: instant + 30e9},
		},
		Tags: []view.Tag{
			{Name: "TT-1", Newest: instant, MaxAge: 30e9, Accepted: 12, Late: 1, Repeated: 2, Refused: []view.Refusal{{Reason: "empty", Count: 3}, {Reason: "ahead"}}, Doubted: []view.Doubt{{Reason: "stuck", Count: 6}, {Reason: "failure", Count: 1}}},
			{Name: "TT-2", Doubted: []view.Doubt{{Reason: "stuck", Count: 5}}, Refused: []view.Refusal{{Reason: "empty", Count: 4}, {Reason: "ahead"}}},
		},
		Broker:  view.Broker{Connected: true, Losses: 4, UnknownTopic: 5, Waiting: 7},
		History: view.History{Bytes: 65536, Failures: 1},
	}
}

// registry gathers what the agent shows. It looks for clashes, as the agent does not.
func registry(s *view.Snapshot, now int64) prometheus.Gatherer {
	r := prometheus.NewPedanticRegistry()
	r.MustRegister(BuildInfo("test"), CommitSeconds(), NewDoors())
	c := NewCollector(func() *view.Snapshot { return s }, func() int64 { return now })
	return prometheus.Gatherers{c.Beside(r)}
}

func TestFigures(t *testing.T) {
	want := `
# HELP heatreeve_load_duty_watts Duty at the last beat, positive in the load's own service; absent while the load is blind. It is Q in the working of heatreeve explain.
# TYPE heatreeve_load_duty_watts gauge
heatreeve_load_duty_watts{load="hot-water"} 500000
heatreeve_load_duty_watts{load="spare"} 0
# HELP heatreeve_load_inlet_celsius Inlet temperature that the duty was computed from. It is T1 in the working of heatreeve explain. With a hold it is T1h.
# TYPE heatreeve_load_inlet_celsius gauge
heatreeve_load_inlet_celsius{load="hot-water"} 130
# HELP heatreeve_load_coverage_ratio Part of the window that was measured, 0 to 1.
# TYPE heatreeve_load_coverage_ratio gauge
heatreeve_load_coverage_ratio{load="dryer",window="15m"} 0
heatreeve_load_coverage_ratio{load="dryer",window="1h"} 0
heatreeve_load_coverage_ratio{load="dryer",window="1m"} 0
heatreeve_load_coverage_ratio{load="hot-water",window="15m"} 0.9
heatreeve_load_coverage_ratio{load="hot-water",window="1h"} 0.25
heatreeve_load_coverage_ratio{load="hot-water",window="1m"} 1
heatreeve_load_coverage_ratio{load="spare",window="15m"} 0
heatreeve_load_coverage_ratio{load="spare",window="1h"} 0
heatreeve_load_coverage_ratio{load="spare",window="1m"} 0
# HELP heatreeve_load_witness_counted_joules Heat that the load's witness has counted since midnight by the clock of the site, in spans between two of its counts that were measured throughout.
# TYPE heatreeve_load_witness_counted_joules gauge
heatreeve_load_witness_counted_joules{load="dryer"} 0
heatreeve_load_witness_counted_joules{load="hot-water"} 2e+09
# HELP heatreeve_load_witness_deviation_ratio How far the load is above its witness since midnight, as a fraction of what that has counted; absent until it has counted anything.
# TYPE heatreeve_load_witness_deviation_ratio gauge
heatreeve_load_witness_deviation_ratio{load="hot-water"} -0.25
# HELP heatreeve_load_witness_served_joules Heat that the load has served in the same spans as its witness has counted since midnight, positive in the load's own service.
# TYPE heatreeve_load_witness_served_joules gauge
heatreeve_load_witness_served_joules{load="dryer"} 0
heatreeve_load_witness_served_joules{load="hot-water"} 1.5e+09
# HELP heatreeve_load_expected_duty_watts Expected duty, what the design says of the conditions of the last minute. It is Qd in the working of heatreeve explain.
# TYPE heatreeve_load_expected_duty_watts gauge
heatreeve_load_expected_duty_watts{load="hot-water"} 640000
# HELP heatreeve_tag_reading_timestamp_seconds Unix time of the newest accepted reading.
# TYPE heatreeve_tag_reading_timestamp_seconds gauge
heatreeve_tag_reading_timestamp_seconds{tag="TT-1"} 1.7000000005e+09
# HELP heatreeve_tag_max_age_seconds How long a reading holds; left out where it does as long as its source is alive.
# TYPE heatreeve_tag_max_age_seconds gauge
heatreeve_tag_max_age_seconds{tag="TT-1"} 30
# HELP heatreeve_tag_refused_total Messages refused since the agent started, by tag and reason; reasons that a tag has not met are left out.
# TYPE heatreeve_tag_refused_total counter
heatreeve_tag_refused_total{reason="empty",tag="TT-1"} 3
heatreeve_tag_refused_total{reason="empty",tag="TT-2"} 4
# HELP heatreeve_refused_total Messages refused since the agent started, by reason, over all tags.
# TYPE heatreeve_refused_total counter
heatreeve_refused_total{reason="ahead"} 0
heatreeve_refused_total{reason="empty"} 7
`
	err := testutil.GatherAndCompare(registry(snapshot(), instant+5e9), strings.NewReader(want),
		"heatreeve_load_duty_watts", "heatreeve_load_inlet_celsius", "heatreeve_load_coverage_ratio",
		"heatreeve_load_witness_counted_joules", "heatreeve_load_witness_served_joules", "heatreeve_load_witness_deviation_ratio",
		"heatreeve_load_expected_duty_watts", "heatreeve_tag_reading_timestamp_seconds", "heatreeve_tag_max_age_seconds", "heatreeve_tag_refused_total", "heatreeve_refused_total")
	if err != nil {
		t.Error(err)
	}
}

func TestQuality(t *testing.T) {
	want := `
# HELP heatreeve_load_quality 1 for the quality of the figure, the worst of the readings that it was computed from, 0 for the others; bad while the load is blind.
# TYPE heatreeve_load_quality gauge
heatreeve_load_quality{load="dryer",quality="bad"} 1
heatreeve_load_quality{load="dryer",quality="good"} 0
heatreeve_load_quality{load="dryer",quality="uncertain"} 0
heatreeve_load_quality{load="hot-water",quality="bad"} 0
heatreeve_load_quality{load="hot-water",quality="good"} 0
heatreeve_load_quality{load="hot-water",quality="uncertain"} 1
heatreeve_load_quality{load="spare",quality="bad"} 0
heatreeve_load_quality{load="spare",quality="good"} 1
heatreeve_load_quality{load="spare",quality="uncertain"} 0
# HELP heatreeve_load_uncertain_seconds_total Part of the measured time for which an uncertain reading was used, as last committed to disk; survives restarts.
# TYPE heatreeve_load_uncertain_seconds_total counter
heatreeve_load_uncertain_seconds_total{load="dryer"} 0
heatreeve_load_uncertain_seconds_total{load="hot-water"} 120
heatreeve_load_uncertain_seconds_total{load="spare"} 0
# HELP heatreeve_tag_doubted_total Readings that are uncertain or bad, or good from a device that asks for maintenance, since the agent started, by tag and reason; reasons that a tag has not met are left out.
# TYPE heatreeve_tag_doubted_total counter
heatreeve_tag_doubted_total{reason="failure",tag="TT-1"} 1
heatreeve_tag_doubted_total{reason="stuck",tag="TT-1"} 6
heatreeve_tag_doubted_total{reason="stuck",tag="TT-2"} 5
# HELP heatreeve_doubted_total The same by reason, over all tags.
# TYPE heatreeve_doubted_total counter
`
	for _, m := range quality.Marks() {
		want += fmt.Sprintf("heatreeve_doubted_total{reason=%q} %d\n", m.String(), map[quality.Mark]int{quality.Stuck: 11, quality.Failed: 1}[m])
	}
	err := testutil.GatherAndCompare(registry(snapshot(), instant+5e9), strings.NewReader(want),
		"heatreeve_load_quality", "heatreeve_load_uncertain_seconds_total", "heatreeve_tag_doubted_total", "heatreeve_doubted_total")
	if err != nil {
		t.Error(err)
	}
}

func TestRegisters(t *testing.T) {
	want := `
# HELP heatreeve_load_heat_joules_total Heat that the stream gave up (given) or took up (taken), as last committed to disk; survives restarts.
# TYPE heatreeve_load_heat_joules_total counter
heatreeve_load_heat_joules_total{direction="given",load="dryer"} 0
heatreeve_load_heat_joules_total{direction="given",load="hot-water"} 1.5e+09
heatreeve_load_heat_joules_total{direction="given",load="spare"} 0
heatreeve_load_heat_joules_total{direction="taken",load="dryer"} 0
heatreeve_load_heat_joules_total{direction="taken",load="hot-water"} 2
heatreeve_load_heat_joules_total{direction="taken",load="spare"} 0
# HELP heatreeve_load_time_seconds_total Time accounted for, by kind, as last committed to disk; survives restarts.
# TYPE heatreeve_load_time_seconds_total counter
heatreeve_load_time_seconds_total{kind="bridged",load="dryer"} 0
heatreeve_load_time_seconds_total{kind="bridged",load="hot-water"} 90
heatreeve_load_time_seconds_total{kind="bridged",load="spare"} 0
heatreeve_load_time_seconds_total{kind="measured",load="dryer"} 0
heatreeve_load_time_seconds_total{kind="measured",load="hot-water"} 3600
heatreeve_load_time_seconds_total{kind="measured",load="spare"} 0
heatreeve_load_time_seconds_total{kind="missing",load="dryer"} 0
heatreeve_load_time_seconds_total{kind="missing",load="hot-water"} 60
heatreeve_load_time_seconds_total{kind="missing",load="spare"} 0
`
	want += `
# HELP heatreeve_load_bridged_heat_joules_total Heat by a straight line over short times without data, as last committed to disk; in no other register, and survives restarts.
# TYPE heatreeve_load_bridged_heat_joules_total counter
heatreeve_load_bridged_heat_joules_total{direction="given",load="dryer"} 0
heatreeve_load_bridged_heat_joules_total{direction="given",load="hot-water"} 3e+06
heatreeve_load_bridged_heat_joules_total{direction="given",load="spare"} 0
heatreeve_load_bridged_heat_joules_total{direction="taken",load="dryer"} 0
heatreeve_load_bridged_heat_joules_total{direction="taken",load="hot-water"} 5
heatreeve_load_bridged_heat_joules_total{direction="taken",load="spare"} 0
`
	err := testutil.GatherAndCompare(registry(snapshot(), instant), strings.NewReader(want), "heatreeve_load_heat_joules_total", "heatreeve_load_bridged_heat_joules_total", "heatreeve_load_time_seconds_total")
	if err != nil {
		t.Error(err)
	}
}

// A counter, and it alone, tells after how many counts it was not known what had passed.
func TestUnclearCounts(t *testing.T) {
	s := snapshot()
	s.Tags[1].Counter, s.Tags[1].Resets, s.Tags[1].Leaps = true, 2, 3
	want := `
# HELP heatreeve_tag_unclear_counts_total Counts of a counter after which it is not known what passed: it fell (reset), or rose by more than can be (implausible).
# TYPE heatreeve_tag_unclear_counts_total counter
heatreeve_tag_unclear_counts_total{kind="implausible",tag="TT-2"} 3
heatreeve_tag_unclear_counts_total{kind="reset",tag="TT-2"} 2
`
	if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(want), "heatreeve_tag_unclear_counts_total"); err != nil {
		t.Error(err)
	}
}

// A vessel has a content, and neither flow nor ends; what is random of an uncertainty has
// a series of its own.
func TestVessel(t *testing.T) {
	s := snapshot()
	s.Loads[2].Figure = loads.Figure{At: instant, Duty: 40e3, Uncertainty: 900, Random: 800, Content: 338.15, Mass: 12e3, Idle: true}
	want := `
# HELP heatreeve_load_content_celsius Temperature of the content of a vessel, that the duty was computed from. It is T in the working of heatreeve explain.
# TYPE heatreeve_load_content_celsius gauge
heatreeve_load_content_celsius{load="spare"} 65
# HELP heatreeve_load_duty_random_uncertainty_watts Part of the standard uncertainty of the duty that changes from reading to reading, and averages out.
# TYPE heatreeve_load_duty_random_uncertainty_watts gauge
heatreeve_load_duty_random_uncertainty_watts{load="hot-water"} 2000
heatreeve_load_duty_random_uncertainty_watts{load="spare"} 800
# HELP heatreeve_load_inlet_celsius Inlet temperature that the duty was computed from. It is T1 in the working of heatreeve explain. With a hold it is T1h.
# TYPE heatreeve_load_inlet_celsius gauge
heatreeve_load_inlet_celsius{load="hot-water"} 130
# HELP heatreeve_load_mass_flow_kilograms_per_second Mass flow that the duty was computed from. It is m in the working of heatreeve explain.
# TYPE heatreeve_load_mass_flow_kilograms_per_second gauge
heatreeve_load_mass_flow_kilograms_per_second{load="hot-water"} 3
`
	if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(want), "heatreeve_load_content_celsius", "heatreeve_load_duty_random_uncertainty_watts", "heatreeve_load_inlet_celsius", "heatreeve_load_mass_flow_kilograms_per_second"); err != nil {
		t.Error(err)
	}
}

// The history is writable until a commit fails, and again once one does not.
func TestHistoryWritable(t *testing.T) {
	for fault, want := range map[string]string{"": "1", "no space left on device": "0"} {
		s := snapshot()
		s.History.Fault, s.History.Damaged = fault, 3
		text := `
# HELP heatreeve_history_writable 1 while the history takes what is written, 0 since a commit has failed.
# TYPE heatreeve_history_writable gauge
heatreeve_history_writable ` + want + "\n"
		text += `
# HELP heatreeve_history_damaged_records_total Records of the history that could not be read since the agent started, when something was to be made of them; the log tells which.
# TYPE heatreeve_history_damaged_records_total counter
heatreeve_history_damaged_records_total 3
`
		if err := testutil.GatherAndCompare(registry(s, instant), strings.NewReader(text), "heatreeve_history_writable", "heatreeve_history_damaged_records_total"); err != nil {
			t.Errorf("%q: %v", fault, err)
		}
	}
}

// A figure whose inputs have run out of age is left out, and the verdict is
// blind, though the snapshot is from before.
func TestRunOutFigureIsAbsent(t *testing.T) {
	want := `
# HELP heatreeve_load_duty_watts Duty at the last beat, positive in the load's own service; absent while the load is blind. It is Q in the working of heatreeve explain.
# TYPE heatreeve_load_duty_watts gauge
heatreeve_load_duty_watts{load="hot-water"} 500000
heatreeve_load_duty_watts{load="spare"} 0
`
	if err := testutil.GatherAndCompare(registry(snapshot(), instant+37e9), strings.NewReader(want), "heatreeve_load_duty_watts"); err != nil {
		t.Errorf("still held: %v", err)
	}
	late := registry(snapshot(), instant+38e9)
	if n, err := testutil.GatherAndCount(late, "heatreeve_load_duty_watts"); n != 0 || err != nil {
		t.Errorf("%d duties (%v) after the inputs ran out, want none", n, err)
	}
	families, err := late.Gather()
	if err != nil {
		t.Fatal(err)
	}
	blind := 0
	for _, f := range families {
		if f.GetName() != "heatreeve_load_verdict" {
			continue
		}
		for _, m := range f.GetMetric() {
			for _, l := range m.GetLabel() {
				if l.GetName() == "verdict" && l.GetValue() == "blind" && m.GetGauge().GetValue() == 1 {
					blind++
				}
			}
		}
	}
	if blind != 3 {
		t.Errorf("%d loads blind, want all 3", blind)
	}
}

// A duty that is the sensible part only says so, as long as it is shown.
func TestLatent(t *testing.T) {
	s := snapshot()
	s.Loads[2].Figure = loads.Figure{At: instant, Duty: 40e3, Remark: loads.Remark{Latent: true, Note: "sensible part only"}}
	want := `
# HELP heatreeve_load_latent 1 while the duty is the sensible part only, because vapour condenses in the load or may; otherwise 0, and absent while the load is blind.
# TYPE heatreeve_load_latent gauge
heatreeve_load_latent{load="hot-water"} 0
heatreeve_load_latent{load="spare"} 1
`
	if err := testutil.GatherAndCompare(registry(s, instant+5e9), strings.NewReader(want), "heatreeve_load_latent"); err != nil {
		t.Error(err)
	}
	if n, err := testutil.GatherAndCount(registry(s, instant+60e9), "heatreeve_load_latent"); n != 0 || err != nil {
		t.Errorf("%d series (%v) after the inputs ran out, want none", n, err)
	}
}

// The naming rules hold but for the one exception made on purpose.
func TestNamesKeepTheRules(t *testing.T) {
	r := registry(snapshot(), instant)
	problems, err := testutil.GatherAndLint(r)
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range problems {
		if p.Metric != "heatreeve_load_mass_flow_kilograms_per_second" {
			t.Errorf("%s: %s", p.Metric, p.Text)
		}
	}
	plain := regexp.MustCompile(`^heatreeve_[a-z0-9_]+$`)
	wrong := regexp.MustCompile(`kilo(watt|pascal|joule)|mega|percent|kelvin|_per_hour|minutes|hours`)
	families, err := r.Gather()
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range families {
		if !plain.MatchString(f.GetName()) || wrong.MatchString(f.GetName()) {
			t.Errorf("%s: not a plain name in base units", f.GetName())
		}
	}
}

func TestNothingBeforeTheFirstSnapshot(t *testing.T) {
	r := registry(nil, instant)
	if n, err := testutil.GatherAndCount(r); err != nil || n != 2 {
		t.Errorf("%d series (%v) before the first snapshot, want build_info and the commit histogram", n, err)
	}
}

// Each kind that there can be has its three series, whether or not it stands.
func TestWarningSeries(t *testing.T) {
	s := &view.Snapshot{Warnings: warn.Board{Watched: []warn.Watched{{Subject: "hall", Kind: design.WarnShort, Active: true, Shelved: true}, {Subject: "hall", Kind: design.WarnOver}}}}
	all, err := NewCollector(func() *view.Snapshot { return s }, func() int64 { return 0 }).Gather()
	if err != nil {
		t.Fatal(err)
	}
	got := make(map[string][]float64)
	for _, f := range all {
		for _, m := range f.Metric {
			got[f.GetName()] = append(got[f.GetName()], m.GetGauge().GetValue())
		}
	}
	for name, want := range map[string][]float64{"active": {1, 0}, "acknowledged": {0, 0}, "shelved": {1, 0}} {
		if x := got["heatreeve_warning_"+name]; !slices.Equal(x, want) {
			t.Errorf("%s: %v, want %v", name, x, want)
		}
	}
}
