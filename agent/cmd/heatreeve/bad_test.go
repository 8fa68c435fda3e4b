//go:build services

package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

// A thousand bad messages of twenty kinds, sent by a client that is not ours,
// leave the load unmoved, and each is counted under a reason.
func TestThousandBadMessages(t *testing.T) {
	b := startBroker(t)
	a := startAgent(t, circuitSite(t, b, "bad"))
	a.subscribed(t, b, "bench/all", "TT-1")
	base := time.Now().Add(-20 * time.Minute).Truncate(time.Minute).UnixMilli()
	b.steady(t, base, 0, 60)
	a.reaches(t, measured, 54)
	heat := a.value(t, given) / a.value(t, measured)
	before := refusals(t, a)

	sendBad(t, b, base+60_000)
	const each, kinds = 50, 20
	want := map[string]float64{
		"empty": 100, "not-json": 250, "not-finite": 50, "truncated": 100, "value-missing": 50, "wrong-type": 200,
		"time-missing": 50, "time-wrong": 50, "unset-clock": 50, "ahead": 50, "too-large": 50,
	}
	eventually(t, "all bad messages are counted", func() error {
		var sum float64
		for _, n := range refusals(t, a) {
			sum += n
		}
		for _, n := range before {
			sum -= n
		}
		if sum != each*kinds {
			return fmt.Errorf("%v of %d", sum, each*kinds)
		}
		return nil
	})
	after := refusals(t, a)
	for reason, n := range want {
		if got := after[reason] - before[reason]; got != n {
			t.Errorf("reason %q: %v messages, want %v", reason, got, n)
		}
	}
	b.steady(t, base, 65, 120)
	a.reaches(t, measured, 114)
	within(t, "heat per measured second", a.value(t, given)/a.value(t, measured), heat, 1e-12)
	if v := a.value(t, missing); v != 0 {
		t.Errorf("missing %v s, want 0: the good readings never stopped", v)
	}
}

// refusals returns how many messages of TT-1 were refused, by reason.
func refusals(t *testing.T, a *agentUnderTest) map[string]float64 {
	t.Helper()
	all, err := a.series()
	if err != nil {
		t.Fatal(err)
	}
	out := make(map[string]float64)
	for series, value := range all {
		rest, ok := strings.CutPrefix(series, `heatreeve_tag_refused_total{reason="`)
		if !ok || !strings.HasSuffix(rest, `,tag="TT-1"}`) {
			continue
		}
		reason, _, _ := strings.Cut(rest, `"`)
		if out[reason], err = strconv.ParseFloat(value, 64); err != nil {
			t.Fatal(err)
		}
	}
	return out
}

// sendBad sends fifty messages of each of twenty kinds; ts is a stamp that would
// be good.
func sendBad(t *testing.T, b *broker, ts int64) {
	t.Helper()
	file := func(content []byte) string {
		path := filepath.Join(t.TempDir(), "payload")
		if err := os.WriteFile(path, content, 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	object := func(ti, ts string) []string {
		return []string{"-m", `{"ti":` + ti + `,"to":60,"q":25,"p":3.2,"ts":` + ts + `}`}
	}
	stamp := strconv.FormatInt(ts, 10)
	huge := []byte(`{"ti":` + strings.Repeat("1", 70_000) + `}`)
	for _, how := range [][]string{
		{"-n"},         // no payload
		{"-m", "   "},  // blanks
		{"-m", "NaN"},  // a word
		{"-m", "12,4"}, // a bare number with a comma
		{"-f", file([]byte{0xff, 0x00, 0x9c, 0x7f})},       // binary
		{"-m", `{"ti":85,"ti":86,"ts":` + stamp + `}`},     // a name twice
		{"-m", `{"ti":85,"ts":` + stamp + `} trailing`},    // something after the end
		{"-m", "<reading>85</reading>"},                    // another format
		{"-m", `{"ti":85,"to":60,"ts":`},                   // cut off
		{"-m", `{"ti":85`},                                 // cut off earlier
		{"-m", `{"ts":` + stamp + `}`},                     // no value
		object(`"---"`, stamp),                             // a display without a value
		object(`"85"`, stamp),                              // text
		object("true", stamp),                              // a switch
		object("[85]", stamp),                              // a list
		{"-m", `{"ti":85,"to":60,"q":25,"p":3.2}`},         // no stamp
		object("85", `"yesterday"`),                        // no time
		object("85", "0"),                                  // 1970
		object("85", strconv.FormatInt(ts+86_400_000, 10)), // tomorrow
		{"-f", file(huge)},                                 // larger than any reading
	} {
		b.publish(t, "bench/all", 50, how...)
	}
}
