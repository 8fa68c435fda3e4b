//go:build services

package main

import (
	"encoding/json"
	"fmt"
	"os/exec"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"

	"heatreeve/agent/warn"
)

const warned = `
site: Test Bench
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:%PORT%", client_id: warned}
publish: {topic: bench/heat, every: 1 s}
timing: {commit: 1 s}
tags:
  TT-1: {topic: bench/tt-1, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  TT-2: {topic: bench/tt-2, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  FT-1: {topic: bench/ft-1, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 15 s}
loads:
  circuit:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 3 barg, gives: heat}
    design: {duty: 193 kW, allow: 8 %, lasting: 2 min}
`

// steadyStream are readings each five seconds, of a flow that is the design's or less.
func steadyStream(from time.Time, span time.Duration, flow float64) (all []reading) {
	for s := 0.0; s < span.Seconds(); s += 5 {
		at := from.UnixMilli() + int64(1000*s)
		for topic, v := range map[string]float64{"bench/tt-1": 353 - 273.15, "bench/tt-2": 330 - 273.15, "bench/ft-1": flow} {
			all = append(all, reading{topic, fmt.Sprintf(`{"v":%g,"ts":%d}`, v, at), s})
		}
	}
	return all
}

// command runs the program beside the agent.
func (a *agentUnderTest) command(t *testing.T, args ...string) (string, int) {
	t.Helper()
	cmd := exec.Command(binary(t), append(args, "--data", a.data)...)
	out, _ := cmd.CombinedOutput() // the status tells
	return string(out), cmd.ProcessState.ExitCode()
}

// A warning of a real agent is acknowledged and shelved; kill -9 right after the answer loses
// neither; its end comes to who is subscribed, and to who comes later.
func TestWarningThroughAKill(t *testing.T) {
	b := startBroker(t)
	a := startAgent(t, b.site(t, warned))
	a.subscribed(t, b, "bench/tt-1", "TT-1")
	c := b.publisher(t)
	base := time.Now().Add(-30 * time.Minute).Truncate(time.Minute)
	first := steadyStream(base, 8*time.Minute, 1.4)
	send(t, c, first, 2*time.Second)
	stop := keepUp(c, first[len(first)-1])
	const active = `heatreeve_warning_active{kind="short",subject="circuit"}`
	a.reaches(t, active, 1)
	if out, status := a.command(t, "warnings"); status != exitStands || !strings.Contains(out, "circuit: short, unacknowledged") {
		t.Errorf("status %d: %s", status, out)
	}
	for _, args := range [][]string{{"acknowledge", "circuit", "--kind", "short"}, {"shelve", "circuit", "--kind", "over", "--for", "2h"}} {
		if out, status := a.command(t, append(args, "--by", "J. Marsh", "--reason", "pump")...); status != exitGood {
			t.Fatalf("status %d: %s", status, out)
		}
	}
	a.process.end(t, syscall.SIGKILL)
	if out, status := a.command(t, "warnings", "--format", "json"); status != exitStands || !strings.Contains(out, `"state": "acknowledged"`) {
		t.Errorf("without the agent: status %d: %s", status, out)
	}
	a.start(t)
	a.reaches(t, `heatreeve_warning_acknowledged{kind="short",subject="circuit"}`, 1)
	a.reaches(t, `heatreeve_warning_shelved{kind="over",subject="circuit"}`, 1)
	stop()
	send(t, c, steadyStream(base.Add(8*time.Minute), 10*time.Minute, 2), 2*time.Second)
	eventually(t, "the warning is over", func() error {
		if v := a.value(t, active); v != 0 {
			return fmt.Errorf("%s is %v", active, v)
		}
		return nil
	})
	if d := retained(t, c, "bench/heat/warnings/circuit/short"); d.Active || d.End == nil || d.State != warn.Normal {
		t.Errorf("retained at the end: %+v", d)
	}
	eventually(t, "the end is on disk", func() error { // which comes after it was told
		out, status := a.command(t, "events", "--subject", "circuit", "--format", "csv")
		for _, want := range []string{",warning,circuit,\"short, ended", ",acknowledged,circuit,", ",shelved,circuit,"} {
			if status != exitGood || strings.Count(out, want) != 1 {
				return fmt.Errorf("status %d: %s, want %q once", status, out, want)
			}
		}
		return nil
	})
	a.process.end(t, syscall.SIGTERM)
	if out, status := a.command(t, "warnings"); status != exitGood || !strings.Contains(out, "shelf: over of circuit") {
		t.Errorf("after the end: status %d: %s", status, out)
	}
}

// retained waits for a retained warning that is over.
func retained(t *testing.T, c mqtt.Client, topic string) (d warn.Document) {
	t.Helper()
	var mu sync.Mutex
	token := c.Subscribe(topic, 1, func(_ mqtt.Client, m mqtt.Message) {
		mu.Lock()
		defer mu.Unlock()
		if err := json.Unmarshal(m.Payload(), &d); err != nil {
			t.Error(err)
		}
	})
	if !token.WaitTimeout(patience) || token.Error() != nil {
		t.Fatal(token.Error())
	}
	eventually(t, "the end of the warning on "+topic, func() error {
		mu.Lock()
		defer mu.Unlock()
		if d.Subject == "" || d.Active {
			return fmt.Errorf("is %+v", d)
		}
		return nil
	})
	return d
}
