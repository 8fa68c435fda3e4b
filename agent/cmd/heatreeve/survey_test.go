package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/demo"
	"heatreeve/agent/site"
	"heatreeve/agent/survey"
)

// surveyOf is a survey of two circuits over a minute, and its draft.
func surveyOf() (*survey.Survey, survey.Draft) {
	s := survey.New(0)
	epoch := time.Date(2026, 10, 24, 7, 0, 0, 0, time.UTC)
	say := func(topic, payload string, at time.Time, kept bool) {
		s.Hear(survey.Message{Topic: topic, Payload: []byte(payload), Retained: kept, At: at.UnixNano()})
	}
	say("creamery/about", "gateway 4", epoch, true)
	for i := range 12 {
		at := epoch.Add(time.Duration(i) * 5 * time.Second)
		stamp := at.Add(-250 * time.Millisecond).UnixMilli()
		wobble := float64(i%3) / 10
		for topic, value := range map[string]float64{"TT-201": 129.9, "TT-202": 90.1, "FT-201": 13.5, "PT-201": 6} {
			say("creamery/hw/"+topic, fmt.Sprintf(`{"v": %.1f, "ts": %d}`, value+wobble, stamp), at, false)
		}
		say("creamery/east/meter", fmt.Sprintf(`{"supply_degC": %.1f, "return_degC": %.1f, "flow_m3h": 4.2, "energy_kWh": %d}`, 70+wobble, 50-wobble, 18250+i), at, false)
	}
	return s, survey.Draft{Broker: site.Broker{URL: "mqtt://127.0.0.1:1883"}, Topics: s.Topics(), At: epoch, For: time.Minute}
}

// The README shows the table of a survey as it is.
func TestReadmeShowsASurvey(t *testing.T) {
	s, d := surveyOf()
	var table strings.Builder
	if err := surveyTable(&table, s, d); err != nil {
		t.Fatal(err)
	}
	_, rest, _ := strings.Cut(readme(t), "### What the broker carries")
	_, rest, ok := strings.Cut(rest, "```\n")
	shown, _, closed := strings.Cut(rest, "```")
	if !ok || !closed || !strings.HasPrefix(table.String(), shown) || !strings.Contains(shown, "Loads that names suggest") {
		t.Errorf("the README shows\n%s\na survey prints\n%s", shown, table.String())
	}
}

func TestSurveyTellsWrongUsage(t *testing.T) {
	there := filepath.Join(t.TempDir(), "site.yaml")
	if err := os.WriteFile(there, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		args []string
		want string
	}{
		{nil, "--broker must be given"},
		{[]string{"--broker", "mqtt://h", "--for", "0s"}, "--for 0s: allowed are 1s to"},
		{[]string{"--broker", "mqtt://h", "--format", "csv"}, `--format "csv": allowed are table, json`},
		{[]string{"--broker", "mqtt://h", "--most", "0"}, "--most 0"},
		{[]string{"--broker", "mqtt://h", "--draft", there}, "is there already"},
		{[]string{"--broker", "mqtt://h", "--draft", there, "more"}, `unexpected "more"`},
		{[]string{"--broker", "ftp://h"}, `scheme "ftp"`},
		{[]string{"--broker", "mqtt://h", "--filter", "a/#/b"}, `filter "a/#/b"`},
	} {
		if status, out, errs := invoke(append([]string{"survey"}, tt.args...)...); status != exitWrong || out != "" || !strings.Contains(errs, tt.want) {
			t.Errorf("%q: status %d, %q, %q; want %q", tt.args, status, out, errs, tt.want)
		}
	}
	if status, _, errs := invoke("survey", "--broker", "mqtt://127.0.0.1:1"); status != exitFailed || !strings.Contains(errs, "refused") {
		t.Errorf("no broker: status %d, %q", status, errs)
	}
}

// A survey of a broker writes table, JSON and draft; a check of the draft wants what is to be filled in.
func TestSurveyOfABroker(t *testing.T) {
	d, err := demo.Start(demo.Options{Speed: 60})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	done := make(chan error, 1)
	go func() { done <- d.Run(t.Context()) }()
	draft := filepath.Join(t.TempDir(), "site.yaml")
	args := []string{"survey", "--broker", d.Site.Broker.URL, "--for", "1s", "--filter", "creamery/hw/#", "--format", "json", "--draft", draft}
	status, out, errs := invoke(args...)
	var got surveyed
	if err := json.Unmarshal([]byte(out), &got); err != nil || status != exitGood || len(got.Topics) != 4 || got.Messages < 4 || !strings.Contains(errs, draft) {
		t.Fatalf("status %d, %q, %v, %+v", status, errs, err, got)
	}
	_, err = site.Load(draft)
	var faults site.Faults
	if !errors.As(err, &faults) || len(faults) == 0 || faults[0].Message != "is still to be filled in" {
		t.Errorf("check of the draft: %v", err)
	}
	if status, out, _ := invoke("survey", "--broker", d.Site.Broker.URL, "--for", "1s", "--draft", "-"); status != exitGood || !strings.Contains(out, "\nloads:\n") {
		t.Errorf("draft to the output: status %d\n%s", status, out)
	}
}
