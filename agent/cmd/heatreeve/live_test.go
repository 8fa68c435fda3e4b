//go:build services

package main

import (
	"encoding/json"
	"fmt"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"
)

const circuit = `
site: Test Bench
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:%PORT%", client_id: %ID%}
timing: {commit: 1 s}
tags:
  TT-1: {topic: bench/all, unit: °C, value: /ti, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  TT-2: {topic: bench/all, unit: °C, value: /to, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  FT-1: {topic: bench/all, unit: m3/h, value: /q, time: /ts, accuracy: 0.5 % of reading, max_age: 15 s}
  PT-1: {topic: bench/all, unit: barg, value: /p, time: /ts, accuracy: 0.25 % of 16 bar, max_age: 15 s}
loads:
  circuit:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: PT-1, meter_at: inlet, gives: heat}
    design: {duty: 600 kW, allow: 8 %}
`

func circuitSite(t *testing.T, b *broker, id string) string {
	return b.site(t, strings.ReplaceAll(circuit, "%ID%", id))
}

// steady publishes the circuit at 85 and 60 °C, 25 m³/h and 3.2 barg, stamped each
// five seconds from base (Unix milliseconds) + from to + until seconds.
func (b *broker) steady(t *testing.T, base, from, until int64) {
	t.Helper()
	pub := b.lines(t, "bench/all")
	for s := from; s <= until; s += 5 {
		pub.send(t, `{"ti":85.0,"to":60.0,"q":25.0,"p":3.2,"ts":%d}`, base+s*1000)
	}
	pub.close(t)
}

const (
	given    = `heatreeve_load_heat_joules_total{direction="given",load="circuit"}`
	taken    = `heatreeve_load_heat_joules_total{direction="taken",load="circuit"}`
	measured = `heatreeve_load_time_seconds_total{kind="measured",load="circuit"}`
	missing  = `heatreeve_load_time_seconds_total{kind="missing",load="circuit"}`
)

// iapws95 asks Debian's python3-iapws for the duty of 25 m³/h, metered at 85 °C,
// between 85 and 60 °C at 3.2 bar gauge.
const iapws95 = `
import json
from iapws import IAPWS95
p = (320e3 + 101.3e3) / 1e6
a, b = IAPWS95(T=358.15, P=p), IAPWS95(T=333.15, P=p)
print(json.dumps({"duty": 25/3600*a.rho*(a.h - b.h)*1e3, "mass": 25/3600*a.rho}))
`

// The built program, fed by a client that is not ours, shows the duty that the
// scientific formulation IAPWS-95 gives, and books duty times time.
func TestDutyAgainstIAPWS95(t *testing.T) {
	out, err := exec.Command("/usr/bin/python3", "-c", iapws95).Output()
	if err != nil {
		t.Fatalf("Debian's package python3-iapws: %v", err)
	}
	var want struct{ Duty, Mass float64 }
	if err := json.Unmarshal(out, &want); err != nil {
		t.Fatal(err)
	}

	b := startBroker(t)
	a := startAgent(t, circuitSite(t, b, "duty"))
	a.subscribed(t, b, "bench/all", "TT-1")
	const seconds = 900
	b.steady(t, time.Now().Add(-20*time.Minute).Truncate(time.Minute).UnixMilli(), 0, seconds+10)
	a.reaches(t, measured, seconds)

	booked := a.value(t, measured)
	within(t, "given heat", a.value(t, given), want.Duty*booked, 1e-3)
	if v := a.value(t, taken); v != 0 {
		t.Errorf("taken heat is %v J, want 0", v)
	}

	// Now live: stamps of this moment, so that the figure is fresh.
	eventually(t, "live duty", func() error {
		b.publish(t, "bench/all", 1, "-m", fmt.Sprintf(`{"ti":85.0,"to":60.0,"q":25.0,"p":3.2,"ts":%d}`, time.Now().UnixMilli()))
		if v := a.value(t, `heatreeve_load_duty_watts{load="circuit"}`); !(v > 0) {
			return fmt.Errorf("duty is %v", v)
		}
		return nil
	})
	within(t, "duty", a.value(t, `heatreeve_load_duty_watts{load="circuit"}`), want.Duty, 1e-3)
	within(t, "mass flow", a.value(t, `heatreeve_load_mass_flow_kilograms_per_second{load="circuit"}`), want.Mass, 1e-3)
	within(t, "inlet", a.value(t, `heatreeve_load_inlet_celsius{load="circuit"}`), 85, 1e-9)
}

// The broker goes away and comes back: the agent finds it again, the gap is
// missing time, and no heat is booked in it.
func TestBrokerGoneForAMinute(t *testing.T) {
	b := startBroker(t)
	a := startAgent(t, circuitSite(t, b, "gone"))
	a.subscribed(t, b, "bench/all", "TT-1")
	base := time.Now().Add(-20 * time.Minute).Truncate(time.Minute).UnixMilli()
	b.steady(t, base, 0, 120)
	a.reaches(t, measured, 114)
	steady := a.value(t, given) / a.value(t, measured) // W, with no gap yet
	b.end(t, syscall.SIGTERM)
	eventually(t, "the loss shows", func() error {
		if a.value(t, "heatreeve_broker_connected") != 0 {
			return fmt.Errorf("still connected")
		}
		return nil
	})
	if _, err := a.get("/readyz"); err == nil {
		t.Error("/readyz is content without a broker")
	}
	if _, err := a.get("/healthz"); err != nil {
		t.Errorf("/healthz: %v; the agent itself is well", err)
	}
	b.start(t)
	a.reaches(t, "heatreeve_broker_connected", 1)
	a.subscribed(t, b, "bench/all", "TT-1")
	b.steady(t, base, 180, 300)
	// The last reading before the gap is held for its 15 s, so 120 to 135 s are
	// measured and 135 to 180 s are missing.
	a.reaches(t, measured, 294-45)
	if v := a.value(t, missing); v != 45 {
		t.Errorf("missing %v s, want 45", v)
	}
	within(t, "heat per measured second", a.value(t, given)/a.value(t, measured), steady, 1e-9)
}

// Mosquitto as it comes allows 20 messages in flight and keeps 1,000 more; with a
// commit each five seconds and a hundred messages a second it would lose most of
// them if the agent did not notice that it waits.
func TestBrokerWithItsOwnLimits(t *testing.T) {
	b := startBrokerWith(t, "max_inflight_messages 20\nmax_queued_messages 1000\n")
	a := startAgent(t, b.site(t, strings.NewReplacer("%ID%", "limits", "commit: 1 s", "commit: 5 s").Replace(circuit)))
	a.subscribed(t, b, "bench/all", "TT-1")
	pub := b.lines(t, "bench/all")
	base := time.Now().Add(-time.Hour).UnixMilli()
	pace := time.NewTicker(10 * time.Millisecond)
	defer pace.Stop()
	const messages = 2500
	for i := range int64(messages) {
		<-pace.C
		pub.send(t, `{"ti":85,"to":60,"q":25,"p":3.2,"ts":%d}`, base+i*1000)
	}
	pub.close(t)
	a.reaches(t, `heatreeve_tag_readings_total{tag="TT-1"}`, messages)
	a.reaches(t, measured, messages-1-5-1)
	if v := a.value(t, missing); v != 0 {
		t.Errorf("missing %v s, want 0", v)
	}
}
